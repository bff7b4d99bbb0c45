"""A file of lines, such as ``records.jsonl``."""

from collections.abc import Sequence
from pathlib import Path

from coldwork.results.disk import HashedFile, Output

__all__ = ["LineWriter"]


class LineWriter:
    """Writes whole lines and counts them.

    Parameters
    ----------
    folder : Path
        Where the file goes.
    name : str
        Its name.

    Raises
    ------
    ResultsNotWritten
        If the file cannot be made.
    """

    def __init__(self, folder: Path, name: str) -> None:
        self.rows = 0
        self._name = name
        self._file = HashedFile(folder / name)
        self._output: Output | None = None

    @property
    def closed(self) -> bool:
        """Whether the file is finished or abandoned."""
        return self._file.closed

    @property
    def outputs(self) -> tuple[Output, ...]:
        """The finished file; empty while it is open."""
        return () if self._output is None else (self._output,)

    def write(self, lines: Sequence[bytes]) -> None:
        """Append lines, given without their line ends.

        Raises
        ------
        ResultsNotWritten
            If the file system does not take them.
        RuntimeError
            If a line holds a line break.
        """
        if not lines:
            return
        data = b"\n".join(lines) + b"\n"
        if data.count(b"\n") != len(lines):
            message = f"{self._name}: a line holds a line break"
            raise RuntimeError(message)
        self._file.write(data)
        self.rows += len(lines)

    def close(self) -> None:
        """Force the file onto the disk; closing twice is harmless.

        Raises
        ------
        ResultsNotWritten
            If the disk does not take it.
        """
        if not self._file.closed:
            self._file.close()
            self._output = self._file.output(self.rows)

    def abandon(self) -> None:
        """Stop; what was written is lost."""
        self._file.abandon()
