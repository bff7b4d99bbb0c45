"""Whatever doubles and texts a workbook holds come out of it again, from either kind."""

from collections.abc import Sequence
from pathlib import Path
from xml.sax.saxutils import escape

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.intake.books import ods, ods_row, row, xlsx
from tests.intake.test_workbook import HEADER, ODS_HEADER, files_of

from coldwork.intake.sources import table_text

NUMBERS = st.floats(min_value=1e-30, max_value=1e30).map(float)
NAMES = st.text(
    st.characters(codec="utf-8", exclude_categories=("Cc", "Cs", "Cn", "Zs", "Zl", "Zp", "Co")),
    min_size=1,
    max_size=30,
).filter(lambda name: "_x" not in name)  # an escape of .xlsx (ECMA-376-1, 22.9.2.19)
OURS = ("coupon_id", "force_n", "d1_um", "d2_um")
READINGS = st.lists(st.tuples(NAMES, NUMBERS, NUMBERS, NUMBERS), min_size=1, max_size=6)


def read_back(folder: Path, data: bytes, name: str) -> list[tuple[object, ...]]:
    edit = {
        '{ from = "Across", unit = "mm" }': '"Across"',
        '{ from = "Down", unit = "mm" }': '"Down"',
    }
    edit |= {"units_line = true": "units_line = false", "first_row = 3": "first_row = 4"}
    (block,) = table_text(files_of(folder, data, name, "", edit), 0)
    columns = [block.cells.column(c).to_pylist() for c in OURS]
    return [
        (str(a).removeprefix("'") if str(a).startswith("''") else str(a), *map(float, rest))
        for a, *rest in zip(*columns, strict=True)
    ]


def as_rows(readings: Sequence[tuple[str, float, float, float]]) -> list[tuple[object, ...]]:
    return [(escape(name), *numbers) for name, *numbers in readings]


@settings(max_examples=60, deadline=None)
@given(readings=READINGS)
def test_xlsx(
    tmp_path_factory: pytest.TempPathFactory, readings: list[tuple[str, float, float, float]]
) -> None:
    cells = [row(n, *each) for n, each in enumerate(as_rows(readings), 5)]  # type: ignore[arg-type]
    data = xlsx(HEADER[0], HEADER[1].replace("3", "4"), *cells)
    assert read_back(tmp_path_factory.getbasetemp(), data, "any.xlsx") == readings


@settings(max_examples=60, deadline=None)
@given(readings=READINGS)
def test_ods(
    tmp_path_factory: pytest.TempPathFactory, readings: list[tuple[str, float, float, float]]
) -> None:
    cells = [ods_row(*each) for each in as_rows(readings)]  # type: ignore[arg-type]
    data = ods(*ODS_HEADER[:2], ods_row(None), ODS_HEADER[2], *cells)
    assert read_back(tmp_path_factory.getbasetemp(), data, "any.ods") == readings
