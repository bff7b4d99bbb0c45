"""Every exception that coldwork raises on purpose.

The tree::

    ColdworkError
    +-- InvalidArgument     a formula was given an impossible value (also a ValueError)
    +-- UsageError          the caller asked for something that does not exist: exit 2
    +-- BatchRefused        a batch that cannot be trusted as a whole: exit 4
    +-- ResultsNotWritten   the results could not be put where they belong: exit 5

Anything else that escapes is an internal error: exit 1.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum
from typing import ClassVar

__all__ = [
    "BatchRefused",
    "Cause",
    "ColdworkError",
    "Exit",
    "InvalidArgument",
    "ResultsNotWritten",
    "UsageError",
]


class Exit(IntEnum):
    """Exit codes of the command line."""

    DONE = 0
    INTERNAL = 1
    USAGE = 2
    ATTENTION = 3  # done, and something asks for a person
    REFUSED = 4
    NOT_WRITTEN = 5
    INTERRUPTED = 130


class ColdworkError(Exception):
    """Base of every error that is meant to be read by a person."""

    exit: ClassVar[Exit] = Exit.INTERNAL


class InvalidArgument(ColdworkError, ValueError):  # noqa: N818 - says what happened
    """An argument of a formula is outside what the formula can take."""


class UsageError(ColdworkError):
    """A name, option or path that the caller gave does not exist or does not fit."""

    exit = Exit.USAGE


class ResultsNotWritten(ColdworkError):  # noqa: N818 - says what happened
    """Results could not be written whole; nothing was left behind."""

    exit = Exit.NOT_WRITTEN


@dataclass(frozen=True)
class Cause:
    """One reason why a batch is refused.

    Attributes
    ----------
    where : str
        File, and line, column or key where they are known.
    what : str
        What was found there.
    why : str
        The rule that it breaks.
    mend : str
        What to do about it.
    """

    where: str
    what: str
    why: str
    mend: str

    def __str__(self) -> str:
        return f"{self.where}: {self.what}. {self.why} {self.mend}".strip()


class BatchRefused(ColdworkError):  # noqa: N818 - says what happened
    """A batch that cannot be trusted as a whole, with every cause at once.

    Parameters
    ----------
    batch : str
        The batch's folder as the caller named it.
    causes : sequence of Cause
        All that was found; never empty.
    """

    exit = Exit.REFUSED

    def __init__(self, batch: str, causes: Sequence[Cause]) -> None:
        self.batch = batch
        self.causes = tuple(causes)
        lines = "\n".join(f"  {i}. {cause}" for i, cause in enumerate(self.causes, 1))
        noun = "cause" if len(self.causes) == 1 else "causes"
        super().__init__(f"{batch}: refused, {len(self.causes)} {noun}, nothing written\n{lines}")
