"""Any batch, written through any layout and read back, gives the same cells as its tidy table.

The writer below knows nothing of the reader: it writes decimal numbers in a unit, signs and
encoding that were drawn, and works out the tidy cell by exact decimal arithmetic.
"""

import csv
import io
import json
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from decimal import Decimal
from pathlib import Path
from random import Random
from tempfile import TemporaryDirectory
from typing import Any, Final

from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from coldwork import contracts
from coldwork.inputs.layout import read_layout
from coldwork.intake.coupons import read_coupons
from coldwork.intake.exclusions import no_exclusions
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import ReadingStream, read_readings
from coldwork.intake.set_aside import SetAside

FORCE: Final = {"N": "1", "kN": "1000", "kgf": "9.80665", "gf": "0.00980665"}
UNITS: Final[dict[str, dict[str, str]]] = {  # SI brochure; NIST SP 811 for kgf and inch
    "force_n": FORCE | {"lbf": "4.4482216152605"},
    "d1_um": {"um": "1", "mm": "1000", "in": "25400"},
    "d2_um": {"um": "1", "mm": "1000", "in": "25400"},
    "hardness": {"kgf/mm2": "1"},
    "x_mm": {"mm": "1", "um": "0.001", "in": "25.4"},
    "edge_mm": {"mm": "1", "um": "0.001"},
    "dwell_s": {"s": "1", "min": "60"},
    "temperature_c": {"C": "1", "K": "1"},
}
REQUIRED: Final = ("coupon_id", "force_n", "d1_um", "d2_um")
TIMES: Final = (None, "%d.%m.%Y %H:%M", "%m/%d/%Y %I:%M %p", "%d %b %Y %H:%M:%S", "%Y%m%d-%H%M%S")
ENCODINGS: Final = {  # as a layout says it: codec, mark
    "utf-8": [("utf-8", b""), ("utf-8", b"\xef\xbb\xbf")],
    "utf-16": [("utf-16-le", b"\xff\xfe"), ("utf-16-be", b"\xfe\xff")],
    "utf-16-le": [("utf-16-le", b""), ("utf-16-le", b"\xff\xfe")],
    "utf-16-be": [("utf-16-be", b"")],
    "cp1252": [("cp1252", b"")],
    "latin-1": [("latin-1", b"")],
    "cp437": [("cp437", b"")],
    "gb18030": [("gb18030", b"")],
}
DELIMITERS: Final = {"tab": "\t", ";": ";", "|": "|", ",": ",", "spaces": " "}
WORDS: Final = ("---", "n.m.")
LETTERS: Final = "abYZ0189 -_.;,|\"'#=+@<&%äßéµ°²×–€Жя試한٣"


@dataclass
class Plan:
    """How one batch is written."""

    encoding: str
    codec: str
    mark: bytes
    delimiter: str
    decimal: str
    thousands: str | None
    end: str
    begin: str  # marker, header_line or nothing
    units_line: bool
    comments: bool
    padded: bool
    closed: bool
    times: str | None
    absent: tuple[str, ...]
    units: dict[str, str]
    place: dict[str, str] = field(default_factory=dict)  # column, above or constant
    order: list[str] = field(default_factory=list)  # our columns, and `extra` ones


@dataclass(frozen=True)
class Cell:
    """One cell: as it is written, and as the tidy table has it."""

    written: str
    tidy: str


