"""Readings: what is used, what is set aside and why, and that no row is lost."""

from collections.abc import Callable
from hashlib import sha256
from typing import Any

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from coldwork import contracts
from coldwork.contracts.arrays import check_table
from coldwork.errors import BatchRefused
from coldwork.intake.coupons import Coupons, read_coupons
from coldwork.intake.exclusions import Exclusions, no_exclusions, read_exclusions
from coldwork.intake.files import TableFiles
from coldwork.intake.readings import ReadingBlock, ReadingStream, read_readings
from coldwork.intake.set_aside import SetAside
from coldwork.intake.times import ABSENT
from coldwork.rules.reasons import REPEATED_READING

Tables = Callable[..., TableFiles]
HEADER = "coupon_id,indent_no,force_n,d1_um,d2_um"
FLOW = "coupon_id,reading_no,plastic_strain,flow_stress_mpa"


@pytest.fixture
def coupons(tables: Tables) -> Coupons:
    return read_coupons(tables("coupons", "coupon_id\nA\nB\n0012\nNA\n'=7/A ä<b>\n"), "UTC")


class Run:
    """A stream that was read to its end."""

    def __init__(
        self,
        files: TableFiles,
        coupons: Coupons,
        exclusions: Exclusions | None = None,
        *,
        zone: str = "UTC",
        block_bytes: int = 64,
    ) -> None:
        self.aside = SetAside(len(coupons))
        exclusions = exclusions or no_exclusions()
        self.stream: ReadingStream = read_readings(
            files, coupons, exclusions, self.aside, zone, block_bytes=block_bytes
        )
        self.blocks: list[ReadingBlock] = list(self.stream)

    @property
    def used(self) -> list[tuple[int, int, int]]:
        """Line, coupon and number of each usable row."""
        return [
            (int(line), int(coupon), int(number))
            for block in self.blocks
            for line, coupon, number in zip(block.lines, block.coupon, block.number, strict=True)
        ]

    def floats(self, name: str) -> list[float]:
        return [float(x) for block in self.blocks for x in block.floats[name]]

    def texts(self, name: str) -> list[str]:
        return [str(x) for block in self.blocks for x in block.texts[name].to_pylist()]

    @property
    def rows(self) -> list[dict[str, Any]]:
        """What was set aside, as published."""
        table = self.aside.table()
        assert check_table(contracts.load("out/set_aside"), table) == []
        rows: list[dict[str, Any]] = table.to_pylist()
        return rows


def test_reads_good_rows(tables: Tables, coupons: Coupons) -> None:
    content = f"{HEADER},operator,measured_at\nA,1,98.07,100.5,101,operator-1,2026-03-31T10:00\n"
    content += "'=7/A ä<b>,2,9.807,.5e2,50,'+x,\n"
    run = Run(tables("indents", content), coupons)
    assert run.used == [(2, 0, 1), (3, 4, 2)]
    assert run.floats("force_n") == [98.07, 9.807]
    assert run.floats("d1_um") == [100.5, 50.0]
    assert run.texts("operator") == ["operator-1", "+x"]
    assert run.texts("scale") == ["HV", "HV"]
    assert run.texts("measured_at") == ["2026-03-31T10:00", ""]
    raw = [row for block in run.blocks for row in block.raw.to_pylist()]
    assert raw[1]["coupon_id"] == "'=7/A ä<b>"
    assert raw[1]["operator"] == "'+x"
    assert raw[1]["d1_um"] == ".5e2"
    assert run.rows == []
    (source,) = run.stream.sources
    assert source.sha256 == sha256(content.encode()).hexdigest()
    assert (source.path, source.table, source.bytes) == (
        "indents-1.csv",
        "indents",
        len(content.encode()),
    )
    assert (source.rows_read, source.rows_used, source.rows_set_aside) == (2, 2, 0)


def test_times_are_universal(tables: Tables, coupons: Coupons) -> None:
    content = f"{HEADER},measured_at\nA,1,1,1,1,1970-01-01T01:00\nA,2,1,1,1,\n"
    run = Run(tables("indents", content), coupons, zone="Europe/Berlin")
    times = np.concatenate([block.times for block in run.blocks if block.times is not None])
    assert times.tolist() == [0, ABSENT]  # Central European Time is one hour ahead
    assert Run(tables("indents", HEADER + "\nA,1,1,1,1\n"), coupons).blocks[0].times is None


def test_absent_optional_numbers_are_nan(tables: Tables, coupons: Coupons) -> None:
    run = Run(tables("indents", f"{HEADER},x_mm,edge_mm\nA,1,1,1,1,,0\nA,2,1,1,1,-3,\n"), coupons)
    assert_array_equal(run.floats("x_mm"), [np.nan, -3.0])
    assert_array_equal(run.floats("edge_mm"), [0.0, np.nan])
    assert "y_mm" not in run.blocks[0].floats


