"""Small tables for the tests of intake, written into a folder of their own."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork import contracts
from coldwork.intake.files import TableFiles

Tables = Callable[..., TableFiles]


@pytest.fixture
def tables(tmp_path: Path) -> Tables:
    """Write files, text or bytes, and give them as the files of one table."""

    def make(table: str, *contents: str | bytes) -> TableFiles:
        paths = []
        for number, content in enumerate(contents, 1):
            path = tmp_path / f"{table}-{number}.csv"
            path.write_bytes(content if isinstance(content, bytes) else content.encode())
            paths.append(path)
        return TableFiles(contracts.load(f"in/{table}"), tmp_path, tuple(paths))

    return make
