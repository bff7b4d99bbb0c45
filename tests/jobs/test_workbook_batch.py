"""A batch out of a workbook with every kind of odd cell: no row is lost, each is named."""

import csv
import shutil
from pathlib import Path
from typing import Final

from tests.intake.books import LAYOUT, cell, row, xlsx
from tests.intake.test_workbook import HEADER

from coldwork.jobs.run import run

COPPER: Final = Path(__file__).resolve().parents[2] / "sample_data" / "copper-strip"
MERGED: Final = '<mergeCells><mergeCell ref="C14:D14"/></mergeCells>'
GOOD: Final = [row(n, "CS00-1", 98.07, 0.59 + n / 10_000, 0.6) for n in range(5, 10)]
ODD: Final = [
    row(10, "CS00-1", 98.07, cell("C10", "#N/A", "e"), 0.6),
    row(11, "CS00-1", 98.07, 0.6, 0.6, hidden="1"),
    row(12, "CS00-1", cell("B12", None, formula="1+1"), 0.6, "0.6 mm"),
    row(13, cell("A13", "12", style=3), 98.07, 0.6, 0.6),
    row(14, "CS00-1", 98.07, 0.6),
    row(15, "CS00-1", 98.07, cell("C15", "46231", style=1), 0.6),
]
VERDICTS: Final = [  # row, column, reason, cell as written, coupon
    ("10", "Across", "cell-error", "#N/A", "CS00-1"),
    ("11", "Coupon", "hidden-row", "CS00-1", "CS00-1"),
    ("12", "Load", "formula-without-value", "'=1+1", "CS00-1"),  # no live formula in a CSV
    ("13", "Coupon", "shown-otherwise", "12", ""),
    ("14", "Across", "merged-cell", "0.6", "CS00-1"),
    ("15", "Across", "date-in-cell", "2026-07-28", "CS00-1"),
]


def test_odd_rows_are_set_aside_and_the_others_used(tmp_path: Path) -> None:
    folder = tmp_path / "batch"
    folder.mkdir()
    (folder / "book.toml").write_text(LAYOUT.format(more=""), encoding="utf-8")
    (folder / "b.xlsx").write_bytes(xlsx(*HEADER, *GOOD, *ODD, after=MERGED))
    shutil.copy(COPPER / "coupons.csv", folder)
    sheet = (COPPER / "batch.toml").read_text(encoding="utf-8")
    named = 'indents = { path = "b.xlsx", layout = "book.toml" }'
    sheet = sheet.replace('indents = "indents.csv"', named)
    (folder / "batch.toml").write_text(sheet, encoding="utf-8")
    outcome = run(folder, tmp_path / "out", plots=False)
    assert (outcome.readings_read, outcome.readings_used, outcome.readings_set_aside) == (11, 5, 6)
    with (outcome.path / "set_aside.csv").open(encoding="utf-8", newline="") as stream:
        found = list(csv.DictReader(stream))
    names = ("line", "column", "rule", "raw", "coupon_id")
    assert [tuple(each[name] for name in names) for each in found] == VERDICTS
    assert {each["file"] for each in found} == {"b.xlsx!Indents"}
    assert found[2]["also"] == "Down: not-a-number ('0.6 mm')"
