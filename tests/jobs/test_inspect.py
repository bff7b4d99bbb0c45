"""`inspect`: its drafts work once the marked decisions are made; no bytes upset it."""

import json
import shutil
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Final

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.intake.books import cell, row, xlsx

from coldwork import contracts
from coldwork.errors import UsageError
from coldwork.inputs.layout import read_layout
from coldwork.intake.files import TableFiles
from coldwork.intake.sources import table_text
from coldwork.jobs.inspect import Inspected, inspect
from coldwork.jobs.looks.draft import DECIDE
from coldwork.jobs.looks.ends import HEAD, TAIL
from coldwork.jobs.looks.signs import look_at_signs, look_at_times
from coldwork.jobs.run import run

SAMPLE_DATA: Final = Path(__file__).resolve().parents[2] / "sample_data"
Edits = Mapping[str, str | None]

# What a person decides, by the key of the marked line: a new line, or None to take it out.
# Everything else of the draft stays, and a marked line that is not listed is right as it is.
CASES: Final[Mapping[str, tuple[str, str, str, Edits]]] = {
    "older bench": ("copper-benches/bench-text", "indents", "raw/CS00-1.txt", {}),
    "newer bench": (
        "copper-benches/bench-utf-16",
        "indents",
        "indents.txt",
        {
            "hardness": None,  # worked out by the machine
            "dwell_s": 'dwell_s = { from = "Dwell", unit = "min" }',
            "temperature_c": 'temperature_c = { from = "Room", unit = "K" }',
            "# tester": 'tester = "T1"',
        },
    ),
    "cutting list": (
        "copper-benches/bench-utf-16",
        "coupons",
        "cut.txt",
        {
            "grain_size_um": 'grain_size_um = { from = "grain", unit = "mm" }',
            "u_grain_size_um": 'u_grain_size_um = { from = "u of grain", unit = "mm" }',
        },
    ),
    "workbook": ("copper-benches/workbook", "indents", "indents.xlsx", {}),
    "tension": ("copper-tension", "curves", "curves/CT05a.txt", {}),
    "tidy indents": ("copper-strip", "indents", "indents.csv", {}),
    "tidy coupons": ("copper-strip", "coupons", "coupons.csv", {}),
    "tidy flow stresses": ("steel-wire", "flow_stress", "flow_stress.csv", {}),
}


def decided(draft: str, edits: Edits) -> str:
    """Make decisions in a draft; a line without a mark must not need one."""
    lines, left = [], dict(edits)
    for line in draft.splitlines():
        key = line.partition(" =")[0]
        if key in left:
            assert DECIDE in line, f"not marked: {line}"
            new = left.pop(key)
            if new is not None:
                lines.append(new)
        else:
            lines.append(line)
    assert not left, f"not in the draft: {left}"
    return "\n".join(lines) + "\n"


def drafted(path: Path, edits: Edits) -> str:
    found = inspect(path)
    assert found.draft is not None
    return decided(found.draft.text, edits)


def cells(folder: Path, table: str, file: str, layout: str | None) -> pa.Table:
    contract = contracts.load(f"in/{table}")
    chosen = (read_layout(layout, folder),) if layout else ()
    files = TableFiles(contract, folder, (folder / file,), chosen)
    blocks = list(table_text(files, 0))
    assert not any(block.torn or block.faults for block in blocks)
    return pa.Table.from_batches([block.cells for block in blocks])


def own_layout(folder: Path, table: str) -> str | None:
    sheet = tomllib.loads((folder / "batch.toml").read_text(encoding="utf-8"))
    named = sheet["files"][table]
    return named["layout"] if isinstance(named, dict) else None


@pytest.mark.parametrize("case", CASES)
def test_a_draft_gives_the_same_cells_as_the_samples_own_layout(tmp_path: Path, case: str) -> None:
    # The samples' own layouts were written by hand, before the drafts.
    batch, table, file, edits = CASES[case]
    shutil.copytree(SAMPLE_DATA / Path(batch).parts[0], tmp_path / Path(batch).parts[0])
    folder = tmp_path / batch
    (folder / "drafted.toml").write_text(drafted(folder / file, edits), encoding="utf-8")
    ours = cells(folder, table, file, "drafted.toml")
    theirs = cells(folder, table, file, own_layout(folder, table))
    assert set(theirs.column_names) <= set(ours.column_names)
    for name in theirs.column_names:
        assert ours.column(name).to_pylist() == theirs.column(name).to_pylist(), name


