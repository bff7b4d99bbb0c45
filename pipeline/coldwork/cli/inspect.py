"""`coldwork inspect`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.reporting import reporting, show, show_json
from coldwork.errors import Exit

__all__ = ["inspect"]


def inspect(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="A text file or a workbook.")],
    *,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Look at an unknown file: how it is written, and a layout to start from. Reads only."""
    with reporting():
        from coldwork.jobs.inspect import inspect as job

        inspected = job(file)
        if json:
            show_json(inspected.as_json())
        else:
            show(inspected.text())
        if inspected.draft is None:
            raise typer.Exit(Exit.ATTENTION)
