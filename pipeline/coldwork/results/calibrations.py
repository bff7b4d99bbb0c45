"""A calibration to its file: TOML that seals itself, written whole or not at all."""

import json
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any

from coldwork.errors import ResultsNotWritten
from coldwork.inputs.calibration import SEAL, seal_of
from coldwork.results.disk import shown

__all__ = ["calibration_text", "write_new"]

_HEAD = (
    "# Constants with their covariance, found by coldwork calibrate. A batch sheet takes them by\n"
    '# { from = "..." }. Whoever changes a digit breaks the seal: calibrate again instead.\n'
)


def calibration_text(document: Mapping[str, Any]) -> str:
    """Write a calibration as TOML.

    Parameters
    ----------
    document : mapping
        Its content after the schema ``calibration``, without the seal. A section that is a
        list becomes an array of tables; None is left out.

    Returns
    -------
    str
        With its seal.
    """
    lines = [line for part in document.items() for line in _section(*part)]
    body = _HEAD + "\n".join([*lines, ""])
    return f'{body}{SEAL}sha256 = "{seal_of(body)}"\n'


def write_new(path: Path, data: bytes) -> None:
    """Write a file that is not there yet.

    Parameters
    ----------
    path : Path
        The file.
    data : bytes
        Its content.

    Raises
    ------
    ResultsNotWritten
        If it is there already or cannot be written; then nothing is left behind.
    """
    try:
        stream = path.open("xb")
    except FileExistsError as error:
        message = f"{shown(path)}: is there already; name another file, or move it away first"
        raise ResultsNotWritten(message) from error
    except OSError as error:
        message = f"{shown(path)}: cannot be written: {error.strerror or error}"
        raise ResultsNotWritten(message) from error
    try:
        with stream:
            stream.write(data)
    except OSError as error:
        path.unlink(missing_ok=True)
        message = f"{shown(path)}: cannot be written: {error.strerror or error}"
        raise ResultsNotWritten(message) from error


def _section(name: str, content: Mapping[str, Any] | Sequence[Mapping[str, Any]]) -> Iterator[str]:
    tables = [content] if isinstance(content, Mapping) else content
    head = f"[{name}]" if isinstance(content, Mapping) else f"[[{name}]]"
    for table in tables:
        yield f"\n{head}"
        yield from (f"{_key(key)} = {_value(x)}" for key, x in table.items() if x is not None)


def _key(key: str) -> str:
    return key if key.replace("_", "").isalnum() and key.isascii() else json.dumps(key)


def _value(x: object) -> str:
    if isinstance(x, list | tuple):
        return f"[{', '.join(_value(each) for each in x)}]"
    return repr(x) if isinstance(x, float) else json.dumps(x, ensure_ascii=False)
