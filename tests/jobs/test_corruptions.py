"""Five hundred random corruptions of a valid batch, through the command line's own entry.

Whatever was done to the files: an exit code of 0, 3 or 4 with words and no traceback,
every row of readings either used or set aside, and nothing written where the batch was
refused.
"""

import csv
import io
import json
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager, redirect_stderr, redirect_stdout
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Final, Protocol

from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st
from typer.main import get_command

from coldwork.cli import app

Files = dict[str, bytes]
COMMAND: Final = get_command(app)  # made once: it takes as long as a batch

SHEET: Final = """\
[batch]
id = "corrupt"
timezone = "UTC"

[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5 }

[files]
coupons = "coupons.csv"
indents = "indents.csv"
exclusions = "exclusions.csv"

[strength]
route = "indent"
friction_mpa = { value = 25.5, u = 5.0 }
hall_petch_mpa_m05 = { value = 0.11, u = 0.03 }

[indentation]
constraint_factor = { value = 3.0, u = 0.15 }
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1

[hardening]
coefficient = { value = 0.30, factor = 1.2 }

[line_energy]
outer_radius = "grain"

[character]
screw = 0.5
edge = 0.5

[output]
detail = "summary"

[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
valid_until = 2027-03-31

[[limits]]
id = "window"
quantity = "stored_energy_j_per_g"
lower = 0.05
"""
COUPONS: Final = """\
coupon_id,lot_id,condition,prior_true_strain,prior_plastic_work_j_per_m3,thickness_mm,grain_size_um,u_grain_size_um,sampled_at
A1,Wärme 417,rolled,0.25,51870000,2.0,20,2,2026-07-24
A2,Wärme 417,rolled,0.25,51870000,2.0,22,2,2026-07-24
"0012",Wärme 418,annealed,0,0,2.5,31,,
"""
INDENTS: Final = """\
coupon_id,indent_no,scale,force_n,d1_um,d2_um,hardness,ball_mm,x_mm,y_mm,edge_mm,measured_at,tester
A1,1,HV,98.07,438.9,437.4,,,1.0,9.0,7.5,2026-07-28T08:54:00+02:00,T1
A1,2,HV,98.07,432.7,434.6,,,4.0,9.0,7.5,2026-07-28T08:55:30+02:00,T1
A1,3,HV,98.07,437.8,436.6,,,7.0,9.0,7.5,2026-07-28T08:57:00+02:00,T1
A2,1,HBW,1226,1240,1252,,5,1.0,9.0,7.5,2026-07-28T09:10:00+02:00,T1
A2,2,HBW,1226,1244,1248,,5,6.0,9.0,7.5,2026-07-28T09:12:00+02:00,T1
"0012",1,,98.07,,,52.1,,1.0,9.0,7.5,,T1
"0012",2,,98.07,,,51.7,,5.0,9.0,7.5,,T1
"0012",3,,98.07,,,64.9,,9.0,9.0,7.5,,T1
"""
EXCLUSIONS: Final = """\
coupon_id,reading_no,excluded_by,excluded_at,reason
0012,3,operator-1,2026-07-29T08:00:00Z,scratch beside the indent
"""
TABLES: Final = ("coupons.csv", "indents.csv", "exclusions.csv")
NAMES: Final = ("batch.toml", *TABLES)


def valid() -> Files:
    texts = dict(zip(NAMES, (SHEET, COUPONS, INDENTS, EXCLUSIONS), strict=True))
    return {name: text.encode() for name, text in texts.items()}


class Corruption(Protocol):
    def __call__(self, files: Files) -> None:
        """Change the files; leave alone what does not fit."""


def place(where: float, length: int) -> int:
    return min(int(where * length), length - 1)


@dataclass(frozen=True)
class Bytes:
    """Overwrite, insert or cut out bytes."""

    file: str
    where: float
    new: bytes
    cut: int

    def __call__(self, files: Files) -> None:
        data = files.get(self.file, b"")
        at = place(self.where, len(data) + 1)
        files[self.file] = data[:at] + self.new + data[at + self.cut :]


def rows_of(data: bytes) -> list[list[str]]:
    return list(csv.reader(io.StringIO(data.decode("utf-8", "replace"), newline="")))