@st.composite
def plans(draw: st.DrawFn) -> Plan:
    encoding = draw(st.sampled_from(list(ENCODINGS)))
    codec, mark = draw(st.sampled_from(ENCODINGS[encoding]))
    delimiter = draw(st.sampled_from(list(DELIMITERS)))
    signs = [(".", None), (",", None), (".", ","), (",", "."), (",", " "), (".", "'")]
    taken = DELIMITERS[delimiter]
    decimal, thousands = draw(st.sampled_from([pair for pair in signs if taken not in pair]))
    spaces = delimiter == "spaces"
    return Plan(
        encoding=encoding,
        codec=codec,
        mark=mark,
        delimiter=delimiter,
        decimal=decimal,
        thousands=thousands,
        end=draw(st.sampled_from(["\n", "\r\n", "\r"])),
        begin=draw(st.sampled_from(["marker", "header_line", ""])),
        units_line=draw(st.booleans()),
        comments=draw(st.booleans()),
        padded=draw(st.booleans()) and not spaces,
        closed=draw(st.booleans()),
        times=draw(st.sampled_from([t for t in TIMES if not (spaces and t and " " in t)])),
        absent=WORDS if spaces else draw(st.sampled_from([("",), ("", *WORDS), WORDS])),
        units={name: draw(st.sampled_from(list(units))) for name, units in UNITS.items()},
    )


def text(rng: Random, plan: Plan) -> str:
    """Printable text that can be encoded and is none of the words that mean something."""
    letters = LETTERS.encode(plan.codec, "ignore").decode(plan.codec)
    if plan.delimiter == "spaces":
        letters = "".join(letters.split())
    while True:
        one = "".join(rng.choices(letters, k=rng.randint(1, 8)))
        usual = one[0] != "#" and one not in (*WORDS, "end")
        quoted = plan.delimiter == "spaces" and one[0] == '"'
        if usual and not quoted and not (plan.padded and one != one.strip(" ")):
            return one


def number(rng: Random, plan: Plan, column: str) -> Cell:
    if column not in REQUIRED and rng.random() < 0.2:
        return Cell(rng.choice(plan.absent), "")
    whole = rng.randint(1, 10 ** rng.randint(1, 7))
    rest = "".join(rng.choices("0123456789", k=rng.randint(0, 4)))
    value = Decimal(f"{whole}.{rest}" if rest else str(whole))
    digits = str(whole)
    if plan.thousands and rng.random() < 0.5:
        digits = f"{whole:,}".replace(",", plan.thousands)
    return Cell(digits + (plan.decimal + rest if rest else ""), exact(value, plan, column))


def exact(value: Decimal, plan: Plan, column: str) -> str:
    """Give the tidy cell of a number that is written in the plan's unit."""
    unit = plan.units[column]
    return f"{value - Decimal('273.15') if unit == 'K' else value * Decimal(UNITS[column][unit]):f}"


def moment(rng: Random, plan: Plan) -> Cell:
    if rng.random() < 0.2:
        return Cell(rng.choice(plan.absent), "")
    seconds = plan.times is None or "%S" in plan.times
    time = datetime(2000, 1, 1) + timedelta(  # noqa: DTZ001 - the sheet names the zone
        days=rng.randint(0, 20_000),
        minutes=rng.randint(0, 1439),
        seconds=seconds * rng.randint(0, 59),
    )
    tidy = time.isoformat(timespec="seconds" if seconds else "minutes")
    return Cell(time.strftime(plan.times) if plan.times else tidy, tidy)


def cell(rng: Random, plan: Plan, column: str, row: int) -> Cell:
    if column in UNITS:
        return number(rng, plan, column)
    if column == "measured_at":
        return moment(rng, plan)
    fixed = {"indent_no": str(row), "scale": "HV"}
    one = fixed.get(column) or text(rng, plan)
    return Cell(one, one)


@st.composite
def batches(draw: st.DrawFn) -> tuple[Plan, list[dict[str, Cell]]]:
    plan = draw(plans())
    optional = [*list(UNITS)[3:], "measured_at", "operator", "tester", "scale", "indent_no"]
    columns = [*REQUIRED, *draw(st.lists(st.sampled_from(optional), unique=True))]
    rng = Random(draw(st.integers(0, 2**32)))  # noqa: S311 - cells, not secrets
    coupons = [text(rng, plan) for _ in range(3)]
    rows = []
    for row in range(1, draw(st.integers(1, 9)) + 1):
        name = rng.choice(coupons)
        rows.append(
            {"coupon_id": Cell(name, name)}
            | {column: cell(rng, plan, column, row) for column in columns[1:]}
        )
    for column in draw(st.lists(st.sampled_from(columns), unique=True)) if plan.begin else []:
        if column != "indent_no" and len(columns) - len(plan.place) > 1:
            plan.place[column] = rng.choice(["above", "constant"])
            if plan.place[column] == "constant":
                rows[0][column] = constant(rows[0][column], column, plan)
            for each in rows[1:]:
                each[column] = rows[0][column]
    free = [column for column in columns if column not in plan.place]
    plan.units_line &= any(column in UNITS for column in free)  # it would be a blank line
    least = int(len(free) == 1)  # an empty cell alone in its line would be a blank line
    plan.order = [*free, *(f"extra {n}" for n in range(rng.randint(least, 3)))]
    rng.shuffle(plan.order)
    return plan, rows


