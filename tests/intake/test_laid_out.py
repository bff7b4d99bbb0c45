"""Files read through layouts: what stands above, beside and below a table, and its places."""

from pathlib import Path

import pytest
from tests.intake.laid_out import LAYOUT, read, refusal, table

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.intake.coupons import read_coupons
from coldwork.intake.files import TableFiles
from coldwork.intake.sources import check_headers

HEAD = (
    "piece:;{}\nby:;operator-1\nREADINGS FOLLOW\n"
    "no;weight;across;along;right;when\n;kgf;mm;mm;mm;\n"
)
ROW = "{};10;0,6009;0,5972;7,46;28.07.2026 07:50\n"
END = "average;10;0,6009;0,5972;7,46;\n"


def file(coupon: str, rows: int) -> bytes:
    text = HEAD.format(coupon) + "".join(ROW.format(n + 1) for n in range(rows)) + END
    return text.encode("cp1252")


def test_a_reading_keeps_its_raw_cells_under_the_machines_own_names(tmp_path: Path) -> None:
    found = read(tmp_path, file("A", 1))
    (row,) = found.rows
    assert (row["coupon"], row["line"], row["d1_um"]) == ("A", 6, 600.9)
    assert row["force_n"] == 98.0665  # 10 kgf
    assert row["raw"] == {
        "weight": "10",
        "across": "0,6009",
        "along": "0,5972",
        "right": "7,46",
        "when": "28.07.2026 07:50",
        "above: piece:": "A",
        "above: by:": "operator-1",
        "constant: scale": "HV",
    }
    assert found.source.unused_columns == ("no",)
    assert [(kept.line, kept.text) for kept in found.source.kept_lines] == [(7, END.strip())]


def test_readings_without_a_number_are_counted_coupon_by_coupon(tmp_path: Path) -> None:
    files = {"f1.txt": file("A", 2), "f2.txt": file("B", 1), "f3.txt": file("A", 2)}
    found = read(tmp_path, files)
    numbers = [(row["coupon"], row["number"]) for row in found.rows]
    assert numbers == [("A", 1), ("A", 2), ("B", 1), ("A", 3), ("A", 4)]


@pytest.mark.parametrize("block_bytes", [30, 2 << 20])
def test_a_torn_row_takes_its_number_too(tmp_path: Path, block_bytes: int) -> None:
    rows = ROW.format(1) + "2;10;0,6\n" + ROW.format(3) + "4;10\n" + ROW.format(5)
    found = read(tmp_path, (HEAD.format("A") + rows + END).encode(), block_bytes=block_bytes)
    assert [row["line"] for row in found.aside] == [7, 9]
    if block_bytes > 1000:  # a torn row that is alone in its block is not known to be the coupon's
        assert [row["number"] for row in found.rows] == [1, 3, 5]


def test_readings_of_several_coupons_in_one_file_are_counted_each(tmp_path: Path) -> None:
    layout = LAYOUT.replace('coupon_id = "piece:"\n', "").replace(
        "[columns]", '[columns]\ncoupon_id = "no"'
    )
    rows = "".join(ROW.format(name) for name in ("A", "B", "A", "0012", "B", "A"))
    for block_bytes in (60, 2 << 20):
        found = read(
            tmp_path, (HEAD.format("x") + rows + END).encode(), layout, block_bytes=block_bytes
        )
        numbers = [(row["coupon"], row["number"]) for row in found.rows]
        assert numbers == [("A", 1), ("B", 1), ("A", 2), ("0012", 1), ("B", 2), ("A", 3)]


def test_what_is_set_aside_is_told_as_the_machine_wrote_it(tmp_path: Path) -> None:
    rows = ROW.format(1).replace("0,6009", "6OO,9").replace("28.07.2026", "2026-07-28")
    found = read(tmp_path, (HEAD.format("A") + rows + END).encode())
    (row,) = found.aside
    assert (row["line"], row["column"], row["raw"]) == (6, "across", "6OO,9")
    assert row["also"] == "when: bad-time ('2026-07-28 07:50')"
    assert (row["coupon_id"], row["reading_no"]) == ("A", 1)


