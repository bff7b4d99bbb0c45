"""The workbook of the copper strip: the same results as the tidy table, bit for bit."""

import csv
from collections.abc import Iterator, Mapping
from datetime import UTC, datetime, timedelta, timezone
from pathlib import Path
from typing import Final

import pytest
from python_calamine import CalamineWorkbook

from coldwork.jobs.run import run

SAMPLE_DATA: Final = Path(__file__).resolve().parents[2] / "sample_data"
WALL: Final = timezone(timedelta(hours=2))  # what the batch sheet names: Etc/GMT-2
PROVENANCE: Final = {"record_sha256", "file", "line", "source"}


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Path]:
    tidy, book = (
        run(SAMPLE_DATA / batch, tmp_path_factory.mktemp("out"), plots=False).path
        for batch in ("copper-strip", "copper-benches/workbook")
    )
    return tidy, book


def rows(path: Path) -> Iterator[Mapping[str, str]]:
    with path.open(encoding="utf-8", newline="") as stream:
        for row in csv.DictReader(stream):
            kept = {name: cell for name, cell in row.items() if name not in PROVENANCE}
            if kept.get("measured_at"):
                kept["measured_at"] = instant(kept["measured_at"])
            yield kept


def instant(text: str) -> str:
    """A time as written, in UTC: a workbook's times know no zone."""
    time = datetime.fromisoformat(text)
    return (time if time.tzinfo else time.replace(tzinfo=WALL)).astimezone(UTC).isoformat()


@pytest.mark.parametrize("name", ["quantities", "budget", "lots", "decisions", "flags"])
def test_results_are_the_same_bytes(results: tuple[Path, Path], name: str) -> None:
    tidy, book = results
    assert (book / f"{name}.csv").read_bytes() == (tidy / f"{name}.csv").read_bytes()


@pytest.mark.parametrize("name", ["coupons", "readings", "set_aside"])
def test_tables_are_the_same_but_for_where_things_stood(
    results: tuple[Path, Path], name: str
) -> None:
    tidy, book = results
    assert list(rows(book / f"{name}.csv")) == list(rows(tidy / f"{name}.csv"))


def test_another_reader_sees_the_cells_that_were_written() -> None:
    # python-calamine on the file as it lies there, not on the parts that intake hands it.
    book = CalamineWorkbook.from_path(SAMPLE_DATA / "copper-benches/workbook/indents.xlsx")
    assert book.sheet_names == ["Indents", "Notes"]
    sheet = book.get_sheet_by_name("Indents").to_python()
    with (SAMPLE_DATA / "copper-strip/indents.csv").open(encoding="utf-8", newline="") as stream:
        tidy = list(csv.DictReader(stream))
    assert len(sheet) - 5 == len(tidy) == 245
    for ours, theirs in zip(sheet[5:], tidy, strict=True):
        assert ours[:3] == [
            theirs["coupon_id"],
            float(theirs["indent_no"]),
            float(theirs["force_n"]),
        ]
        assert ours[3] == float(f"{theirs['d1_um']}e-3")
