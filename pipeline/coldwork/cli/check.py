"""`coldwork check`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.reporting import reporting, show, show_json
from coldwork.errors import Exit

__all__ = ["check"]


def check(
    batch: Annotated[Path, typer.Argument(metavar="BATCH", help="A batch folder.")],
    *,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Validate a batch: what would be refused, set aside or flagged. Writes nothing."""
    with reporting():
        from coldwork.jobs.check import check as job

        checked = job(batch)
        if json:
            show_json(checked.as_json())
        else:
            show(checked.text())
        if checked.asks:
            raise typer.Exit(Exit.ATTENTION)