GOOD = {
    "coupon_id": "A", "indent_no": "1", "force_n": "98.07", "d1_um": "400", "d2_um": "401",
    "scale": "HV", "hardness": "", "ball_mm": "", "x_mm": "", "edge_mm": "", "dwell_s": "",
    "temperature_c": "", "measured_at": "", "operator": "", "tester": "",
}  # fmt: skip
FAULTS: list[tuple[dict[str, str], str, str]] = [
    ({"d1_um": "4x"}, "not-a-number", "d1_um"),
    ({"d1_um": "1.2.3"}, "not-a-number", "d1_um"),
    ({"force_n": ">98"}, "not-a-number", "force_n"),
    ({"indent_no": "1.5"}, "not-a-number", "indent_no"),
    ({"indent_no": "-1"}, "not-a-number", "indent_no"),
    ({"x_mm": "NA"}, "not-a-number", "x_mm"),
    ({"hardness": "183 HV"}, "not-a-number", "hardness"),
    ({"coupon_id": ""}, "required-empty", "coupon_id"),
    ({"coupon_id": "'"}, "required-empty", "coupon_id"),
    ({"indent_no": ""}, "required-empty", "indent_no"),
    ({"force_n": ""}, "required-empty", "force_n"),
    ({"d1_um": ""}, "required-empty", "d1_um"),
    ({"d2_um": ""}, "required-empty", "d2_um"),
    ({"d1_um": "", "d2_um": ""}, "required-empty", "d1_um"),
    ({"scale": "HK", "d1_um": ""}, "required-empty", "d1_um"),
    ({"scale": "HBW", "ball_mm": "2.5", "d2_um": ""}, "required-empty", "d2_um"),
    ({"d1_um": "0"}, "out-of-range", "d1_um"),
    ({"force_n": "-98.07"}, "out-of-range", "force_n"),
    ({"d2_um": "1e99"}, "out-of-range", "d2_um"),
    ({"d2_um": "1e-99"}, "out-of-range", "d2_um"),
    ({"edge_mm": "-0.1"}, "out-of-range", "edge_mm"),
    ({"temperature_c": "-300"}, "out-of-range", "temperature_c"),
    ({"operator": "x" * 121}, "out-of-range", "operator"),
    ({"tester": "T\x071"}, "out-of-range", "tester"),
    ({"coupon_id": "C"}, "unlisted-coupon", "coupon_id"),
    ({"coupon_id": "12"}, "unlisted-coupon", "coupon_id"),
    ({"coupon_id": "A "}, "unlisted-coupon", "coupon_id"),
    ({"scale": "HRC"}, "unknown-scale", "scale"),
    ({"scale": "hv"}, "unknown-scale", "scale"),
    ({"scale": "HV10"}, "unknown-scale", "scale"),
    ({"scale": "HBW"}, "ball-missing", "ball_mm"),
    ({"scale": "HBW", "hardness": "120", "d1_um": ""}, "ball-missing", "ball_mm"),
    ({"measured_at": "31.03.2026"}, "bad-time", "measured_at"),
    # A ball of 0.4 mm makes no indent 0.4 mm wide, and F / (pi D^2 H) >= 1/2 has no diameter.
    ({"scale": "HBW", "ball_mm": "0.4"}, "impossible-indent", "d1_um"),
    (
        {"scale": "HBW", "ball_mm": "1", "hardness": "1", "d1_um": "", "d2_um": ""},
        "impossible-indent",
        "hardness",
    ),
]  # fmt: skip


def table_of(*rows: dict[str, str]) -> str:
    lines = [",".join(GOOD)]
    lines += [",".join(f'"{cell}"' for cell in (GOOD | row).values()) for row in rows]
    return "\n".join(lines) + "\n"


@pytest.mark.parametrize(("change", "rule", "column"), FAULTS)
def test_sets_a_faulty_row_aside_and_goes_on(
    tables: Tables, coupons: Coupons, change: dict[str, str], rule: str, column: str
) -> None:
    content = table_of({}, change | {"dwell_s": "12"}, {"coupon_id": "B"})
    run = Run(tables("indents", content), coupons)
    assert run.used == [(2, 0, 1), (4, 1, 1)]
    (row,) = run.rows
    assert (row["rule"], row["column"], row["line"]) == (rule, column, 3)
    assert (row["file"], row["table"]) == ("indents-1.csv", "indents")
    assert (row["raw"] or "") == (GOOD | change)[column]
    assert row["also"] is None
    assert len(row["hint"]) > 10
    assert (row["coupon_id"] or "") == (GOOD | change)["coupon_id"].removeprefix("'")
    listed = change.get("coupon_id", "A") == "A"
    assert run.aside.per_coupon.tolist() == [int(listed), 0, 0, 0, 0]
    (source,) = run.stream.sources
    assert (source.rows_read, source.rows_used, source.rows_set_aside) == (3, 2, 1)


