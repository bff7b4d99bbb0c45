"""Start a batch folder: a commented sheet and empty tables."""

import json
from importlib.resources import files
from pathlib import Path
from typing import Final

from coldwork import contracts
from coldwork.errors import ResultsNotWritten, UsageError
from coldwork.inputs.identity import id_fault
from coldwork.inputs.source import SHEET_NAME

__all__ = ["new"]

_TABLES: Final = ("coupons", "indents", "flow_stress", "exclusions")
_ANY_ID: Final = "batch-1"


def new(folder: Path) -> list[Path]:
    """Write a commented sheet and empty tables into a new folder.

    Parameters
    ----------
    folder : Path
        A folder that is not there yet, or is empty. Its name becomes the
        batch's id where it can.

    Returns
    -------
    list of Path
        What was written.

    Raises
    ------
    UsageError
        If the path is a file, or a folder that holds something.
    ResultsNotWritten
        If the folder or a file cannot be written.
    """
    folder = Path(folder)
    _refuse_what_is_there(folder)
    texts = {SHEET_NAME: _sheet(folder)} | {
        f"{table}.csv": ",".join(contracts.load(f"in/{table}").columns) + "\n" for table in _TABLES
    }
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, text in texts.items():
            with (folder / name).open("x", encoding="utf-8", newline="\n") as stream:
                stream.write(text)
    except OSError as error:
        message = f"{folder}: the new batch could not be written: {error.strerror or error}"
        raise ResultsNotWritten(message) from error
    return [folder / name for name in texts]


def _refuse_what_is_there(folder: Path) -> None:
    if folder.exists() and not folder.is_dir():
        message = f"{folder} is a file; a batch is a folder"
        raise UsageError(message)
    if folder.is_dir() and any(folder.iterdir()):
        message = f"{folder} holds something already, and nothing there is touched; name another"
        raise UsageError(message)


def _sheet(folder: Path) -> str:
    name = folder.resolve().name
    text = (files("coldwork.inputs") / "new_sheet.toml").read_text(encoding="utf-8")
    return text.replace(
        '"@id@"', json.dumps(_ANY_ID if id_fault(name) else name, ensure_ascii=False)
    )