def constant(cell: Cell, column: str, plan: Plan) -> Cell:
    """A constant is TOML: a number without thousands marks, a time in ISO 8601, any text."""
    if column not in UNITS:
        return Cell(cell.tidy, cell.tidy)
    digits = "".join(c for c in cell.written if c.isdigit() or c == plan.decimal)
    value = float(digits.replace(plan.decimal, ".")) if cell.tidy else 7.0
    return Cell(repr(value), exact(Decimal(repr(value)), plan, column))


def own(column: str, plan: Plan) -> str:
    name = f"the {column.split('_')[0]} {'(x)' if column in UNITS else ''}".strip()
    return name.replace(" ", "-") if plan.delimiter == "spaces" else name


def quoted(text: str) -> str:
    """Write text as a basic string of TOML, which JSON's are too."""
    return json.dumps(text, ensure_ascii=False)


def layout(plan: Plan, rows: list[dict[str, Cell]], header_line: int) -> str:
    lines = ["[layout]", 'id = "any"', 'fills = "indents"', "[text]"]
    lines += [f"encoding = {quoted(plan.encoding)}", f"delimiter = {quoted(plan.delimiter)}"]
    lines += [f"decimal = {quoted(plan.decimal)}", f"padded = {str(plan.padded).lower()}"]
    lines += [f"units_line = {str(plan.units_line).lower()}", f"absent = {json.dumps(plan.absent)}"]
    lines += [f"thousands = {quoted(plan.thousands)}"] if plan.thousands else []
    lines += [f"times = {quoted(plan.times)}"] if plan.times else []
    lines += ['comment = "#"'] if plan.comments else []
    lines += ['ends_before = ["end"]'] if plan.closed else []
    if plan.begin == "marker":
        lines.append('table_starts_after = "HERE IT COMES"')
    elif plan.begin == "header_line":
        lines.append(f"header_line = {header_line}")
    for section in ("column", "above", "constant"):
        lines.append(f"[{section if section == 'above' else section + 's'}]")
        for column, cell in rows[0].items():
            if plan.place.get(column, "column") != section:
                continue
            unit = f", unit = {quoted(plan.units[column])}" if column in UNITS else ""
            if section == "constant":
                value = cell.written if column in UNITS else quoted(cell.written)
                lines.append(f"{column} = " + (f"{{ value = {value}{unit} }}" if unit else value))
            else:
                name = f"{own(column, plan)}:" if section == "above" else own(column, plan)
                lines.append(f"{column} = {{ from = {quoted(name)}{unit} }}")
    return "\n".join(lines)


def written(plan: Plan, rows: list[dict[str, Cell]]) -> tuple[bytes, int]:
    """Write the batch; give the file and the line of its header."""
    mark = DELIMITERS[plan.delimiter]

    def line(cells: list[str]) -> str:
        if plan.delimiter == "spaces":
            return "  ".join(cells)
        cells = [cell.ljust(len(cell) + 2) for cell in cells] if plan.padded else cells
        out = io.StringIO()
        csv.writer(out, delimiter=mark, lineterminator="").writerow(cells)
        return out.getvalue()

    above = [
        line([f"{own(column, plan)}:", cell.written])
        for column, cell in rows[0].items()
        if plan.place.get(column) == "above"
    ]
    if plan.begin:
        above = ["a record", "", *above]
    if plan.begin == "marker":
        above.append("HERE IT COMES")
    lines = [*above, line([own(column, plan) for column in plan.order])]
    if plan.units_line:
        nothing = "-" if plan.delimiter == "spaces" else ""
        lines.append(line([plan.units.get(column, nothing) for column in plan.order]))
    for number, row in enumerate(rows, 1):
        cells = [row[each].written if each in row else str(number) for each in plan.order]
        lines += ["# a remark", ""] if plan.comments and number % 3 == 0 else []
        lines.append(line(cells))
    lines += [line(["end", "of", "it"])] if plan.closed else []
    return plan.mark + "".join(f"{each}{plan.end}" for each in lines).encode(plan.codec), len(
        above
    ) + 1