@pytest.mark.parametrize(
    "change",
    [
        {"scale": "HK", "d2_um": ""},
        {"hardness": "120", "d1_um": "", "d2_um": ""},
        {"hardness": "120", "d2_um": ""},
        {"scale": "", "hardness": "1e2"},
        {"scale": "HBW", "ball_mm": "2.5"},
        {"scale": "HBW", "ball_mm": "2.5", "hardness": "120", "d1_um": "", "d2_um": ""},
        {"scale": "HBW", "ball_mm": "0.4011"},
        {"coupon_id": "0012"},
        {"coupon_id": "NA"},
        {"indent_no": "0007"},
        {"operator": "NA"},
        {"edge_mm": "0"},
        {"measured_at": "2026-03-31T10:00:00+02:00"},
    ],
)
def test_uses_what_is_sound(tables: Tables, coupons: Coupons, change: dict[str, str]) -> None:
    run = Run(tables("indents", table_of(change)), coupons)
    assert len(run.used) == 1
    assert run.rows == []


def test_the_first_fault_counts_and_the_others_are_named(tables: Tables, coupons: Coupons) -> None:
    change = {"coupon_id": "X", "d1_um": "-1", "d2_um": "1,5", "measured_at": "never"}
    run = Run(tables("indents", table_of(change)), coupons)
    (row,) = run.rows
    assert row["rule"] == "unlisted-coupon"
    assert row["raw"] == "X"
    assert row["also"] == (
        "d1_um: out-of-range ('-1'); d2_um: not-a-number ('1,5'); measured_at: bad-time ('never')"
    )


def test_the_order_of_columns_does_not_matter(tables: Tables, coupons: Coupons) -> None:
    change = {"d1_um": "", "force_n": "x"}
    straight = table_of(change)
    turned = "\n".join(",".join(line.split(",")[::-1]) for line in straight.splitlines())
    (first,) = Run(tables("indents", straight), coupons).rows
    (second,) = Run(tables("indents", turned), coupons).rows
    assert first == second
    assert first["column"] == "force_n"


def test_hints_at_a_coupon_that_is_alike(tables: Tables, coupons: Coupons) -> None:
    content = table_of({"coupon_id": "12"}, {"coupon_id": "zzz"}, {"coupon_id": "a"})
    hints = [row["hint"] for row in Run(tables("indents", content), coupons).rows]
    assert "'0012'" in hints[0]
    assert "coupons.csv" in hints[1]
    assert "'A'" in hints[2]


def test_torn_rows_are_set_aside_with_their_lines(tables: Tables, coupons: Coupons) -> None:
    content = f"{HEADER}\n\nA,1,98,1\nA,2,98,1,1\n\nA,3,98,1,5,1,5\nB,1,98,1,1\n"
    run = Run(tables("indents", content), coupons)
    assert run.used == [(4, 0, 2), (7, 1, 1)]
    assert [(row["line"], row["rule"], row["column"], row["raw"]) for row in run.rows] == [
        (3, "row-width", None, "A,1,98,1"),
        (6, "row-width", None, "A,3,98,1,5,1,5"),
    ]
    assert "decimal comma" in run.rows[1]["hint"]
    assert run.stream.sources[0].rows_read == 4
    assert run.stream.sources[0].rows_set_aside == 2


def excluded(tables: Tables, coupons: Coupons, *keys: str) -> Exclusions:
    rows = [f"{key},operator-1,2026-03-31,sat on a scratch" for key in keys]
    header = "coupon_id,reading_no,excluded_by,excluded_at,reason"
    return read_exclusions(tables("exclusions", "\n".join([header, *rows])), coupons, "UTC")


def test_an_excluded_reading_carries_its_person(tables: Tables, coupons: Coupons) -> None:
    content = table_of({}, {"indent_no": "2"}, {"indent_no": "3", "d1_um": "x"}, {"coupon_id": "B"})
    run = Run(tables("indents", content), coupons, excluded(tables, coupons, "A,2", "A,3"))
    assert run.used == [(2, 0, 1), (5, 1, 1)]
    assert run.stream.unmatched() == []
    for row in run.rows:
        assert row["rule"] == "excluded"
        assert row["column"] == "indent_no"
        assert row["excluded_by"] == "operator-1"
        assert row["excluded_at"] == "2026-03-31"
        assert row["reason"] == "sat on a scratch"
    assert [row["also"] for row in run.rows] == [None, "d1_um: not-a-number ('x')"]


