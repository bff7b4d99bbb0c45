"""Layouts: what they say, and each thing that they cannot say, refused where it stands."""

import tomllib
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

import pytest

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.inputs.layout import Layout, read_layout, running_number
from coldwork.inputs.layout_units import Step
from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]

LAYOUT = """\
[layout]
id = "bench-2"
fills = "indents"

[text]
encoding = "cp1252"
delimiter = ";"
decimal = ","
thousands = "."
comment = "#"
table_starts_after = "READINGS FOLLOW"
units_line = true
ends_before = ["average", { line = "s", is = "standard-deviation" }, "signed"]
absent = ["", "---"]
times = "%d.%m.%Y %H:%M"

[above]
coupon_id = "piece:"
operator = "by:"

[columns]
d1_um = { from = "across", unit = "mm" }
d2_um = "along"
force_n = { from = "weight", unit = "kgf" }

[constants]
scale = "HV"
dwell_s = 12
ball_mm = { value = 0.1, unit = "in" }
"""


def layout(folder: Path, text: str = LAYOUT, name: str = "bench.toml") -> Layout:
    (folder / name).write_text(text, encoding="utf-8")
    return read_layout(name, folder)


def refused(folder: Path, text: str) -> list[str]:
    with pytest.raises(BatchRefused) as refusal:
        layout(folder, text)
    return [str(cause) for cause in refusal.value.causes]


def test_it_says_what_the_file_says(tmp_path: Path) -> None:
    made = layout(tmp_path)
    assert (made.id, made.fills, made.path) == ("bench-2", "indents", "bench.toml")
    assert made.workbook is None
    assert made.text is not None
    assert made.text.encoding == "cp1252"
    assert made.text.delimiter == ";"
    assert made.text.table_starts_after == "READINGS FOLLOW"
    assert not made.text.last_line_open
    assert (made.decimal, made.thousands, made.units_line) == (",", ".", True)
    assert made.absent == ("", "---")
    assert [(closing.label, closing.holds) for closing in made.ends_before] == [
        ("average", ("mean",)),
        ("s", ("standard-deviation",)),
        ("signed", ()),
    ]
    steps = {filled.name: (filled.source, filled.unit, filled.step) for filled in made.filled}
    assert steps == {
        "d1_um": ("across", "mm", Step(Fraction(1000))),
        "d2_um": ("along", None, Step()),
        "force_n": ("weight", "kgf", Step(Fraction("9.80665"))),
        "coupon_id": ("piece:", None, Step()),
        "operator": ("by:", None, Step()),
        "scale": ("HV", None, Step()),
        "dwell_s": ("12", None, Step()),
        "ball_mm": ("0.1", "in", Step(Fraction("25.4"))),
    }
    assert made.raw_columns["d1_um"] == "across"
    assert made.raw_columns["coupon_id"] == "above: piece:"
    assert made.raw_columns["scale"] == "constant: scale"


def test_what_it_does_not_say_takes_the_default(tmp_path: Path) -> None:
    text = LAYOUT[: LAYOUT.index("decimal")] + LAYOUT[LAYOUT.index("[columns]") :]
    made = layout(tmp_path, text + 'coupon_id = "one"\n')
    assert made.decimal is made.thousands is made.times is None
    assert made.absent == ("",)
    assert made.ends_before == ()
    assert not made.units_line
    assert not made.padded


@pytest.mark.parametrize(("said", "meant"), [("tab", "\t"), ("spaces", " "), ("|", "|")])
def test_a_delimiter_may_have_a_name(tmp_path: Path, said: str, meant: str) -> None:
    made = layout(tmp_path, LAYOUT.replace('delimiter = ";"', f'delimiter = "{said}"'))
    assert made.text is not None
    assert made.text.delimiter == meant


def test_a_workbook_is_another_kind_of_file(tmp_path: Path) -> None:
    begin, end = LAYOUT.index("[text]"), LAYOUT.index("[above]")
    text = LAYOUT[:begin] + '[workbook]\nsheet = "Data"\nfirst_row = 4\n' + LAYOUT[end:]
    made = layout(tmp_path, text)
    assert made.text is None
    assert made.workbook is not None
    assert (made.workbook.sheet, made.workbook.first_row) == ("Data", 4)


