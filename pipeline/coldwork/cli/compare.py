"""`coldwork compare`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.reporting import note, reporting, show, show_json

__all__ = ["compare"]


def compare(
    batch: Annotated[Path, typer.Argument(metavar="BATCH", help="A batch folder.")],
    *,
    vary: Annotated[
        list[str],
        typer.Option(
            metavar="KEY=V1,V2,...",
            help="A key of the sheet and its other values; repeated, the full grid.",
        ),
    ],
    into: Annotated[
        Path | None,
        typer.Option("--into", metavar="DIR", help="New folder for tables, account and plot."),
    ] = None,
    plots: Annotated[bool, typer.Option("--plots/--no-plots", help="Draw into DIR.")] = True,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Show what other choices of the sheet would move, reading the batch only once."""
    with reporting():
        from coldwork.jobs.compare import compare as job

        found = job(batch, vary, into, plots=plots)
        if json:
            show_json(found.as_json())
        else:
            show(found.text())
        if into is not None:
            note(f"written: {into}")
