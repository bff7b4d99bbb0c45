"""Testers: each reading without its tester's bias, its share of the mean, its calibration."""

from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, date, datetime
from math import radians, sin
from pathlib import Path
from typing import Final

import pytest
from numpy.testing import assert_allclose

from coldwork.inputs.method import Method
from coldwork.inputs.method import Tester as Machine  # a name that pytest does not collect
from coldwork.inputs.quantity import Input
from coldwork.inputs.sheet import read_method
from coldwork.reduce.flow import reduce_flow
from coldwork.reduce.indents import reduce_indents
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import Reduced
from coldwork.rules.batch import TESTER_OUT_OF_DATE, TESTER_UNKNOWN
from coldwork.rules.findings import Findings

Stretch = Callable[..., Readings]
SAMPLES: Final = Path(__file__).parents[2] / "sample_data"
PASCAL: Final = 9.80665e6  # of one unit of hardness


def machine(name: str, bias: float, u: float = 0.005, until: date | None = None) -> Machine:
    return Machine(name, Input(f"tester:{name}", bias, u, "1"), until)


def with_testers(batch: str, *testers: Machine) -> Method:
    return replace(read_method(SAMPLES / batch), testers=testers)


def test_each_reading_is_divided_by_one_plus_its_testers_bias(stretch: Stretch) -> None:
    method = with_testers("copper-strip", machine("T1", 0.02), machine("T2", -0.01))
    readings = stretch(
        [0, 0, 0],
        {"force_n": [98.07] * 3, "hardness": [102.0, 99.0, 100.0]},
        texts={"scale": ["HV"] * 3, "tester": ["T1", "T2", "elsewhere"]},
    )
    table, findings = Reduced.empty(1, ("T1", "T2")), Findings(1)
    results = reduce_indents(readings, method, table, Marks(readings, findings, ("f",)))
    assert_allclose(results.strength / PASCAL, [100.0, 100.0, 100.0], rtol=1e-14)
    assert_allclose(table.mean / PASCAL, 100.0, rtol=1e-14)
    assert_allclose(table.sd, 0.0, atol=1e-6)
    # a reading of a tester that the sheet does not list is neither corrected nor counted
    assert_allclose(table.shares["T1"], 1 / 3)
    assert_allclose(table.shares["T2"], 1 / 3)
    assert findings.has(TESTER_UNKNOWN).tolist() == [True]


def test_bias_acts_on_the_hardness_not_on_the_diagonal(stretch: Stretch) -> None:
    # ISO 6507-1: HV = 2 sin 68 deg F / d^2, over 9.80665; then 2 % too high
    method = with_testers("copper-strip", machine("T1", 0.02))
    readings = stretch(
        [0],
        {"force_n": [98.07], "d1_um": [440.0], "d2_um": [444.0]},
        texts={"scale": ["HV"], "tester": ["T1"]},
    )
    table = Reduced.empty(1, ("T1",))
    reduce_indents(readings, method, table, Marks(readings, Findings(1), ("f",)))
    hv = 2.0 * sin(radians(68.0)) * 98.07 / 442e-6**2 / PASCAL
    assert_allclose(table.mean / PASCAL, hv / 1.02, rtol=1e-14)
    assert_allclose(table.mean_diagonal, 442e-6, rtol=1e-14)


def test_shares_go_with_what_each_tester_read(stretch: Stretch) -> None:
    # d mean / d bias_t = -(sum of t's corrected readings / n) / (1 + bias_t): shares by value
    method = with_testers("copper-strip", machine("T1", 0.0), machine("T2", 0.0))
    readings = stretch(
        [0, 0, 0, 1],
        {"force_n": [98.07] * 4, "hardness": [90.0, 100.0, 110.0, 80.0]},
        texts={"scale": ["HV"] * 4, "tester": ["T1", "T2", "T2", "T2"]},
    )
    table = Reduced.empty(3, ("T1", "T2"))
    reduce_indents(readings, method, table, Marks(readings, Findings(3), ("f",)))
    assert_allclose(table.shares["T1"], [90 / 300, 0.0, 0.0])
    assert_allclose(table.shares["T2"], [210 / 300, 1.0, 0.0])


def test_a_load_cell_is_weighted_as_its_points_are(stretch: Stretch) -> None:
    # interpolated 0.75 to 0.25: d stress / d bias = -0.25 x 340 / 1.01 for the second cell
    method = with_testers("steel-wire", machine("P1", 0.0), machine("P2", 0.01))
    readings = stretch(
        [0, 0],
        {"plastic_strain": [0.001, 0.005], "flow_stress_mpa": [300.0, 343.4]},
        texts={"tester": ["P1", "P2"]},
    )
    table = Reduced.empty(1, ("P1", "P2"))
    reduce_flow(readings, method, table, Marks(readings, Findings(1), ("f",)))
    assert_allclose(table.mean, 310e6, rtol=1e-14)
    assert_allclose(table.shares["P1"], 225 / 310)
    assert_allclose(table.shares["P2"], 85 / 310)


def us(*when: int) -> int:
    year, month, day, *clock = when
    hour, minute, second = (*clock, 0, 0, 0)[:3]
    return round(datetime(year, month, day, hour, minute, second, tzinfo=UTC).timestamp() * 1e6)


@pytest.mark.parametrize(
    ("zone", "moment", "late"),
    [
        ("UTC", us(2026, 7, 31, 23, 59, 59), False),  # the last day still counts
        ("UTC", us(2026, 8, 1), True),
        ("Europe/Berlin", us(2026, 7, 31, 21, 59, 59), False),  # before midnight there
        ("Europe/Berlin", us(2026, 7, 31, 22), True),
        ("America/Denver", us(2026, 8, 1, 5, 59), False),
    ],
)
def test_a_calibration_holds_to_the_end_of_its_last_day(
    stretch: Stretch, zone: str, moment: int, late: bool
) -> None:
    method = with_testers("copper-strip", machine("T1", 0.0, until=date(2026, 7, 31)))
    method = replace(method, timezone=zone)
    readings = stretch(
        [0, 0],
        {"force_n": [98.07] * 2, "hardness": [90.0, 91.0]},
        texts={"scale": ["HV"] * 2, "tester": ["T1"] * 2},
        times=[moment, -(2**63)],  # the second does not say when
    )
    findings = Findings(1)
    marks = Marks(readings, findings, ("f",))
    reduce_indents(readings, method, Reduced.empty(1, ("T1",)), marks)
    assert findings.has(TESTER_OUT_OF_DATE).tolist() == [late]
    assert marks.bits.any(axis=1).tolist() == [late, False]


def test_without_a_list_of_testers_nothing_is_said(stretch: Stretch) -> None:
    method = with_testers("copper-strip")
    readings = stretch(
        [0],
        {"force_n": [98.07], "hardness": [90.0]},
        texts={"scale": ["HV"], "tester": ["T9"]},
    )
    findings, table = Findings(1), Reduced.empty(1, ())
    reduce_indents(readings, method, table, Marks(readings, findings, ("f",)))
    assert not findings.bits.any()
    assert_allclose(table.mean / PASCAL, 90.0)