SPACES = """
[layout]
id = "columns"
fills = "indents"
[text]
encoding = "utf-8"
delimiter = "spaces"
decimal = "."
comment = "%"
header_line = 4
units_line = true
absent = ["-"]
ends_before = ["mean of all"]
[above]
coupon_id = "Test piece"
force_n = { from = "Load =", unit = "kgf" }
[columns]
indent_no = "#"
d1_um = { from = "D1", unit = "mm" }
d2_um = { from = "D2", unit = "mm" }
hardness = "HV"
"""
FIXED = """\
Test piece      0012
Load = 10.0 kgf

  #    D1      D2     HV
  -    mm      mm      -
  1  0.6009  0.5972   -
% smudged
  2\t0.5990  0.5992  51.6
mean of all 0.59995 0.5982 51.6
"""


def test_columns_may_be_parted_by_any_number_of_spaces(tmp_path: Path) -> None:
    found = read(tmp_path, FIXED.encode(), SPACES)
    values = [(row["coupon"], row["number"], row["line"], row["d1_um"]) for row in found.rows]
    assert values == [("0012", 1, 6, 600.9), ("0012", 2, 8, 599.0)]
    assert [row["force_n"] for row in found.rows] == [98.0665, 98.0665]
    assert found.rows[0]["raw"]["above: Load ="] == "10.0 kgf"
    assert found.printed == []  # "mean of all" is kept; what it holds is not declared
    assert found.source.kept_lines[0].line == 9


def test_a_closing_line_may_say_what_it_holds(tmp_path: Path) -> None:
    layout = SPACES.replace('"mean of all"', '{ line = "mean of all", is = "mean" }')
    assert read(tmp_path, FIXED.encode(), layout).printed == []
    (one,) = read(tmp_path, FIXED.replace("0.5982", "0.5985").encode(), layout).printed
    # (597.2 + 599.2) / 2 = 598.2 and not 598.5; each is known to 0.05
    assert (one.found.line, one.found.column) == (9, "d2_um")
    assert one.found.printed == pytest.approx(598.5)
    assert one.found.ours == pytest.approx(598.2)
    assert one.found.limit == pytest.approx(0.1, rel=1e-4)


def test_without_a_word_on_the_header_it_is_the_first_line(tmp_path: Path) -> None:
    layout = '[layout]\nid = "l"\nfills = "indents"\n[text]\nencoding = "utf-8"\ndelimiter = "|"\n'
    layout += 'decimal = "."\npadded = true\n[columns]\ncoupon_id = "piece"\nforce_n = "N"\n'
    layout += 'd1_um = "a"\nd2_um = "b"\n'
    text = "\n\n piece | N     |   a   |   b   |\n A     | 98.07 | 600.9 | 597.2 |\n"
    (row,) = read(tmp_path, text.encode(), layout).rows
    assert (row["line"], row["d1_um"], row["force_n"]) == (4, 600.9, 98.07)


@pytest.mark.parametrize(
    ("above", "value"),
    [
        ("held:;12;s", 12.0),
        ("held:;12 s", 12.0),
        ("held: 12 s;", 12.0),
        ("held:;12", 12.0),
        (";held:;12;;", 12.0),
        ("held:;---", None),
        ("held:", None),
    ],
)
def test_a_value_above_stands_in_the_next_cell_or_after_its_label(
    tmp_path: Path, above: str, value: float | None
) -> None:
    layout = LAYOUT.replace("[columns]", 'dwell_s = { from = "held:", unit = "s" }\n[columns]')
    found = read(tmp_path, f"{above}\n".encode() + file("A", 1), layout)
    dwell = found.rows[0]["dwell_s"]
    assert dwell == value or (value is None and dwell != dwell)


def test_a_value_above_that_is_no_number_refuses_the_file(tmp_path: Path) -> None:
    layout = LAYOUT.replace("[columns]", 'dwell_s = "held:"\n[columns]')
    (cause,) = refusal(tmp_path, b"held:;twelve\n" + file("A", 1), layout)
    assert "f.txt, line 1: 'twelve' cannot be read as dwell_s" in cause
    (cause,) = refusal(tmp_path, b"held:;12;min\n" + file("A", 1), layout)
    assert "says 'min' and the layout s" in cause


def test_a_label_is_no_longer_word_by_chance(tmp_path: Path) -> None:
    layout = LAYOUT.replace('"by:"', '"by"')
    text = b"bystander;nobody\nby operator-2;\n" + file("A", 1).replace(b"by:;operator-1\n", b"")
    (row,) = read(tmp_path, text, layout).rows
    assert row["operator"] == "operator-2"


