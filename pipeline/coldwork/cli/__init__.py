"""The command line: one small file a command; options in, one job, words out."""

import typer

from coldwork.cli import (
    anneal,
    calibrate,
    check,
    compare,
    contract,
    contrast,
    estimate,
    inspect,
    materials,
    new,
    plan,
    process,
    trace,
)

__all__ = ["app", "main"]

app = typer.Typer(
    name="coldwork",
    help="Dislocation density and stored energy of cold work, coupon by coupon, with "
    "uncertainty, decisions and a record that leads back to the raw reading.",
    epilog="Exit: 0 done; 1 internal error; 2 usage; 3 done, and something asks for a person; "
    "4 batch refused, nothing written; 5 results could not be written; 130 interrupted.",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
)
for command in (
    new,
    inspect,
    check,
    process,
    trace,
    compare,
    contrast,
    plan,
    anneal,
    estimate,
    calibrate,
    materials,
    contract,
):
    name = command.__name__.rpartition(".")[2]
    app.command(name)(getattr(command, name))


def main() -> None:
    """Run the command line."""
    app()