def test_an_exclusion_without_a_reading_is_told(tables: Tables, coupons: Coupons) -> None:
    run = Run(tables("indents", table_of({})), coupons, excluded(tables, coupons, "A,1", "B,1"))
    (cause,) = run.stream.unmatched()
    assert "'B'" in cause.what
    assert run.used == []


def test_a_second_pass_gives_the_same(tables: Tables, coupons: Coupons) -> None:
    content = table_of(*({"indent_no": str(number), "d1_um": "x" * (number % 3 == 0) or "9"}
                         for number in range(50)))  # fmt: skip
    run = Run(tables("indents", content), coupons, excluded(tables, coupons, "A,7"))
    first, table, sources = run.used, run.aside.table(), run.stream.sources
    run.aside.restart()
    run.blocks = list(run.stream)
    assert run.used == first
    assert run.aside.table().equals(table)
    assert run.stream.sources == sources
    assert run.stream.unmatched() == []


def test_a_file_that_changed_between_two_passes_is_refused(
    tables: Tables, coupons: Coupons
) -> None:
    files = tables("indents", table_of({}))
    run = Run(files, coupons)
    files.paths[0].write_text(table_of({}, {"indent_no": "2"}))
    with pytest.raises(BatchRefused, match="changed between two passes"):
        list(run.stream)


def test_rows_set_aside_later_count_as_set_aside(tables: Tables, coupons: Coupons) -> None:
    run = Run(tables("indents", table_of({}, {})), coupons)
    run.aside.add(
        REPEATED_READING, table="indents", file="indents-1.csv", lines=[3], column="indent_no",
        raw="1", coupon=[0], coupon_ids="A", reading_no=[1],
    )  # fmt: skip
    (source,) = run.stream.sources
    assert (source.rows_read, source.rows_used, source.rows_set_aside) == (2, 1, 1)


def test_all_files_are_read_before_the_batch_is_refused(tables: Tables, coupons: Coupons) -> None:
    files = tables(
        "indents", table_of({}), b"coupon_id,indent_no\n", table_of({}).encode() + b"\xff\n",
        f'{HEADER}\nA,1,"1\n',
    )  # fmt: skip
    with pytest.raises(BatchRefused) as refused:
        Run(files, coupons)
    wheres = [cause.where for cause in refused.value.causes]
    assert wheres == [
        "indents-2.csv, line 1",
        "indents-2.csv, line 1",
        "indents-3.csv",
        "indents-4.csv, line 2",
    ]


def test_scattered_coupons_over_several_files(tables: Tables, coupons: Coupons) -> None:
    first = f"{HEADER}\nNA,1,1,1,1\nA,1,1,1,1\nNA,2,1,1,1\n"
    second = "d2_um,d1_um,force_n,operator,indent_no,coupon_id\n1,1,1,o,2,A\n1,1,1,o,1,0012\n"
    run = Run(tables("indents", first, second), coupons)
    assert run.used == [(2, 3, 1), (3, 0, 1), (4, 3, 2), (2, 0, 2), (3, 2, 1)]
    assert [block.file for block in run.blocks if len(block.lines)][-1] == 1
    assert "operator" not in run.blocks[0].texts
    assert [source.rows_read for source in run.stream.sources] == [3, 2]


def test_a_table_without_rows(tables: Tables, coupons: Coupons) -> None:
    run = Run(tables("indents", HEADER + "\n\n"), coupons)
    assert run.used == []
    assert run.stream.sources[0].rows_read == 0


@pytest.mark.parametrize(
    ("row", "rule"),
    [
        ("A,1,0.002,", "required-empty"),
        ("A,1,,200", "required-empty"),
        ("A,1,-0.1,200", "out-of-range"),
        ("A,1,0.002,0", "out-of-range"),
        ("A,,0.002,200", "required-empty"),
        ("A,1,0.2 %,200", "not-a-number"),
        ("Z,1,0.002,200", "unlisted-coupon"),
        ("A,1,0.002", "row-width"),
        ("B,2,0.002,200", "excluded"),
    ],
)
def test_flow_stresses(tables: Tables, coupons: Coupons, row: str, rule: str) -> None:
    content = f"{FLOW}\nB,1,0,200.5\n{row}\nB,3,0.01,220\n"
    run = Run(tables("flow_stress", content), coupons, excluded(tables, coupons, "B,2"))
    assert run.used == [(2, 1, 1), (4, 1, 3)]
    assert run.floats("plastic_strain") == [0.0, 0.01]
    assert run.floats("flow_stress_mpa") == [200.5, 220.0]
    assert "scale" not in run.blocks[0].texts
    (aside,) = run.rows
    assert (aside["rule"], aside["table"]) == (rule, "flow_stress")
