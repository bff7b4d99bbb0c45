"""Numbers on the command line, with a word about the decimal comma."""

import typer

__all__ = ["number"]


def number(text: str) -> float:
    """Read a number of an option.

    Parameters
    ----------
    text : str
        As it was typed.

    Returns
    -------
    float
        The number.

    Raises
    ------
    typer.BadParameter
        If it is none; with a hint where a decimal comma is all that is wrong.
    """
    try:
        return float(text)
    except ValueError as error:
        message = f"{text!r} is not a number."
        pointed = text.replace(",", ".")
        if text.count(",") == 1 and "." not in text and _reads(pointed):
            message = f"{text!r} is not a number; write the decimal comma as a point: {pointed}"
        raise typer.BadParameter(message) from error


def _reads(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True