CASES = [
    ('id = "bench-2"\n', "", "line 1, key [layout] id: this key is missing"),
    ('fills = "indents"', 'fills = "indent"', "nearest known name is 'indents'"),
    ('fills = "indents"', 'fills = "exclusions"', "cannot be chosen"),
    ('decimal = ","', 'decimals = ","', "unknown key 'decimals'. Unknown keys are errors."),
    ("[above]", "[over]", "unknown section 'over'"),
    ('encoding = "cp1252"', 'encoding = "cp125"', "nearest known name is 'cp1252'"),
    ('encoding = "cp1252"', "encoding = 1252", "1252 is not text in quotes"),
    ('encoding = "cp1252"\n', "", "[text] encoding: this key is missing"),
    ('delimiter = ";"', 'delimiter = ";;"', "';;' does not fit"),
    ('delimiter = ";"', 'delimiter = "5"', "'5' does not fit"),
    ('decimal = ","', 'decimal = "."', "[text] thousands: it is the decimal sign too"),
    ('delimiter = ";"', 'delimiter = ","', "[text] decimal: it is the delimiter too"),
    ('decimal = ","\n', "", "[text] thousands: decimal is missing"),
    ('absent = ["", "---"]', 'absent = ["", "0"]', "'0' is a number"),
    ('times = "%d.%m.%Y %H:%M"', 'times = "%d.%m.%j"', "%j is not known"),
    ('times = "%d.%m.%Y %H:%M"', 'times = "%d.%m."', "it needs the year"),
    ("units_line = true", "header_line = 3", "table_starts_after is there too"),
    ("units_line = true", "units_line = 1", "1 is not true or false"),
    ('table_starts_after = "READINGS FOLLOW"\n', "", "no line stands above the table"),
    ('is = "standard-deviation"', 'is = "deviation"', "cannot be chosen"),
    ("d1_um = {", "d1_mm = {", "nearest known name is 'd1_um'"),
    (
        'd2_um = "along"',
        'd2_um = { column = "along" }',
        "[columns] d2_um.from: this key is missing",
    ),
    ('d2_um = "along"', "d2_um = 2", "2 is not text in quotes or a table"),
    ('d2_um = "along"', 'd2_um = ""', "[columns] d2_um"),
    ('operator = "by:"', 'd2_um = "by:"', "columns fills it too"),
    ('unit = "mm"', 'unit = "micron"', "'micron' is not known"),
    ('unit = "mm"', 'unit = "µm"', "Write it 'um'"),
    ('unit = "mm"', 'unit = "N"', "d1_um is a length and comes in mm, um, in"),
    ('operator = "by:"', 'operator = { from = "by:", unit = "N" }', "operator holds no numbers"),
    ('d2_um = "along"', 'd2_um = "along [mm]"', "says mm and the layout um"),
    ('from = "across"', 'from = "across (um)"', "says um and the layout mm"),
    ('scale = "HV"', 'scale = "HRC"', "scale is one of HV, HBW, HK"),
    ('scale = "HV"', "scale = 10", "10 is not text"),
    ("dwell_s = 12", 'dwell_s = "12"', "'12' is not a number"),
    ("dwell_s = 12", "dwell_s = inf", "inf cannot be used"),
    ("dwell_s = 12", "indent_no = 1.5", "1.5 is no whole number"),
    ('coupon_id = "piece:"\n', "", "the required column is not filled: coupon_id"),
    ('force_n = { from = "weight", unit = "kgf" }\n', "", "not filled: force_n"),
    ("[text]", "[text", "bench.toml, line 5"),
]


@pytest.mark.parametrize(("old", "new", "words"), CASES)
def test_what_it_cannot_say_is_refused_by_name(
    tmp_path: Path, old: str, new: str, words: str
) -> None:
    assert old in LAYOUT
    causes = refused(tmp_path, LAYOUT.replace(old, new))
    assert any(words in cause for cause in causes), causes
    assert all(cause.startswith("bench.toml") for cause in causes)
    assert all("\n" not in cause for cause in causes)


def test_it_is_one_kind_of_file_and_not_two(tmp_path: Path) -> None:
    (cause,) = refused(tmp_path, LAYOUT + '[workbook]\nsheet = "Data"\n')
    assert "[workbook]: text is there too" in cause
    begin, end = LAYOUT.index("[text]"), LAYOUT.index("[above]")
    (cause,) = refused(tmp_path, LAYOUT[:begin] + LAYOUT[end:])
    assert "this section is missing" in cause


def test_the_running_number_need_not_be_there() -> None:
    assert running_number(contracts.load("in/indents")) == "indent_no"
    assert running_number(contracts.load("in/flow_stress")) == "reading_no"
    assert running_number(contracts.load("in/coupons")) is None