@pytest.mark.parametrize("case", ["older bench", "newer bench", "workbook"])
def test_a_draft_processes_to_the_same_results(tmp_path: Path, case: str) -> None:
    batch, table, file, edits = CASES[case]
    shutil.copytree(SAMPLE_DATA / "copper-benches", tmp_path / "copper-benches")
    folder = tmp_path / batch
    text = (folder / "batch.toml").read_text(encoding="utf-8")
    own = own_layout(folder, table)
    assert own is not None
    (folder / "drafted.toml").write_text(drafted(folder / file, edits), encoding="utf-8")
    edited = text.replace(own, "drafted.toml")
    assert edited != text
    (folder / "batch.toml").write_text(edited, encoding="utf-8")
    results = run(folder, tmp_path / "out", plots=False).path / "quantities.csv"
    tidy = run(SAMPLE_DATA / "copper-strip", tmp_path / "tidy", plots=False).path
    assert results.read_bytes() == (tidy / "quantities.csv").read_bytes()


def test_a_draft_says_of_each_mark_what_to_decide() -> None:
    found = inspect(SAMPLE_DATA / "copper-benches/bench-utf-16/indents.txt")
    assert found.draft is not None
    marks = [line for line in found.draft.text.splitlines() if DECIDE in line]
    assert len(marks) == len(found.draft.decisions)
    assert [f"{DECIDE} {n}:" in line for n, line in enumerate(marks, 1)] == [True] * len(marks)
    assert '# ... = "Mean"' in found.draft.text  # nobody knows what it is: asked, not used


def test_what_was_seen_and_the_layout_are_one_toml_text() -> None:
    for path in sorted(SAMPLE_DATA.rglob("*.csv")) + sorted(SAMPLE_DATA.rglob("*.txt")):
        tomllib.loads(inspect(path).text())


def test_a_workbooks_oddities_are_named_with_their_cells(tmp_path: Path) -> None:
    data = xlsx(
        row(1, "Coupon", "Load", "Across", "Down"),
        row(2, "A-1", 98.07, cell("C2", None, formula="B2"), 0.18),
        row(3, "A-2", 98.07, 0.18, cell("D3", "#N/A", "e"), hidden="1"),
        after='<mergeCells><mergeCell ref="A2:A3"/></mergeCells>',
    )
    (tmp_path / "b.xlsx").write_bytes(data)
    found = {(odd.where, odd.what) for odd in inspect(tmp_path / "b.xlsx").seen.oddities}
    assert ("cell C2", "a formula without a value that can be trusted") in found
    assert ("cell D3", "an error of the spreadsheet") in found
    assert ("rows 3 to 3", "they are hidden") in found
    assert ("cells A2:A3", "they are merged") in found


def test_suspicious_lines_are_named(tmp_path: Path) -> None:
    text = "no;d1;d2;load\n1;0,18;0,18;98,07\n2;0,18;98,07\nno;d1;d2;load\n3;0,19;0,19;98,07\n4;0,2"
    (tmp_path / "a.txt").write_text(text, encoding="utf-8")
    where = [odd.where for odd in inspect(tmp_path / "a.txt").seen.oddities]
    assert where[:2] == ["line 3", "line 4"]
    assert "the last line" in where
    assert "last_line_open = false" in inspect(tmp_path / "a.txt").text()


def test_encodings_are_listed_with_how_they_read(tmp_path: Path) -> None:
    # 0xE9 is é in cp1252 and Θ in cp437 (their code charts, Unicode consortium's mappings).
    text = b"by:;op\xe9rateur\nno;d1;d2;load\n1;0,18;0,18;98,07\n2;0,19;0,18;98,07\n"
    (tmp_path / "a.txt").write_bytes(text)
    facts = dict(inspect(tmp_path / "a.txt").seen.facts)
    assert "cp1252" in facts["encoding"]
    assert "opérateur" in facts["  in cp1252"]
    assert "opΘrateur" in facts["  in cp437"]


def test_only_begin_and_end_of_a_large_file_are_read(tmp_path: Path) -> None:
    path = tmp_path / "large.txt"
    rows = b"".join(b"%d;0,18;0,19;98,07\n" % n for n in range(60_000))
    with path.open("wb") as file:
        file.write(b"no;d1;d2;load\n" + rows)
        file.truncate(1 << 30)  # a gigabyte of nothing that must not be looked at
        file.seek(1 << 30)
        file.write(rows[-TAIL:] + b"average;0,18;0,19;98,07\n")
    found = inspect(path)
    assert (len(found.ends.head), len(found.ends.tail)) == (HEAD, TAIL)
    assert {entry.key: entry.value for entry in found.seen.form}["ends_before"] == ["average"]
    assert "Only the first" in found.text()


