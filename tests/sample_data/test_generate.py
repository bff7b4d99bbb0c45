"""The committed sample data is what its script writes, and the list of faults points at rows."""

import csv
import subprocess
import sys
from pathlib import Path

import pytest
from python_calamine import CalamineWorkbook

SAMPLE_DATA = Path(__file__).resolve().parents[2] / "sample_data"
SHELF = SAMPLE_DATA / "planted-faults"
CODE = {"generate.py", "scenario"}  # all the rest is generated


def listed() -> list[dict[str, str]]:
    with (SHELF / "FAULTS.csv").open(encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


def numbered(fault: dict[str, str]) -> str:
    return "-".join((fault["batch"], fault["rule_or_reason"], fault["line"]))


def contents(folder: Path) -> dict[str, bytes]:
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in folder.rglob("*")
        if path.is_file() and path.relative_to(folder).parts[0] not in {*CODE, "pictures"}
    }


def test_the_committed_batches_are_what_the_script_writes(tmp_path: Path) -> None:
    script = [sys.executable, "-B", str(SAMPLE_DATA / "generate.py"), str(tmp_path)]
    subprocess.run(script, check=True, capture_output=True)
    written, committed = contents(tmp_path), contents(SAMPLE_DATA)
    assert written.keys() == committed.keys()
    assert [name for name, data in written.items() if data != committed[name]] == []


def test_the_script_reads_nothing_of_the_package() -> None:
    # A truth that was computed by the code under test would be none.
    sources = [SAMPLE_DATA / "generate.py", *(SAMPLE_DATA / "scenario").glob("*.py")]
    texts = [path.read_text(encoding="utf-8") for path in sources]
    assert len(texts) > 5
    assert not any("coldwork" in text for text in texts)


def row_at(fault: dict[str, str]) -> list[str]:
    """The cells where a fault is said to stand; of a workbook as another reader gives them."""
    name, _, sheet = fault["file"].partition("!")
    path, place = SHELF / fault["batch"] / name, int(fault["line"]) - 1
    if sheet:
        rows = CalamineWorkbook.from_path(path).get_sheet_by_name(sheet).to_python()
        return [str(cell).removesuffix(".0") for cell in rows[place]]
    line = path.read_text(encoding="utf-8").splitlines()[place]
    mark = "\t" if "\t" in line else ","
    return next(csv.reader([line], delimiter=mark))


@pytest.mark.parametrize("fault", listed(), ids=numbered)
def test_a_listed_fault_points_at_the_row_it_names(fault: dict[str, str]) -> None:
    cells = row_at(fault)
    name = fault["coupon_id"].removeprefix("'")
    below_the_rows = fault["rule_or_reason"] == "printed-mean-differs"
    assert not name or cells[0] == ("average;413" if below_the_rows else name)
    assert not fault["reading_no"] or cells[1] == fault["reading_no"]
    assert fault["planted"]
