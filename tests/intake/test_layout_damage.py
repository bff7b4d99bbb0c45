"""Two thousand random changes of bytes: never a traceback, never a silently different number.

Each damaged file is read through its layout, and beside it by a plain reader of a few lines that
knows the two layouts by heart and nothing of the package. Whatever the package uses must be what
that reader finds in that line; all else must have been set aside or refused.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from decimal import Decimal
from pathlib import Path
from random import Random
from typing import Final

import pytest
from tests.intake.laid_out import COUPONS, LAYOUT

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.inputs.layout import read_layout
from coldwork.intake.coupons import read_coupons
from coldwork.intake.exclusions import no_exclusions
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import ReadingBlock, read_readings
from coldwork.intake.set_aside import SetAside

CHANGES: Final = 1000  # of each file


@dataclass(frozen=True)
class Known:
    """A file, its layout, and what the plain reader has to know of them."""

    layout: str
    data: bytes
    codec: str
    delimiter: str
    decimal: str
    thousands: str
    times: str
    absent: tuple[str, ...]
    columns: Mapping[str, tuple[str, str]]  # ours: the file's own, and how much one of its units is
    coupon: str | None  # its label above


FIRST: Final = Known(
    layout=LAYOUT,
    data=(
        "bench record\r\npiece:;A\r\nby:;operator-1\r\n\r\nREADINGS FOLLOW\r\n"
        "no;weight;across;along;right;when\r\n;kgf;mm;mm;mm;\r\n"
        "1;10;0,6009;0,5972;7,46;28.07.2026 07:50\r\n"
        "2;10;0,5990;0,5992;1.009,99;28.07.2026 07:51\r\n# lamp readjusted\r\n"
        "3;10;0,5951;0,6017;---;28.07.2026 07:53\r\n4;10;0,6043;0,6002;;\r\n"
        "average;10;0,5998;0,5996;;\r\nspread;0;0,0039;0,0019;;\r\n"
    ).encode("cp1252"),
    codec="cp1252",
    delimiter=";",
    decimal=",",
    thousands=".",
    times="%d.%m.%Y %H:%M",
    absent=("", "---"),
    columns={
        "force_n": ("weight", "9.80665"),
        "d1_um": ("across", "1000"),
        "d2_um": ("along", "1000"),
        "x_mm": ("right", "1"),
    },
    coupon="piece:",
)
SECOND: Final = Known(
    layout="""