def written(rows: list[list[str]]) -> bytes:
    out = io.StringIO(newline="")
    csv.writer(out, lineterminator="\n").writerows(rows)
    return out.getvalue().encode("utf-8", "replace")


@dataclass(frozen=True)
class Cell:
    """Write something into a cell, of the header too."""

    file: str
    row: float
    column: float
    text: str

    def __call__(self, files: Files) -> None:
        rows = parsed(files, self.file)
        if rows and (row := rows[place(self.row, len(rows))]):
            row[place(self.column, len(row))] = self.text
            files[self.file] = written(rows)


@dataclass(frozen=True)
class Swap:
    """Swap two cells."""

    file: str
    first: tuple[float, float]
    second: tuple[float, float]

    def __call__(self, files: Files) -> None:
        rows = parsed(files, self.file)
        if not rows:
            return
        (r1, c1), (r2, c2) = self.first, self.second
        a, b = rows[place(r1, len(rows))], rows[place(r2, len(rows))]
        if a and b:
            i, j = place(c1, len(a)), place(c2, len(b))
            a[i], b[j] = b[j], a[i]
            files[self.file] = written(rows)


@dataclass(frozen=True)
class Column:
    """Double or drop a column."""

    file: str
    column: float
    twice: bool

    def __call__(self, files: Files) -> None:
        rows = parsed(files, self.file)
        if rows and rows[0]:
            at = place(self.column, len(rows[0]))
            for row in rows:
                if at < len(row):
                    row[at : at + 1] = [row[at]] * 2 if self.twice else []
            files[self.file] = written(rows)


@dataclass(frozen=True)
class Line:
    """Tear, double, drop or move a line."""

    file: str
    where: float
    how: str
    cut: float

    def __call__(self, files: Files) -> None:
        lines = files.get(self.file, b"").splitlines(keepends=True)
        if not lines:
            return
        at = place(self.where, len(lines))
        line = lines[at]
        changed = {
            "torn": [line[: place(self.cut, len(line))] + b"\n"],
            "joined": [line.rstrip(b"\r\n")],
            "doubled": [line, line],
            "dropped": [],
            "blank": [line, b"\n", b"  \n"],
        }
        if self.how == "moved":
            lines.insert(place(self.cut, len(lines)), lines.pop(at))
        else:
            lines[at : at + 1] = changed[self.how]
        files[self.file] = b"".join(lines)


