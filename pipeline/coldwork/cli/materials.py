"""`coldwork materials`."""

from typing import Annotated

import typer

from coldwork.cli.reporting import reporting, show, show_json

__all__ = ["materials"]


def materials(
    name: Annotated[
        str | None, typer.Argument(help="One metal, or its own .toml file; all of them without.")
    ] = None,
    *,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Show the library of metals: every value with its uncertainty and source."""
    with reporting():
        from coldwork.jobs import materials as job

        if json:
            show_json(job.as_json(name))
        else:
            show(job.table() if name is None else job.detail(name))
