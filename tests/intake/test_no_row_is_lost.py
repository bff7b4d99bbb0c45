"""Random tables of indents, held against a plain reading of the same rows one by one."""

import csv
import io
import re
from pathlib import Path
from tempfile import TemporaryDirectory

from hypothesis import given, settings
from hypothesis import strategies as st

from coldwork import contracts
from coldwork.errors import BatchRefused
from coldwork.intake.coupons import read_coupons
from coldwork.intake.exclusions import no_exclusions
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import read_readings
from coldwork.intake.set_aside import SetAside

COLUMNS = ["coupon_id", "indent_no", "scale", "force_n", "d1_um", "d2_um", "hardness", "ball_mm"]
COUPONS = ["A", "B", "0012", "x,y"]
NUMBER = re.compile(r"-?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")

mostly_number = st.sampled_from(
    [
        "98.07",
        "400",
        "1e2",
        "4.5E1",
        "7",
        "7",
        "7",
        "",
        "0",
        "-1",
        "1,5",
        "nan",
        "5.",
        "1e999",
        "8 N",
    ]
)
row = st.tuples(
    st.sampled_from([*COUPONS, *COUPONS, "", "'A", "C"]),
    st.sampled_from(["1", "2", "3", "4", "007", "", "x", "1.0"]),
    st.sampled_from(["", "HV", "HV", "HK", "HBW", "HRC"]),
    mostly_number, mostly_number, mostly_number, mostly_number, mostly_number,
    st.sampled_from([0, 0, 0, 0, 0, 0, -1, 1]),
)  # fmt: skip


def number(text: str) -> float | None:
    """A number above zero, 0 for an empty cell, None for anything else."""
    if text == "":
        return 0.0
    value = float(text) if NUMBER.fullmatch(text) else -1.0
    return value if 1e-30 < value < 1e30 else None


def usable(cells: tuple[str, ...]) -> bool:
    """What the contract of indents and its cross-column checks say of one row."""
    coupon, indent, scale, *rest = cells
    values = [number(text) for text in rest]
    if None in values or scale not in ("", "HV", "HK", "HBW"):
        return False
    force, d1, d2, hardness, ball = (value or 0.0 for value in values)
    if coupon.removeprefix("'") not in COUPONS or not re.fullmatch("[0-9]+", indent) or not force:
        return False
    measured = bool(d1 and (d2 or scale == "HK"))
    if not measured and not hardness:
        return False
    if scale == "HBW":
        if not ball:
            return False
        if measured:
            return (d1 + d2) / 2 < ball * 1000
        return force / (3.141592653589793 * ball**2 * hardness * 9.80665) < 0.5
    return True


@settings(deadline=None, max_examples=100)
@given(
    st.lists(row, max_size=30),
    st.lists(st.booleans(), min_size=30, max_size=30),
    st.integers(40, 400),
    st.sampled_from(["\n", "\r\n"]),
)
def test_rows_read_are_rows_used_and_rows_set_aside(
    rows: list[tuple[str, ...]], blanks: list[bool], block_bytes: int, end: str
) -> None:
    out = io.StringIO()
    writer = csv.writer(out, lineterminator=end)
    writer.writerow(COLUMNS)
    used: list[int] = []
    aside: list[int] = []
    line = 2
    for (*cells, tear), blank in zip(rows, blanks, strict=False):
        out.write(end * blank)
        line += blank
        whole = cells[:-1] if int(tear) < 0 else cells + ["1"] * int(tear)
        writer.writerow(whole)
        (used if usable(tuple(cells)) and not int(tear) else aside).append(line)
        line += 1
    with TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "c.csv").write_text('coupon_id\nA\nB\n0012\n"x,y"\n')
        (folder / "i.csv").write_bytes(out.getvalue().encode())
        coupons = read_coupons(
            TableFiles(contracts.load("in/coupons"), folder, (folder / "c.csv",)), "UTC"
        )
        files = TableFiles(contracts.load("in/indents"), folder, (folder / "i.csv",))
        for size in (block_bytes, 2 << 20):
            kept = SetAside(len(coupons))
            stream = read_readings(files, coupons, no_exclusions(), kept, "UTC", block_bytes=size)
            found = [int(line) for block in stream for line in block.lines]
            assert found == used
            assert kept.table().column("line").to_pylist() == aside
            (source,) = stream.sources
            assert source.rows_read == len(rows)
            assert source.rows_used == len(used)
            assert source.rows_set_aside == len(aside) == kept.count


GOOD = "\n".join(
    [",".join(COLUMNS), *(f"{c},{n},HV,98.07,400,401,," for c in ("A", "B") for n in range(5)), ""]
).encode()


@settings(deadline=None, max_examples=200)
@given(
    st.lists(
        st.tuples(st.integers(0, len(GOOD)), st.integers(0, 12), st.binary(max_size=6)), max_size=4
    )
)
def test_damaged_bytes_are_refused_or_accounted_for(
    damages: list[tuple[int, int, bytes]],
) -> None:
    data = GOOD
    for place, cut, put in damages:
        data = data[:place] + put + data[place + cut :]
    with TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "c.csv").write_text("coupon_id\nA\nB\n")
        (folder / "i.csv").write_bytes(data)
        coupons = read_coupons(
            TableFiles(contracts.load("in/coupons"), folder, (folder / "c.csv",)), "UTC"
        )
        files = TableFiles(contracts.load("in/indents"), folder, (folder / "i.csv",))
        kept = SetAside(2)
        stream = read_readings(files, coupons, no_exclusions(), kept, "UTC", block_bytes=64)
        try:
            used = sum(len(block.lines) for block in stream)
        except BatchRefused:  # which is never without a cause, see the tests of text
            return
        # splitlines() of bytes ends lines at LF, CR and CRLF, as this table does
        filled = [
            line for line in data.removeprefix(b"\xef\xbb\xbf").splitlines() if line.strip(b" \t")
        ]
        (source,) = stream.sources
        assert source.rows_read == len(filled) - 1
        assert source.rows_used == used
        assert source.rows_read == used + kept.count
        assert kept.table().num_rows == kept.count
