"""The files of a table, whatever they were written by, as blocks of text of one form."""

from collections.abc import Iterator, Sequence
from typing import Protocol

from coldwork.errors import Cause
from coldwork.intake.closing import ClosingLine
from coldwork.intake.files import BLOCK_BYTES, TableFiles
from coldwork.intake.laid_out import LaidOutText
from coldwork.intake.text import TableText, TextBlock
from coldwork.intake.workbook import WorkbookText

__all__ = ["TableSource", "check_headers", "table_text"]


class TableSource(Protocol):
    """One file of a table as blocks of text."""

    @property
    def columns(self) -> tuple[str, ...]:
        """The file's own header, once it was read."""

    @property
    def unused_columns(self) -> tuple[str, ...]:
        """Columns of it that a layout passes over."""

    @property
    def closing(self) -> Sequence[ClosingLine]:
        """Lines that close the table, at the end."""

    @property
    def sha256(self) -> str:
        """Digest of what was read; empty before the end."""

    @property
    def size(self) -> int:
        """How much was read so far [byte]."""

    def __iter__(self) -> Iterator[TextBlock]:
        """Read the file from front to back.

        Raises
        ------
        BatchRefused
            At the end, with all that is wrong with the file as a whole.
        """

    def header_causes(self) -> list[Cause]:
        """Read up to the header and say what is wrong up to there; nothing is raised."""


def table_text(files: TableFiles, file: int, block_bytes: int = BLOCK_BYTES) -> TableSource:
    """Give the reader of one file of a table.

    Parameters
    ----------
    files : TableFiles
        The table.
    file : int
        Which of its files.
    block_bytes : int, optional
        How much is read at once. [byte]

    Returns
    -------
    TableSource
        For the tidy form, or for what the file's layout says.
    """
    layout = files.layout(file)
    if layout is None:
        return TableText(files, file, block_bytes)
    if layout.workbook is not None:
        return WorkbookText(files, file)
    return LaidOutText(files, file, block_bytes)


def check_headers(files: TableFiles) -> list[Cause]:
    """Say why the files of a table cannot be read, as far as their headers tell.

    Parameters
    ----------
    files : TableFiles
        The table.

    Returns
    -------
    list of Cause
        Files that are missing, unreadable or empty, and headers that do not fit the
        contract or their layout; empty where all is well so far.
    """
    texts = (table_text(files, file) for file in range(len(files.paths)))
    return [cause for text in texts for cause in text.header_causes()]