def tidy(rows: list[dict[str, Cell]]) -> str:
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    counts: dict[str, int] = {}
    names = [*rows[0], *(["indent_no"] if "indent_no" not in rows[0] else [])]
    writer.writerow(names)
    for row in rows:
        coupon = row["coupon_id"].tidy
        counts[coupon] = counts.get(coupon, 0) + 1
        cells = {name: cell.tidy for name, cell in row.items()}
        cells.setdefault("indent_no", str(counts[coupon]))
        writer.writerow([guarded(cells[name]) for name in names])
    return out.getvalue()


def guarded(text: str) -> str:
    """Write text as tidy tables have it, where readers take one apostrophe off."""
    return f"'{text}" if text.startswith("'") else text


def cells_of(stream: ReadingStream) -> list[list[Any]]:
    found: list[list[Any]] = []
    for block in stream:
        named: dict[str, list[Any]] = {k: v.tolist() for k, v in block.floats.items()}
        named |= {k: v.to_pylist() for k, v in block.texts.items()}
        times = [None] * len(block.lines) if block.times is None else block.times.tolist()
        columns = [block.coupon.tolist(), block.number.tolist(), times]
        columns += [
            [value.hex() if isinstance(value, float) else value for value in named[name]]
            for name in sorted(named)
        ]
        found += map(list, zip(*columns, strict=True))
    return found


@settings(deadline=None, max_examples=80, suppress_health_check=[HealthCheck.too_slow])
@given(batches(), st.sampled_from([64, 2 << 20]))
def test_what_was_written_through_a_layout_is_read_back(
    batch: tuple[Plan, list[dict[str, Cell]]], block_bytes: int
) -> None:
    plan, rows = batch
    data, header_line = written(plan, rows)
    if plan.codec in ("cp1252", "latin-1", "cp437"):
        assume(not could_be_utf_8(data))  # refused, and rightly
    with TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "l.toml").write_text(layout(plan, rows, header_line), encoding="utf-8")
        (folder / "f.txt").write_bytes(data)
        (folder / "i.csv").write_text(tidy(rows), encoding="utf-8", newline="")
        ids = list(dict.fromkeys(guarded(row["coupon_id"].tidy) for row in rows))
        listed = io.StringIO()
        csv.writer(listed, lineterminator="\n").writerows([["coupon_id"], *([one] for one in ids)])
        (folder / "c.csv").write_text(listed.getvalue(), encoding="utf-8", newline="")
        coupons = read_coupons(
            TableFiles(contracts.load("in/coupons"), folder, (folder / "c.csv",)), "UTC"
        )
        contract, made = contracts.load("in/indents"), read_layout("l.toml", folder)
        found = []
        for path, layouts in (("i.csv", ()), ("f.txt", (made,))):
            files = TableFiles(contract, folder, (folder / path,), layouts)
            aside = SetAside(len(coupons))
            stream = read_readings(
                files, coupons, no_exclusions(), aside, "UTC", block_bytes=block_bytes
            )
            found.append(cells_of(stream))
            assert aside.table().to_pylist() == []
    assert found[1] == found[0]
    assert len(found[0]) == len(rows)


def could_be_utf_8(data: bytes) -> bool:
    try:
        return not data.decode("utf-8").isascii()
    except UnicodeDecodeError:
        return False
