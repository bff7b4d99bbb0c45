"""How a command ends: what the person reads on stderr, and the exit code."""

import os
import signal
import sys
import traceback
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from types import FrameType
from typing import Any

import typer

from coldwork.errors import ColdworkError, Exit

__all__ = ["note", "reporting", "show", "show_json"]


@contextmanager
def reporting() -> Iterator[None]:
    """Turn every ending of a command into words on stderr and an exit code.

    Raises
    ------
    typer.Exit
        With the code that belongs to what happened.
    """
    signal.signal(signal.SIGTERM, _stop)
    try:
        yield
        sys.stdout.flush()
    except ColdworkError as error:
        note(str(error))
        raise typer.Exit(error.exit) from error
    except KeyboardInterrupt:
        note("interrupted; nothing half-written was left behind")
        raise typer.Exit(Exit.INTERRUPTED) from None
    except BrokenPipeError:  # the reader has seen enough, as `head` has
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        raise typer.Exit(Exit.DONE) from None
    except typer.Exit:
        raise
    except Exception as error:
        note(_internal(error))
        raise typer.Exit(Exit.INTERNAL) from error


def note(words: str) -> None:
    """Write words for a person to stderr."""
    typer.echo(words, err=True)


def show(words: str) -> None:
    """Write data to stdout."""
    typer.echo(words)


def show_json(document: Any) -> None:  # noqa: ANN401 - whatever JSON can hold
    """Write a document to stdout as JSON."""
    import json  # here: help must answer at once

    typer.echo(json.dumps(document, indent=2, sort_keys=True, allow_nan=False, ensure_ascii=False))


def _internal(error: Exception) -> str:
    """Name the error and the place, in two lines, without a traceback."""
    frames = traceback.extract_tb(error.__traceback__)
    ours = [f for f in frames if "coldwork" in f.filename] or list(frames)
    place = f"{Path(ours[-1].filename).name}, line {ours[-1].lineno}" if ours else "?"
    return (
        f"internal error: {type(error).__name__}: {error}\n"
        f"at {place}; nothing half-written was left behind, and what was finished before stays. "
        "This is a fault of coldwork, not of the batch: please report it with the batch sheet."
    )


def _stop(_signal: int, _frame: FrameType | None) -> None:
    raise KeyboardInterrupt