# The sheet names layouts beside files.


def sheet_with(sheet: str, entry: str) -> str:
    return sheet.replace('indents = "indents.csv"', f"indents = {entry}")


def test_a_sheet_reads_files_through_layouts(write: Write, sheet: str) -> None:
    entry = (
        '[{ path = "indents*.csv", layout = "bench.toml" }, '
        '{ path = "raw/*.txt", layout = "../shared.toml" }, "tidy.csv"]'
    )
    folder = write(sheet_with(sheet, entry), **{"shared.toml": LAYOUT})
    (folder / "raw").mkdir()
    for name in ("bench.toml", "raw/b.txt", "raw/a.txt", "tidy.csv"):
        (folder / name).write_text(LAYOUT)
    method = read_method(folder)
    names = [path.relative_to(folder.resolve()).as_posix() for path in method.indents]
    assert names == ["indents-2.csv", "indents.csv", "raw/a.txt", "raw/b.txt", "tidy.csv"]
    layouts = [layout and layout.path for layout in method.layouts["indents"]]
    assert layouts == ["bench.toml"] * 2 + ["../shared.toml"] * 2 + [None]
    assert method.layouts["coupons"] == (None,)
    assert [layout.path for layout in method.used_layouts] == ["bench.toml", "../shared.toml"]
    told = method.document["layouts"]
    assert isinstance(told, list)
    assert told[1]["files"] == ["raw/a.txt", "raw/b.txt"]
    assert told[0]["columns"]["d1_um"] == {"from": "across", "unit": "mm"}


@pytest.mark.parametrize(
    ("entry", "words"),
    [
        ('{ path = "../outside.txt", layout = "bench.toml" }', "leaves the batch folder"),
        ('{ path = "/etc/hostname", layout = "bench.toml" }', "leaves the batch folder"),
        ('{ path = "away/*", layout = "bench.toml" }', "leaves the batch folder"),
        ('{ path = "indents.csv", layout = "/bench.toml" }', "is an absolute path"),
        ("{ path = 'indents.csv', layout = 'C:\\bench.toml' }", "is an absolute path"),
        ('{ path = "indents.csv", layout = "bench.txt" }', "is not the path of a .toml file"),
        ('{ path = "indents.csv", layout = "batch.toml" }', "is the sheet itself"),
        ('{ path = "indents.csv", layout = "bensh.toml" }', "nearest name there is 'bench.toml'"),
        ('{ path = "indents.csv", layout = "coupons.toml" }', "fills coupons"),
        ('{ path = "indents.csv" }', "[files] indents.layout: this key is missing"),
        ('{ layout = "bench.toml" }', "[files] indents.path: this key is missing"),
        ('{ path = "indents.csv", layout = "bench.toml", sheet = "a" }', "unknown key 'sheet'"),
        (
            '[{ path = "indents.csv", layout = "bench.toml" }, "indents.csv"]',
            "names indents.csv a second time",
        ),
    ],
)
def test_a_path_or_a_layout_that_cannot_be_used_is_refused(
    write: Write, sheet: str, entry: str, words: str
) -> None:
    folder = write(sheet_with(sheet, entry), **{"outside.txt": ""})
    (folder / "bench.toml").write_text(LAYOUT)
    coupons = '[layout]\nid = "c"\nfills = "coupons"\n[text]\nencoding = "utf-8"\ndelimiter = ";"\n'
    (folder / "coupons.toml").write_text(f'{coupons}[columns]\ncoupon_id = "name"\n')
    (folder / "away").symlink_to(folder.parent)
    with pytest.raises(BatchRefused) as refusal:
        read_method(folder)
    assert any(words in str(cause) for cause in refusal.value.causes), str(refusal.value)


def test_faults_of_sheet_and_layouts_are_told_together(write: Write, sheet: str) -> None:
    text = sheet_with(sheet, '{ path = "indents.csv", layout = "bench.toml" }')
    folder = write(text.replace("screw = 0.5", "screws = 0.5"))
    (folder / "bench.toml").write_text(LAYOUT.replace("cp1252", "cp125"))
    with pytest.raises(BatchRefused) as refusal:
        read_method(folder)
    wheres = [cause.where for cause in refusal.value.causes]
    assert any(where.startswith("batch.toml") for where in wheres)
    assert any(where.startswith("bench.toml, line 6") for where in wheres)


def test_the_layout_that_these_tests_vary_is_toml() -> None:
    assert set(tomllib.loads(LAYOUT)) == {"layout", "text", "above", "columns", "constants"}
