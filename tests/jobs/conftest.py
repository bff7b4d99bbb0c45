"""A batch folder, written from a sheet and from rows."""

import csv
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path

import pytest

Rows = Sequence[Mapping[str, object]]
Make = Callable[..., Path]


def _write(path: Path, table: Rows | str | bytes) -> None:
    if isinstance(table, bytes):
        path.write_bytes(table)
    elif isinstance(table, str):
        path.write_text(table, encoding="utf-8")
    else:
        columns = list(dict.fromkeys(name for row in table for name in row))
        with path.open("w", encoding="utf-8", newline="") as file:
            writer = csv.DictWriter(file, columns, restval="", lineterminator="\n")
            writer.writeheader()
            writer.writerows(table)


def _maker(scratch: Path) -> Make:
    def made(sheet: str, *, name: str = "batch", **tables: Rows | str | bytes) -> Path:
        folder = scratch / name
        folder.mkdir()
        (folder / "batch.toml").write_text(sheet, encoding="utf-8")
        for table, content in tables.items():
            _write(folder / f"{table}.csv", content)
        return folder

    return made


@pytest.fixture
def make(tmp_path: Path) -> Make:
    """Write a batch folder: a sheet, and each table from rows, text or bytes."""
    return _maker(tmp_path)


@pytest.fixture(scope="module")
def make_once(tmp_path_factory: pytest.TempPathFactory) -> Make:
    """Do the same for a fixture that a whole module looks at."""
    return _maker(tmp_path_factory.mktemp("once"))
