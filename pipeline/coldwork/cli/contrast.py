"""`coldwork contrast`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.numbers import number
from coldwork.cli.reporting import reporting, show, show_json

__all__ = ["contrast"]


def contrast(
    results: Annotated[Path, typer.Argument(metavar="RESULTS", help="A batch's results folder.")],
    names: Annotated[
        list[str],
        typer.Argument(metavar="A B...", help="The first is held against each of the others."),
    ],
    *,
    by: Annotated[str, typer.Option(help="What the names are: coupon, lot or condition.")] = (
        "coupon"
    ),
    other: Annotated[
        Path | None,
        typer.Option("--and", metavar="RESULTS", help="Results that all but the first are in."),
    ] = None,
    margin: Annotated[
        float | None,
        typer.Option(
            metavar="REL", help="Relative difference that would not matter, as 0.05.", parser=number
        ),
    ] = None,
    correction: Annotated[
        str, typer.Option(help="Of several comparisons: holm, bonferroni or none.")
    ] = "holm",
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Tell whether coupons, lots or conditions differ, with what their errors share."""
    with reporting():
        from coldwork.jobs.contrast import contrasts

        found = contrasts(results, names, by=by, other=other, margin=margin, correction=correction)
        if json:
            show_json(found.as_json())
        else:
            show(found.text())