[layout]
id = "other"
fills = "indents"
[text]
encoding = "utf-16-le"
delimiter = "tab"
decimal = "."
absent = [""]
[columns]
coupon_id = "Specimen"
indent_no = "Indent"
force_n = { from = "Load", unit = "kN" }
d1_um = "A"
d2_um = "B"
x_mm = { from = "X", unit = "um" }
""",
    data=(
        "Specimen\tIndent\tLoad\tA\tB\tX\tNote\n"
        "A\t1\t0.09807\t600.9\t597.2\t7460\tfine\n"
        "A\t2\t0.09807\t599.0\t599.2\t1.2e4\t\n"
        "0012\t1\t0.09807\t595.1\t601.7\t\tsmudged\n"
        "B\t1\t0.09807\t604.3\t600.2\t15020\t\n"
    ).encode("utf-16-le"),
    codec="utf-16-le",
    delimiter="\t",
    decimal=".",
    thousands="",
    times="",
    absent=("",),
    columns={
        "force_n": ("Load", "1000"),
        "d1_um": ("A", "1"),
        "d2_um": ("B", "1"),
        "x_mm": ("X", "0.001"),
    },
    coupon=None,
)


def damaged(data: bytes, rng: Random) -> bytes:
    """Change one to three bytes: put in, taken out, or another one instead."""
    for _ in range(rng.choice((1, 1, 2, 3))):
        place = rng.randrange(len(data))
        byte = bytes(
            [rng.choice((*b"0123456789.,-;\t\r\n\"'+eE #_\x00\xc3\xa4", rng.randrange(256)))]
        )
        cut, put = rng.choice(((1, byte), (1, byte), (0, byte), (1, b"")))
        data = data[:place] + put + data[place + cut :]
    return data


def plain_number(cell: str, known: Known, factor: str) -> float | None:
    """Read a number by the declared signs, or nothing; what is no number raises ValueError."""
    if cell in known.absent:
        return None
    mark, sign = re.escape(known.thousands or "\0"), re.escape(known.decimal)
    whole = rf"[0-9]+|[1-9][0-9]{{0,2}}({mark}[0-9]{{3}})+"
    if re.fullmatch(rf"-?({whole})({sign}[0-9]+)?|-?{sign}[0-9]+", cell) is None and not (
        re.fullmatch(rf"-?([0-9]+({sign}[0-9]+)?|{sign}[0-9]+)[eE][+-]?[0-9]+", cell)
    ):
        raise ValueError(cell)
    text = cell.replace(known.thousands, "") if known.thousands else cell
    return float(Decimal(text.replace(known.decimal, ".")) * Decimal(factor))


def expected(data: bytes, known: Known) -> dict[int, dict[str, float | str | None]]:
    """Read every line that could be a row by the plain reader, where it can be read at all."""
    text = data.decode(known.codec, "replace")
    lines = re.split(r"\r\n|\r|\n", text)
    cells = [line.split(known.delimiter) for line in lines]
    names = {own for own, _ in known.columns.values()}
    header = next((place for place, row in enumerate(cells) if names <= set(row)), len(cells))
    above = (re.match(r"piece:;?\s*([^;]*?)\s*(;|$)", line) for line in lines[:header])
    coupons = [match[1] for match in above if match]
    found: dict[int, dict[str, float | str | None]] = {}
    for place in range(header + 1, len(cells)):
        row = cells[place]
        if len(row) != len(cells[header]) or '"' in lines[place]:
            continue
        named = dict(zip(cells[header], row, strict=True))
        try:
            values: dict[str, float | str | None] = {
                ours: plain_number(named[own], known, factor)
                for ours, (own, factor) in known.columns.items()
            }
            if known.times and named["when"] not in known.absent:
                time = datetime.strptime(named["when"], known.times).replace(tzinfo=UTC)
                values["time"] = time.timestamp() * 1e6
        except ValueError:
            continue
        values["coupon"] = coupons[0] if known.coupon and coupons else named.get("Specimen")
        found[place + 1] = values
    return found


def compared(block: ReadingBlock, data: bytes, known: Known) -> int:
    """Hold the rows of a block against the plain reader; give how many could be."""
    lines = re.split(r"\r\n|\r|\n", data.decode(known.codec, "replace"))
    plain = expected(data, known)
    held = 0
    for row, line in enumerate(block.lines.tolist()):
        if '"' in lines[line - 1]:
            continue
        assert line in plain, lines[line - 1]
        values = plain[line]
        for column in known.columns:
            ours, theirs = float(block.floats[column][row]), values[column]
            assert ours == theirs or (ours != ours and theirs is None), (column, lines[line - 1])
        if "time" in values and block.times is not None:
            assert block.times[row] == values["time"]
        assert COUPONS[block.coupon[row]] == values["coupon"]
        held += 1
    return held


@pytest.mark.parametrize("known", [FIRST, SECOND], ids=["first", "second"])
def test_a_damaged_file_is_refused_or_read_as_it_stands(tmp_path: Path, known: Known) -> None:
    (tmp_path / "l.toml").write_text(known.layout)
    (tmp_path / "c.csv").write_text("\n".join(("coupon_id", *COUPONS, "")))
    path = tmp_path / "f.txt"
    made = read_layout("l.toml", tmp_path)
    files = TableFiles(contracts.load("in/indents"), tmp_path, (path,), (made,))
    listed = TableFiles(contracts.load("in/coupons"), tmp_path, (tmp_path / "c.csv",))
    coupons = read_coupons(listed, "UTC")
    held = refused = 0
    for seed in range(CHANGES):
        data = damaged(known.data, Random(seed)) if seed else known.data  # noqa: S311
        path.write_bytes(data)
        aside = SetAside(len(coupons))
        stream = read_readings(files, coupons, no_exclusions(), aside, "UTC")
        try:
            blocks = list(stream)
        except BatchRefused:
            refused += 1
            continue
        used = sum(len(block.lines) for block in blocks)
        assert stream.sources[0].rows_read == used + aside.count
        held += sum(compared(block, data, known) for block in blocks)
        if not seed:
            assert used == held == 4
    assert held > CHANGES // 2  # the damage does not refuse everything
    assert refused > CHANGES // 20
