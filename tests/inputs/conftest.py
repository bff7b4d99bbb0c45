"""A batch folder with a sheet that fits, and a way to write any other."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method

SHEET = """\
[batch]
id = "CS-2026-31"

[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5 }

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0 }

[character]
screw = 0.5
edge = 0.5
"""
"""A sheet of the required keys alone, as the design page writes them."""

TABLES = ("coupons.csv", "indents.csv", "indents-2.csv", "flow_stress.csv", "exclusions.csv")

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]


@pytest.fixture(scope="session")
def sheet() -> str:
    return SHEET


@pytest.fixture
def write(tmp_path: Path) -> Write:
    """Write a batch folder: a sheet (bytes or text) and empty tables."""

    def written(text: str | bytes = SHEET, **more: str) -> Path:
        folder = tmp_path / "batch"
        folder.mkdir(exist_ok=True)
        for name in TABLES:
            (folder / name).touch()
        data = text if isinstance(text, bytes) else text.encode()
        (folder / "batch.toml").write_bytes(data)
        for name, content in more.items():
            (tmp_path / name).write_text(content, encoding="utf-8")
        return folder

    return written


@pytest.fixture
def refusals(write: Write) -> Refusals:
    """Write a sheet that does not fit and give its causes as text."""

    def causes(text: str | bytes, **more: str) -> list[str]:
        folder = write(text, **more)
        with pytest.raises(BatchRefused) as refusal:
            read_method(folder)
        assert str(folder) in str(refusal.value)
        assert all("\n" not in str(cause) for cause in refusal.value.causes)
        return [str(cause) for cause in refusal.value.causes]

    return causes
