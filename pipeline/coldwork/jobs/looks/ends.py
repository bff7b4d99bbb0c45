"""The begin and the end of a file, whatever its size."""

import stat
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from coldwork.errors import UsageError

__all__ = ["HEAD", "TAIL", "Ends", "read_ends"]

HEAD: Final = 512 << 10  # byte
TAIL: Final = 64 << 10  # byte


@dataclass(frozen=True)
class Ends:
    """What was read of a file.

    Attributes
    ----------
    size : int
        Of the whole file. [byte]
    head, tail : bytes
        Its begin and its end; the tail is empty where the head is all of it.
    """

    size: int
    head: bytes
    tail: bytes

    @property
    def whole(self) -> bool:
        """Whether nothing lies between the two."""
        return self.size == len(self.head) + len(self.tail)


def read_ends(path: Path) -> Ends:
    """Read the begin and the end of a file.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    Ends

    Raises
    ------
    UsageError
        If there is no such file, or it cannot be read.
    """
    name = printable(str(path))
    try:
        status = path.stat()
        if not stat.S_ISREG(status.st_mode):
            message = f"{name} is not a file"
            raise UsageError(message)
        with path.open("rb") as file:
            head = file.read(HEAD)
            tail = b""
            if status.st_size > len(head):
                file.seek(max(len(head), status.st_size - TAIL))
                tail = file.read(TAIL)
    except FileNotFoundError as error:
        message = f"{name} does not exist"
        raise UsageError(message) from error
    except (OSError, ValueError) as error:
        message = f"{name} cannot be read: {getattr(error, 'strerror', None) or error}"
        raise UsageError(message) from error
    return Ends(max(status.st_size, len(head) + len(tail)), head, tail)


def printable(text: str) -> str:
    """Write text, such as a file's name, so that any terminal can take it."""
    plain = text.encode("utf-8", "backslashreplace").decode("utf-8")
    return plain if plain.isprintable() else ascii(plain)[1:-1]
