"""`coldwork new`."""

from pathlib import Path
from typing import Annotated

import typer

from coldwork.cli.reporting import note, reporting, show

__all__ = ["new"]


def new(
    folder: Annotated[Path, typer.Argument(metavar="DIR", help="Folder of the new batch.")],
) -> None:
    """Start a batch folder: a commented sheet and empty tables."""
    with reporting():
        from coldwork.jobs.new import new as job

        for path in job(folder):
            show(str(path))
        note(
            "Fill the tables, say the required keys of batch.toml, then run: "
            f"coldwork check {folder}"
        )