@dataclass(frozen=True)
class Whole:
    """Another encoding, other line ends, half a file, no file."""

    file: str
    how: str

    def __call__(self, files: Files) -> None:
        data = files.get(self.file)
        if data is None:
            return
        text = data.decode("utf-8", "replace")
        ways: dict[str, Callable[[], bytes]] = {
            "utf-16": lambda: text.encode("utf-16"),
            "latin-1": lambda: text.encode("latin-1", "replace"),
            "bom": lambda: text.encode("utf-8-sig"),
            "crlf": lambda: text.replace("\n", "\r\n").encode(),
            "cr": lambda: text.replace("\n", "\r").encode(),
            "semicolons": lambda: text.replace(",", ";").encode(),
            "commas": lambda: text.replace(".", ",").encode(),
            "half": lambda: data[: len(data) // 2],
            "twice": lambda: data + data,
            "empty": lambda: b"",
            "header": lambda: data.split(b"\n", 1)[0],
        }
        if self.how == "missing":
            del files[self.file]
        else:
            files[self.file] = ways[self.how]()


@dataclass(frozen=True)
class Sheet:
    """Write something into the value of a key of the sheet, or rename the key."""

    where: float
    value: str
    key: bool

    def __call__(self, files: Files) -> None:
        lines = files.get("batch.toml", b"").decode("utf-8", "replace").splitlines()
        keys = [i for i, line in enumerate(lines) if "=" in line]
        if not keys:
            return
        at = keys[place(self.where, len(keys))]
        name, _, value = lines[at].partition("=")
        lines[at] = f"{name.strip()}x ={value}" if self.key else f"{name}= {self.value}"
        files["batch.toml"] = ("\n".join(lines) + "\n").encode("utf-8", "replace")


def parsed(files: Files, name: str) -> list[list[str]]:
    try:
        return rows_of(files.get(name, b""))
    except csv.Error:  # an earlier corruption was too much for the standard reader
        return []


UNIT: Final = st.floats(0.0, 1.0, exclude_max=True)
ANY: Final = st.sampled_from(NAMES)
TABLE: Final = st.sampled_from(TABLES)
NASTY: Final = st.sampled_from(
    [
        *("", " ", "nan", "inf", "-inf", "NA", "1,5", "1_000", "0x1F", ">940", "12 HV", "1.2.3"),
        *("1e999", "1e-400", "-5", "0", "-0", "1e308", "1e-300", "9" * 400, "١٢", "+1", ".5"),
        *("=1+1", "'", '"', "a\nb", "\t", "ä" * 130, "\ufeff", "\u2028", "\x7f", "A1", "0012"),
        *("HBW", "HK", "HV", "hv", "1", "2", "98.07", "1e6", "0.001", "2026-13-01", "T2", "5"),
        *("coupon_id", "indent_no", "force_n", "d1_um", "hardness", "x_mm", "lot_id", "Force_N"),
        *("2026-07-28", "2026-07-28T08:54:00", "2026-07-28T08:54:00+99:00", "0001-01-01T00:00Z"),
    ]
)
VALUES: Final = st.sampled_from(
    [
        *('"flow"', '"indent"', '"copper"', '"brass-70-30"', '"nickel"', '"pooled"', '"own"'),
        *("0", "-1", "1", "0.5", "1e300", "1e-300", "nan", "inf", "true", "[]", "{}", '""'),
        *("{ value = 3.0, u = 0.1 }", "{ value = 3.0, factor = 1.5 }", "{ value = 0, u = 1 }"),
        *("{ value = -2.0, u = 0.1 }", "{ u = 1 }", "{ value = 3.0, u = 1e300 }", "2027-03-31"),
        *('"indents.csv"', '"coupons.csv"', '"*.csv"', '"../x.csv"', '["indents.csv"]', "1e5"),
        *('"spacing"', '"half-spacing"', '"grain"', '"fixed"', '"full"', '"summary"', '"HV"'),
        *('"stored_energy_j_per_mol"', '"dislocation_stress_mpa"', '"a/b"', '"Europe/Berlin"'),
        *("0.999999999", "1.000000001", "300", "30000", "0.0001", '"guarded"', "1800-01-01"),
    ]
)
CORRUPTIONS: Final = st.one_of(
    st.builds(Bytes, ANY, UNIT, st.binary(max_size=3), st.integers(0, 4)),
    st.builds(Bytes, TABLE, UNIT, st.binary(min_size=1, max_size=1), st.just(1)),
    st.builds(Cell, TABLE, UNIT, UNIT, NASTY),
    st.builds(Cell, st.just("indents.csv"), UNIT, UNIT, NASTY),
    st.builds(Swap, TABLE, st.tuples(UNIT, UNIT), st.tuples(UNIT, UNIT)),
    st.builds(Column, TABLE, UNIT, st.booleans()),
    st.builds(
        Line,
        ANY,
        UNIT,
        st.sampled_from(["torn", "joined", "doubled", "dropped", "blank", "moved"]),
        UNIT,
    ),
    st.builds(
        Whole,
        ANY,
        st.sampled_from(
            [
                *("utf-16", "latin-1", "bom", "crlf", "cr", "semicolons", "commas"),
                *("half", "twice", "empty", "header", "missing"),
            ]
        ),
    ),
    st.builds(Sheet, UNIT, VALUES, st.booleans()),
    st.builds(Sheet, UNIT, VALUES, st.just(False)),
)


@contextmanager
def folders(files: Files) -> Iterator[tuple[Path, Path]]:
    with TemporaryDirectory(prefix="corrupt-") as scratch:
        batch, into = Path(scratch) / "batch", Path(scratch) / "into"
        batch.mkdir()
        for name, data in files.items():
            (batch / name).write_bytes(data)
        yield batch, into


def lines_with_something(data: bytes) -> int:
    """Rows of a table by its line ends alone, the header and blank lines aside."""
    text = data.removeprefix(b"\xef\xbb\xbf").replace(b"\r\n", b"\n").replace(b"\r", b"\n")
    return sum(line.strip(b" \t") != b"" for line in text.split(b"\n")) - 1


def check_results(files: Files, results: Path) -> None:
    manifest = json.loads((results / "manifest.json").read_bytes())
    counts = manifest["reconciled"]
    read, used = counts["readings_read"], counts["readings_used"]
    assert used + counts["readings_set_aside"] == read
    assert used > 0
    listed = [x for x in manifest["inputs"] if x["table"] in {"indents", "flow_stress"}]
    for entry in listed:
        assert entry["rows_read"] == entry["rows_used"] + entry["rows_set_aside"]
        assert entry["rows_read"] == lines_with_something(files[entry["path"]]), entry["path"]
    assert sum(entry["rows_read"] for entry in listed) == read
    rows = {x["path"]: x["rows"] for x in manifest["outputs"]}
    assert rows["set_aside.csv"] == counts["readings_set_aside"]
    assert rows["coupons.csv"] == counts["coupons"]
    assert rows.get("readings.csv", used) == used
    for coupons in (x for x in manifest["inputs"] if x["table"] == "coupons"):
        assert coupons["rows_read"] == lines_with_something(files[coupons["path"]])


ACCEPT_ALL: Final = [
    f"--accept={word}"
    for word in ("set-aside", "undecided", "non-conforming", "errors", "incomplete")
]


def ran(words: Sequence[str]) -> tuple[int, str, str]:
    """Give how a command line ended, and what it wrote to its two streams."""
    out, error = io.StringIO(), io.StringIO()
    with redirect_stdout(out), redirect_stderr(error):
        try:
            COMMAND.main([*words], prog_name="coldwork")
        except SystemExit as ended:
            return int(ended.code or 0), out.getvalue(), error.getvalue()
    return 0, out.getvalue(), error.getvalue()


def processed(files: Files, *options: str) -> int:
    with folders(files) as (batch, into):
        words = ["process", str(batch), "--into", str(into), "--no-plots", *options]
        code, shown, told = ran(words)
        said = shown + told
        assert "Traceback" not in said
        assert code in {0, 3, 4}, said
        found = list(into.iterdir()) if into.exists() else []
        if code == 4:
            assert found == [], said
            assert "refused" in said
            assert shown == ""
        else:
            assert len(found) == 1
            check_results(files, found[0])
        return code


def test_the_batch_is_valid() -> None:
    assert processed(valid()) == 3  # one reading is excluded, by a named person
    assert processed(valid(), *ACCEPT_ALL) == 0


def changed(old: bytes, new: bytes) -> Files:
    files = valid()
    sheet = files["batch.toml"]
    files["batch.toml"] = sheet.replace(old, new)
    assert files["batch.toml"] != sheet
    return files


def test_a_number_without_bounds_of_its_own_is_refused_too() -> None:
    assert processed(changed(b"resolution_um = 0.1", b"resolution_um = 1e300")) == 4


def test_a_pattern_that_matches_too_much_is_refused() -> None:
    for name in ("coupons", "indents", "exclusions"):
        assert (
            processed(changed(f'{name} = "{name}.csv"'.encode(), f'{name} = "*.csv"'.encode())) == 4
        )


def test_an_uncertainty_beyond_all_measure_can_be_put_into_words() -> None:
    # exp(theta0 eps / sigma_s) = exp(136): the reason of a decision has to write 0 +- 1e59
    assert processed(changed(b"saturation_stress_mpa = 320.0", b"saturation_stress_mpa = 1")) == 3


@given(st.lists(CORRUPTIONS, min_size=1, max_size=3), st.integers(0, 7))
@settings(
    max_examples=500,
    deadline=None,
    derandomize=True,
    database=None,
    suppress_health_check=[HealthCheck.too_slow],
)
@example([], 0)
def test_five_hundred_corruptions(corruptions: list[Corruption], full: int) -> None:
    files = valid()
    if full == 0:  # one in eight with records, budget and readings
        files["batch.toml"] = files["batch.toml"].replace(b'"summary"', b'"full"')
    for corrupt in corruptions:
        corrupt(files)
    processed(files, *(ACCEPT_ALL if full == 1 else []))
