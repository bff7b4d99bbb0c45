"""`coldwork anneal`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.reporting import note, reporting, show, show_json

__all__ = ["anneal"]


def anneal(
    results: Annotated[Path, typer.Argument(metavar="RESULTS", help="A batch's results folder.")],
    *,
    furnace: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE",
            help="TOML: boundary, particles, constants of recovery and recrystallisation.",
        ),
    ] = None,
    schedule: Annotated[
        Path | None, typer.Option(metavar="FILE", help="CSV: time and temperature.")
    ] = None,
    into: Annotated[
        Path | None,
        typer.Option("--into", metavar="DIR", help="New folder for table, account and plots."),
    ] = None,
    plots: Annotated[bool, typer.Option("--plots/--no-plots", help="Draw into DIR.")] = True,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Estimate what the stored energy does in the furnace: pressures, sizes, recovery, heat."""
    with reporting():
        from coldwork.jobs.anneal import anneal as job

        found = job(results, furnace, schedule)
        if json:
            show_json(found.as_json())
        else:
            show(found.text())
        if into is not None:
            note(f"written: {found.write(into, plots=plots)}")