def test_nothing_of_a_file_reaches_the_terminal_unescaped(tmp_path: Path) -> None:
    path = tmp_path / "a\x1b[31m.txt"
    lines = [f"{n};0,18;0,18;98,07" for n in range(40)]
    text = "by:;\x1b]0;title\x07\nno;d\x1b1;d2;load\n" + "\n".join(lines) + "\n"
    path.write_text(text, encoding="utf-8")
    said = inspect(path)
    assert said.draft is not None
    assert all(char.isprintable() or char == "\n" for char in said.text())
    assert tomllib.loads(said.text())["columns"]


@pytest.mark.parametrize(
    ("cells_", "decimal", "thousands", "sure"),
    [
        (["1,5", "2,25"], ",", None, True),
        (["1.5", "7"], ".", None, True),
        (["1.234,5"], ",", ".", True),
        (["1,234.5"], ".", ",", True),
        (["1 234,5"], ",", " ", True),
        (["1.234.567"], ",", ".", False),
        (["1.234", "2.345"], ".", None, False),  # nobody can tell
        (["0.5", "7,460"], ".", ",", False),
        (["1,5", "2.5"], ",", None, False),
        (["1", "2"], None, None, True),
    ],
)
def test_signs(cells_: list[str], decimal: str | None, thousands: str | None, sure: bool) -> None:
    look = look_at_signs(cells_)
    if cells_ == ["1.234.567"]:
        assert look.thousands == thousands
    else:
        assert (look.decimal, look.thousands, look.sure) == (decimal, thousands, sure)


@pytest.mark.parametrize(
    ("cell_", "form", "sure"),
    [
        ("31.07.2026 14:05", "%d.%m.%Y %H:%M", True),
        ("07/31/26", "%m/%d/%y", True),
        ("03/04/2026", "%d/%m/%Y", False),  # 3 April or 4 March
        ("2026/07/31", "%Y/%m/%d", True),
        ("7/31/2026 2:05:09 PM", "%m/%d/%Y %I:%M:%S %p", True),
        ("31.07.2026 14:05:09.25+02:00", "%d.%m.%Y %H:%M:%S.%f%z", True),
        ("24 Jul 2026", "%d %b %Y", True),
        ("2026-07-31T14:05:00Z", None, True),
    ],
)
def test_times(cell_: str, form: str | None, sure: bool) -> None:
    look = look_at_times([cell_, cell_])
    assert look is not None
    assert (look.form, look.sure) == (form, sure)


def test_what_is_no_time() -> None:
    assert look_at_times(["98.07", "182.1"]) is None
    assert look_at_times(["", ""]) is None


def both(found: Inspected) -> None:
    found.text()
    json.dumps(found.as_json(), allow_nan=False).encode("utf-8")


@settings(max_examples=60, deadline=None)
@given(
    data=st.binary(max_size=400), mark=st.sampled_from([b"", b"PK\3\4", b"\xff\xfe", b"\xd0\xcf"])
)
def test_no_bytes_upset_it(
    tmp_path_factory: pytest.TempPathFactory, data: bytes, mark: bytes
) -> None:
    path = tmp_path_factory.getbasetemp() / "any"
    path.write_bytes(mark + data)
    both(inspect(path))


@settings(max_examples=60, deadline=None)
@given(
    text=st.text(alphabet="0123456789.,;\t |-:/\r\n\"'#eEAPM%", max_size=200),
    encoding=st.sampled_from(["utf-8", "utf-16", "utf-16-le", "cp1252"]),
)
def test_no_text_upsets_it(
    tmp_path_factory: pytest.TempPathFactory, text: str, encoding: str
) -> None:
    path = tmp_path_factory.getbasetemp() / "any.txt"
    path.write_bytes(text.encode(encoding))
    both(inspect(path))


def test_no_changed_byte_of_a_sample_upsets_it(tmp_path: Path) -> None:
    random = np.random.default_rng(20261201)
    for name in ("bench-text/raw/CS00-1.txt", "bench-utf-16/cut.txt", "workbook/indents.xlsx"):
        data = (SAMPLE_DATA / "copper-benches" / name).read_bytes()
        for _ in range(8 if name.endswith("xlsx") else 60):
            changed = bytearray(data)
            changed[random.integers(len(data))] = int(random.integers(256))
            path = tmp_path / "changed"
            path.write_bytes(changed)
            both(inspect(path))


@pytest.mark.parametrize("name", ["nothing", "."])
def test_what_is_no_file_is_named(tmp_path: Path, name: str) -> None:
    with pytest.raises(UsageError, match=r"does not exist|is not a file"):
        inspect(tmp_path / name)
