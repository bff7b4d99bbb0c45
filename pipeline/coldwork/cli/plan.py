"""`coldwork plan`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.numbers import number
from coldwork.cli.reporting import note, reporting, show, show_json

__all__ = ["plan"]


def plan(
    results: Annotated[
        Path, typer.Argument(metavar="RESULTS", help="A results folder, or a batch folder.")
    ],
    name: Annotated[
        str, typer.Argument(metavar="NAME", help="The lot or condition to plan after.")
    ],
    *,
    coupon_cost: Annotated[
        float, typer.Option(metavar="COST", help="Of one coupon, in any unit.", parser=number)
    ],
    indent_cost: Annotated[
        float, typer.Option(metavar="COST", help="Of one indent, in that unit.", parser=number)
    ],
    by: Annotated[str, typer.Option(help="What NAME is: lot or condition.")] = "condition",
    quantity: Annotated[
        str | None, typer.Option(metavar="COLUMN", help="Of coupons.csv; energy per gram without.")
    ] = None,
    relative_u: Annotated[
        float | None,
        typer.Option(metavar="REL", help="Wanted u of the mean over its value.", parser=number),
    ] = None,
    half_width: Annotated[
        float | None,
        typer.Option(metavar="W", help="Wanted half of the interval of the mean.", parser=number),
    ] = None,
    risk: Annotated[
        float | None,
        typer.Option(metavar="P", help="Wanted chance of being outside LIMIT.", parser=number),
    ] = None,
    limit: Annotated[
        str | None, typer.Option(metavar="ID", help="Limit of the sheet, for --risk.")
    ] = None,
    basis: Annotated[
        str | None,
        typer.Option(help="total, or own: shared inputs as exact. The limit's, or total."),
    ] = None,
    force: Annotated[
        list[float] | None,
        typer.Option(metavar="N", help="Force of the indents; repeatable.", parser=number),
    ] = None,
    into: Annotated[
        Path | None, typer.Option(metavar="DIR", help="New folder for table, account and plot.")
    ] = None,
    plots: Annotated[bool, typer.Option("--plots/--no-plots", help="Draw into DIR.")] = True,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Say how many coupons and indents the next batch needs, and what to improve first."""
    with reporting():
        from coldwork.jobs.plan import Wanted
        from coldwork.jobs.plan import plan as job

        wanted = Wanted(
            quantity,
            relative_u,
            half_width,
            risk,
            limit,
            basis,
            coupon_cost,
            indent_cost,
            tuple(force or ()),
        )
        found = job(results, name, by, wanted)
        if into is not None:
            found.write(into, plots=plots)
        if json:
            show_json(found.as_json())
        else:
            show(found.text())
        if into is not None:
            note(f"written: {into}")
