"""`coldwork contract`."""

from typing import Annotated

import typer

from coldwork.cli.reporting import reporting, show, show_json

__all__ = ["contract"]


def contract(
    table: Annotated[
        str | None, typer.Argument(metavar="[TABLE]", help="One table; an overview without it.")
    ] = None,
    *,
    json: Annotated[bool, typer.Option("--json", help="For a program to read.")] = False,
) -> None:
    """Show a table's columns, units and rules, as they come in and as they go out."""
    with reporting():
        from coldwork.jobs import contract as job

        if json:
            show_json(job.as_json(table))
        else:
            show(job.overview() if table is None else job.render(table))