def test_headers_are_looked_at_before_anything_is_read(tmp_path: Path) -> None:
    good, bad = file("A", 1), file("A", 1).replace(b"across", b"accross")
    files = table(tmp_path, {"a.txt": good, "b.txt": bad, "c.txt": b""})
    wheres = [cause.where for cause in check_headers(files)]
    assert wheres == ["b.txt, line 4", "c.txt"]


COUPONS = """
[layout]
id = "list"
fills = "coupons"
[text]
encoding = "latin-1"
delimiter = "tab"
decimal = ","
times = "%d.%m.%Y"
[columns]
coupon_id = "Probe"
lot_id = "Los"
thickness_mm = { from = "Dicke", unit = "in" }
grain_size_um = { from = "Korn", unit = "mm" }
sampled_at = "Datum"
[constants]
condition = "weichgeglüht"
"""
LIST = "Nr.\tProbe\tLos\tDicke\tKorn\tDatum\n1\tA\t'7\t0,1\t0,02\t24.07.2026\n2\tB\tä\tx\t0.02\t\n"


def coupon_files(folder: Path, text: str, tidy: str | None = None) -> TableFiles:
    files = table(folder, {"list.txt": text.encode("latin-1")}, COUPONS, "coupons")
    if tidy is None:
        return files
    (folder / "more.csv").write_text(tidy, encoding="utf-8")
    paths = (*files.paths, folder / "more.csv")
    return TableFiles(contracts.load("in/coupons"), folder, paths, (*files.layouts, None))


def test_coupons_may_come_through_a_layout(tmp_path: Path) -> None:
    coupons = read_coupons(coupon_files(tmp_path, LIST), "UTC")
    assert coupons.ids.to_pylist() == ["A", "B"]
    assert coupons.lot_ids.to_pylist() == ["'7", "ä"]  # the machine's own apostrophe
    assert coupons.conditions.to_pylist() == ["weichgeglüht"] * 2
    assert coupons.sampled_at.to_pylist() == ["2026-07-24", ""]
    assert coupons.thickness[0] == pytest.approx(2.54e-3, rel=1e-15)
    assert coupons.grain_size[0] == pytest.approx(20e-6, rel=1e-15)
    assert coupons.raw.column("Dicke").to_pylist() == ["0,1", "x"]
    assert coupons.line.tolist() == [2, 3]
    assert coupons.sources[0].unused_columns == ("Nr.",)
    bad = {(cell.coupon, cell.column): cell for cell in coupons.bad_cells}
    assert set(bad) == {(1, "thickness_mm"), (1, "grain_size_um")}
    assert bad[1, "grain_size_um"].raw == "0.02"
    assert "decimal = '.'" in bad[1, "grain_size_um"].hint


def test_files_of_both_kinds_make_one_list(tmp_path: Path) -> None:
    coupons = read_coupons(coupon_files(tmp_path, LIST, "coupon_id,lot_id\nC,'=1\n"), "UTC")
    assert coupons.ids.to_pylist() == ["A", "B", "C"]
    assert coupons.lot_ids.to_pylist() == ["'7", "ä", "=1"]
    assert coupons.raw.column("lot_id").to_pylist() == [None, None, "'=1"]
    assert coupons.raw.column("Los").to_pylist() == ["'7", "ä", None]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        (
            LIST.replace("2\tB", "2\tA"),
            "list.txt, line 3, column Probe: coupon 'A' is listed again",
        ),
        (LIST.replace("\tB\t", "\t\t"), "list.txt, line 3, column Probe: the name is empty"),
        (LIST[:-1], "list.txt, line 3: the file ends in the middle of this line"),
        (LIST.replace("\tä\tx", "\tä"), "list.txt, line 3: the row has 5 cells"),
        (LIST.replace("24.07.2026", "24.07.26"), ""),
    ],
)
def test_no_row_of_a_list_is_lost(tmp_path: Path, text: str, words: str) -> None:
    files = coupon_files(tmp_path, text)
    if not words:  # an optional cell: absent, and told
        assert "bad-time" in {cell.rule for cell in read_coupons(files, "UTC").bad_cells}
        return
    with pytest.raises(BatchRefused) as refused:
        read_coupons(files, "UTC")
    assert words in str(refused.value)
