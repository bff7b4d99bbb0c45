"""`coldwork trace`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.reporting import reporting, show, show_json

__all__ = ["trace"]


def trace(
    results: Annotated[Path, typer.Argument(metavar="RESULTS", help="A batch's results folder.")],
    coupon: Annotated[str, typer.Argument(metavar="COUPON", help="Name of the coupon.")],
    *,
    batch: Annotated[
        Path | None,
        typer.Option(metavar="BATCH", help="The batch folder, where the results are a summary."),
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Show how one coupon's answer came about, from the raw cell to the decision."""
    with reporting():
        from coldwork.jobs.run import record_again
        from coldwork.jobs.trace import trace as job

        account = job(results, coupon, batch=batch, retrace=record_again)
        if json:
            show_json(account.as_json())
        else:
            show(account.text())
