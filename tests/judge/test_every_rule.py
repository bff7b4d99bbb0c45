"""Every rule, wherever it fires: a case that fires and one just on the other side."""

from collections.abc import Callable, Mapping
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import Any, Final

import numpy as np
import pyarrow as pa
import pytest

from coldwork.inputs.calibration import Calibration, Parameter
from coldwork.inputs.method import DayCheck, Laws, Method
from coldwork.inputs.method import Tester as Machine  # a name that pytest does not collect
from coldwork.inputs.quantity import Input
from coldwork.intake.closing import ClosingLine, Tally
from coldwork.intake.coupons import BadCell, Coupons
from coldwork.intake.files import SourceFile
from coldwork.intake.lookup import Lookup
from coldwork.intake.printed import Printed
from coldwork.judge.batch_rules import judge_inputs
from coldwork.judge.calibrations import judge_ranges
from coldwork.judge.coupon_rules import State, judge_coupon_cells, judge_coupons, judge_scales
from coldwork.judge.printed import judge_printed
from coldwork.judge.prior import judge_prior
from coldwork.judge.size_effects import judge_size_effects
from coldwork.judge.temperatures import judge_temperatures
from coldwork.reduce.flow import reduce_flow
from coldwork.reduce.indents import reduce_indents
from coldwork.reduce.marks import Marks
from coldwork.reduce.readings import Readings
from coldwork.reduce.reduced import Reduced
from coldwork.rules import RULES
from coldwork.rules import batch as batch_rules
from coldwork.rules import coupon as coupon_rules
from coldwork.rules import reading as reading_rules
from coldwork.rules.curve import CURVE_RULES
from coldwork.rules.findings import Findings
from coldwork.rules.forces import HBW, HK, HV
from coldwork.rules.rule import Rule
from coldwork.scatter import repeatability

NAN: Final = np.nan
ABSENT: Final = np.iinfo(np.int64).min
DAY: Final = 86_400_000_000  # us
Fires = Callable[[], Findings]


def state(**changes: float | str | bool) -> State:
    """One sound coupon of rolled copper, with what the case changes. SI."""
    usual: dict[str, float | str | bool] = {
        "route": "indent",
        "routes_error": NAN,
        "unwinding": True,
        "saturation_stress": 320e6,
        "readings_used": 7,
        "repeatability": 5e6,
        "scale": HV,
        "thickness": 2e-3,
        "mean_diagonal": 4e-4,
        "ball": NAN,
        "stress": 200e6,
        "u_stress": 10e6,
        "upper_stress_end": 220e6,
        "unwound": True,
        "indented_stress": 250e6,
        "density": 4e14,
        "radius_ratio": 100.0,
        "stored_fraction": 0.05,
    }
    assert set(changes) <= set(usual)
    types = {"readings_used": np.int64, "scale": np.int8, "unwound": np.bool_}
    whole = {"route", "unwinding", "saturation_stress"}
    fields: dict[str, Any] = {
        name: x if name in whole else np.array([x], dtype=types.get(name, np.float64))
        for name, x in (usual | changes).items()
    }
    return State(coupon=np.array([0]), **fields)


def judged(**changes: float | str | bool) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        judge_coupons(findings, state(**changes))
        return findings

    return run


def an_input(name: str, value: float, u: float = 0.0, shape: str = "normal") -> Input:
    return Input(name, value, u, "1", shape, 1.2 if shape == "lognormal" else None)


def method(
    inputs: tuple[Input, ...] = (), testers: tuple[Machine, ...] = (), **laws: str | bool
) -> Method:
    usual: dict[str, Any] = {
        "route": "indent",
        "area": {"HV": "contact", "HBW": "projected", "HK": "projected"},
        "unwinding": False,
        "baseline": "given",
        "taylor": "constant",
        "elasticity": "isotropic",
        "outer_radius": "spacing",
        "angles_deg": (0.0, 90.0),
        "fractions": (0.5, 0.5),
        "uniform_mix": False,
    }
    return Method(
        folder=Path(),
        batch_id="B",
        laboratory=None,
        operator=None,
        timezone="UTC",
        material="copper",
        lattice="fcc",
        edge_distance_d=2.5,
        centre_distance_d=3.0,
        coupons=(),
        indents=(),
        flow_stress=(),
        exclusions=(),
        laws=Laws(**(usual | laws)),
        inputs={x.name: x for x in inputs},
        testers=testers,
        limits=(),
        plastic_strain=0.002,
        repeatability_rel=None,
        resolution=None,
        repeatability="pooled",
        coverage=0.95,
        test_temperature=296.15,
        reference_temperature=296.15,
        tables=("csv",),
        detail="full",
        sheets=(),
        document={},
    )


def coupons(grain_um: float, *cells: tuple[str, str]) -> Coupons:
    ids, none = pa.array(["A"]), np.array([NAN])
    return Coupons(
        ids=ids,
        lot_ids=pa.array([""]),
        conditions=pa.array([""]),
        sampled_at=pa.array([""]),
        prior_true_strain=none,
        prior_plastic_work=none,
        thickness=none,
        grain_size=np.array([grain_um * 1e-6]),
        u_grain_size=none,
        file=np.zeros(1, dtype=np.int32),
        line=np.array([7]),
        raw=pa.table({"coupon_id": ids}),
        bad_cells=tuple(BadCell(0, c, raw, "not-a-number", "write a number") for c, raw in cells),
        sources=(SourceFile("coupons.csv", "coupons", "", 0, 1, 1, 0),),
        lookup=Lookup(ids),
    )


HALL_PETCH: Final = an_input("strength.hall_petch_mpa_m05", 0.11e6)


def cells(batch: Method, listed: Coupons) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        judge_coupon_cells(findings, batch, listed)
        return findings

    return run


def scales(batch: Method, scale: int) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        judge_scales(findings, batch, np.array([scale], dtype=np.int8))
        return findings

    return run


def calibrated(key: str, quantity: str, value: float, scale: int = HV) -> Fires:
    """One coupon of that value, and a calibration from 100 to 200 of it."""
    constants = (Parameter(key, 1.0, 0.1, "1"),)
    one = np.array([[0.01]])
    names = ("c", "hardness", "c.toml", "0", "pairs.csv", "0")
    found = Calibration(*names, constants, one, np.inf, quantity, 100.0, 200.0)

    def run() -> Findings:
        findings = Findings(1)
        values = {quantity: np.array([value])}
        judge_ranges(findings, [found], np.array([0]), values, np.array([scale], dtype=np.int8))
        return findings

    return run


def inputs(*given: Input) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        judge_inputs(findings, method(given))
        return findings

    return run


def readings(columns: Mapping[str, list[float]], **texts: list[str]) -> Readings:
    """Readings of one coupon, by column and in the column's unit."""
    n = len(next(iter(columns.values())))
    days = columns.get("day", [NAN] * n)
    return Readings(
        coupon=np.zeros(n, dtype=np.int32),
        number=np.arange(1, n + 1),
        file=np.zeros(n, dtype=np.int64),
        lines=np.arange(2, n + 2),
        floats={name: np.array(x) for name, x in columns.items() if name != "day"},
        texts={name: pa.array(x, pa.string()) for name, x in texts.items()},
        times=np.array([ABSENT if np.isnan(d) else int(d * DAY) for d in days]),
        raw=pa.table({"row": list(range(n))}),
    )


def indents(batch: Method | None = None, tester: str = "", **changes: float | list[float]) -> Fires:
    """Sound HV10 indents of one coupon, three or as many as the case lists, with its changes."""

    def run() -> Findings:
        n = max([len(x) for x in changes.values() if isinstance(x, list)], default=3)
        usual: dict[str, float | list[float]] = {
            "force_n": 98.07,
            "d1_um": 400.0,
            "d2_um": 400.0,
            "x_mm": [2.0 * i for i in range(n)],
            "y_mm": 0.0,
            "edge_mm": 2.0,
            "dwell_s": 12.0,
            "temperature_c": 23.0,
        }
        columns = {
            name: x if isinstance(x, list) else [x] * n for name, x in (usual | changes).items()
        }
        held = method() if batch is None else batch
        texts = {"tester": [tester] * n} if held.testers else {}
        findings = Findings(1)
        stretch = readings(columns, **texts)
        reduced = Reduced.empty(1, tuple(t.id for t in held.testers))
        reduce_indents(stretch, held, reduced, Marks(stretch, findings, ["indents.csv"]))
        return findings

    return run


def printed(mean: str) -> Fires:
    """A mean of 600.0 and 600.1, printed to a hundredth: rounding lets 0.055 pass."""

    def run() -> Findings:
        findings, tally = Findings(1), Tally()
        tally.add("d1_um", np.array([600.0, 600.1]), ["600.0", "600.1"])
        line = ClosingLine(9, "mean", ("mean",), {"d1_um": mean}, {"d1_um": mean})
        found = [Printed(0, 0, each) for each in tally.disagreements(line)]
        judge_printed(findings, found, ["bench.txt"])
        return findings

    return run


def two_scales() -> Findings:
    findings = Findings(1)
    columns = {"force_n": [98.07, 98.07], "hardness": [100.0, 100.0]}
    stretch = readings(columns, scale=["HV", "HK"])
    marks = Marks(stretch, findings, ["indents.csv"])
    reduce_indents(stretch, method(), Reduced.empty(1, ()), marks)
    return findings


def flow(*strains: float) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        columns = {"plastic_strain": list(strains), "flow_stress_mpa": [230.0] * len(strains)}
        stretch = readings(columns)
        marks = Marks(stretch, findings, ["flow_stress.csv"])
        reduce_flow(stretch, method(route="flow"), Reduced.empty(1, ()), marks)
        return findings

    return run


def scattering(noisy_sd: float) -> Fires:
    """Ten coupons of five readings; what `repeatability` lets go is what is flagged."""

    def run() -> Findings:
        reduced = Reduced.empty(10, ())
        reduced.used[:] = reduced.repeats[:] = 5
        reduced.effective[:] = 5.0
        reduced.mean[:] = 1e9
        reduced.sd[:] = 1e7
        reduced.sd[0] = noisy_sd
        reduced.scale[:] = HV
        reduced.force[:] = 98.0665
        left = repeatability(method(), reduced, pa.array(["rolled"] * 10)).left
        findings = Findings(10)
        findings.add(coupon_rules.SCATTER, np.flatnonzero(left))
        return findings

    return run


def warm(kelvin: float) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        judge_temperatures(findings, WARM, np.array([0]), np.array([kelvin]))
        return findings

    return run


def sized(effect: str, line: int, bulk: float) -> Fires:
    def run() -> Findings:
        findings = Findings(1)
        laws = method(size_effect=effect).laws
        numbers = np.array([1e9]), np.array([bulk])
        judge_size_effects(
            findings, laws, np.array([0]), np.array([HV], np.int8), np.array([line]), numbers
        )
        return findings

    return run


def worked(strain: float, work: float, *, impossible: bool = False) -> Fires:
    """A coupon whose dimensions say 0.3 and whose curve says 60 MJ/m3."""

    def run() -> Findings:
        findings = Findings(1)
        stated, found = np.array([[strain], [work]]), np.array([[0.3], [6e7]])
        pairs = (stated[0], stated[1]), (found[0], found[1])
        judge_prior(findings, coupons(20.0), *pairs, np.array([impossible]))
        return findings

    return run


DUE: Final = date(1970, 1, 11)  # the last day covered is day 10 of the epoch
T1: Final = Machine("T1", an_input("tester:T1", 0.0), DUE)
CHECKED: Final = Machine(  # checked on days 4 and 8 of the epoch, the second time out of limits
    "T2",
    an_input("tester:T2", 0.0),
    None,
    checked=True,
    checks=(DayCheck(date(1970, 1, 5), within=True), DayCheck(date(1970, 1, 9), within=False)),
)
C: Final = coupon_rules
R: Final = reading_rules
B: Final = batch_rules
PARTS: Final = method((HALL_PETCH,), baseline="parts")
RADIUS: Final = method(outer_radius="grain")
MELTING: Final = an_input("material.melting_point_k", 1358.0)
SLOPE: Final = an_input("material.shear_modulus_slope", -0.54)
WARM: Final = method((MELTING, SLOPE), temperature="modulus")
WITH_C: Final = method((an_input("indentation.HK.constraint_factor", 3.0),))

# Rule, a case that fires, a case just on the other side that does not. Limits: the issue of the
# laboratory's rules and the standards named in `rules`.
CASES: Final[list[tuple[Rule, Fires, Fires]]] = [
    (C.NO_READINGS, judged(readings_used=0), judged(readings_used=1)),
    (C.MIXED_SCALES, two_scales, indents()),
    (C.MIXED_FORCES, indents(force_n=[98.07, 98.07, 49.03]), indents(force_n=[98.07, 98.0, 98.1])),
    (C.PRIOR_DIMENSIONS, worked(NAN, NAN, impossible=True), worked(NAN, NAN)),
    (C.PRIOR_STRAIN_DIFFERS, worked(0.316, 6e7), worked(0.314, 6e7)),
    (C.PRIOR_WORK_DIFFERS, worked(0.3, 7.3e7), worked(0.3, 7.1e7)),
    (C.SIZE_EFFECT_UNFITTED, sized("fitted", -1, NAN), sized("fitted", 0, 0.9e9)),
    (C.SIZE_EFFECT_TOO_LARGE, sized("strength", -1, NAN), sized("strength", -1, 1e5)),
    (C.SCALE_WITHOUT_CONSTANTS, scales(method(), HK), scales(WITH_C, HK)),
    (
        C.MIXED_TEMPERATURES,
        indents(WARM, temperature_c=[20.0, 23.0, 25.1]),
        indents(WARM, temperature_c=[20.0, 23.0, 25.0]),
    ),
    (C.NO_SHEAR_MODULUS, warm(1358.1), warm(1357.9)),
    (C.TEMPERATURE_FAR, warm(76.9), warm(77.1)),
    (C.NO_FLOW_STRESS_AT_STRAIN, flow(0.003, 0.004), flow(0.001, 0.004)),
    (C.ROUTES_DISAGREE, judged(routes_error=1.01), judged(routes_error=1.0)),
    (
        C.BAD_COUPON_CELL_NEEDED,
        cells(PARTS, coupons(NAN, ("grain_size_um", "25,0"))),
        cells(PARTS, coupons(25.0)),
    ),
    (
        C.BAD_COUPON_CELL_NEEDED_RADIUS,
        cells(RADIUS, coupons(25.0, ("u_grain_size_um", "2,0"))),
        cells(RADIUS, coupons(25.0, ("thickness_mm", "2 mm"))),
    ),
    (C.GRAIN_SIZE_MISSING, cells(PARTS, coupons(NAN)), cells(PARTS, coupons(25.0))),
    (C.GRAIN_SIZE_MISSING_RADIUS, cells(RADIUS, coupons(NAN)), cells(method(), coupons(NAN))),
    (C.DENSITY_IMPOSSIBLE, judged(density=1.01e17), judged(density=1e17)),
    (C.STRESS_PAST_BRANCH, judged(stress=9e9, density=NAN), judged(stress=9e9, density=2e16)),
    (C.DENSITY_TOO_LOW, judged(density=0.99e10), judged(density=1e10)),
    (C.NO_LINE_ENERGY, judged(radius_ratio=1.0), judged(radius_ratio=1.01)),
    (C.STORED_FRACTION_IMPOSSIBLE, judged(stored_fraction=1.01), judged(stored_fraction=1.0)),
    (R.UNEQUAL_DIAGONALS, indents(d2_um=[421.0, 400.0, 400.0]), indents(d2_um=419.0)),
    (R.EDGE_DISTANCE, indents(edge_mm=0.99), indents(edge_mm=1.01)),
    (R.CENTRE_DISTANCE, indents(x_mm=[0.0, 1.1, 4.0]), indents(x_mm=[0.0, 1.3, 4.0])),
    (
        R.SMALL_DIAGONAL,
        indents(force_n=0.2452, d1_um=19.0, d2_um=19.0),
        indents(force_n=0.2452, d1_um=20.0, d2_um=20.0),
    ),
    (R.FORCE_NOT_NOMINAL, indents(force_n=99.2), indents(force_n=98.9)),
    (R.TEST_TEMPERATURE, indents(temperature_c=36.0), indents(temperature_c=35.0)),
    (
        # Grubbs, two-sided 1 %, n = 5: 1.764. One far reading among equals lies
        # (n - 1) / sqrt(n) = 1.789 away; beside evenly spaced ones it does not.
        R.OUTLYING_READING,
        indents(d1_um=[400.0, 400.0, 400.0, 400.0, 410.0]),
        indents(d1_um=[400.0, 402.0, 404.0, 406.0, 410.0]),
    ),
    (R.HARDNESS_CONTRADICTS_DIAGONALS, indents(hardness=117.0), indents(hardness=116.0)),
    (C.FEW_READINGS, judged(readings_used=2), judged(readings_used=3)),
    (C.THIN_COUPON, judged(thickness=0.59e-3), judged(thickness=0.6e-3)),
    (C.SCATTER, scattering(4e7), scattering(1.2e7)),
    (C.NO_REPEATABILITY, judged(repeatability=NAN), judged()),
    (C.BELOW_BASELINE, judged(stress=0.0), judged(stress=1.0)),
    (
        C.BASELINE_CONTRADICTED,
        judged(stress=-9e6, upper_stress_end=0.0),
        judged(stress=-9e6, upper_stress_end=1.0),
    ),
    (C.WEAK_SIGNAL, judged(u_stress=50e6), judged(u_stress=49e6)),
    (
        C.ABOVE_SATURATION,
        judged(indented_stress=320e6, unwound=False),
        judged(indented_stress=319e6),
    ),
    (C.FEW_CORE_RADII, judged(radius_ratio=4.9), judged(radius_ratio=5.0)),
    (
        C.OUTSIDE_CALIBRATION,
        calibrated("strength.baseline_mpa", "flow_stress_mpa", 200.1),
        calibrated("strength.baseline_mpa", "flow_stress_mpa", 200.0),
    ),
    (
        C.BAD_COUPON_CELL,
        cells(method(), coupons(25.0, ("thickness_mm", "2 mm"))),
        cells(method(), coupons(25.0)),
    ),
    (
        B.TESTER_OUT_OF_DATE,
        indents(method(testers=(T1,)), "T1", day=11.0),
        indents(method(testers=(T1,)), "T1", day=10.9),
    ),
    (
        B.TESTER_CHECK_MISSING,
        indents(method(testers=(CHECKED,)), "T2", day=5.5),
        indents(method(testers=(CHECKED,)), "T2", day=4.5),
    ),
    (
        B.TESTER_CHECK_TOO_OLD,
        indents(method(testers=(CHECKED,)), "T2", day=16.5),
        indents(method(testers=(CHECKED,)), "T2", day=15.5),
    ),
    (
        B.TESTER_CHECK_OUT_OF_LIMITS,
        indents(method(testers=(CHECKED,)), "T2", day=8.5),
        indents(method(testers=(CHECKED,)), "T2", day=4.5),
    ),
    (
        B.TESTER_UNKNOWN,
        indents(method(testers=(T1,)), "T2"),
        indents(method(testers=(T1,)), "T1"),
    ),
    (
        B.SKEWED_INPUT,
        inputs(an_input("material.shear_modulus_gpa", 44e9, 4.5e9)),
        inputs(an_input("material.shear_modulus_gpa", 44e9, 4.4e9)),
    ),
    (B.PRINTED_MEAN_DIFFERS, printed("600.11"), printed("600.10")),
    (R.DWELL_TIME, indents(dwell_s=16.0), indents(dwell_s=15.0)),
    (C.UNDER_FIVE_READINGS, judged(readings_used=4), judged(readings_used=5)),
    (C.INDENT_ADDS_STRAIN, judged(unwinding=False, unwound=False), judged()),
    (C.DENSITY_UNUSUAL, judged(density=2.1e16), judged(density=2e16)),
    (C.STORED_FRACTION_UNUSUAL, judged(stored_fraction=0.0019), judged(stored_fraction=0.002)),
]


@pytest.mark.parametrize(("rule", "fires", "passes"), CASES, ids=[c[0].id for c in CASES])
def test_it_fires_and_just_does_not(rule: Rule, fires: Fires, passes: Fires) -> None:
    assert fires().counts.get(rule.id, 0) > 0
    assert rule.id not in passes().counts


def test_every_rule_is_covered() -> None:
    # those on curves fire in reduce.tensile, by what the reduction of a curve found
    here = [rule.id for rule in RULES if rule not in CURVE_RULES]
    assert sorted(case[0].id for case in CASES) == sorted(here)


def test_sound_coupons_indents_and_cells_have_no_findings() -> None:
    assert judged()().counts == {}
    assert indents()().counts == {}
    assert cells(method(), coupons(25.0))().counts == {}
    assert inputs(an_input("material.shear_modulus_gpa", 44e9, 1e9))().counts == {}


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        # without a reading nothing else is worth saying
        (
            dict.fromkeys(
                (
                    *("repeatability", "mean_diagonal", "stress", "u_stress", "density"),
                    *("upper_stress_end", "indented_stress", "radius_ratio", "stored_fraction"),
                ),
                NAN,
            )
            | {"readings_used": 0, "scale": -1},
            {"no-readings"},
        ),
        ({"readings_used": 1}, {"few-readings"}),  # and not under-five-readings as well
        # points of a flow curve are no repeats
        ({"route": "flow", "readings_used": 1, "unwinding": False, "unwound": False}, set()),
        # below the baseline the signal is not called weak as well
        ({"stress": -5e6, "u_stress": 10e6, "density": NAN}, {"below-baseline"}),
        (
            {"stress": -5e7, "upper_stress_end": -1e7, "density": NAN},
            {"below-baseline", "baseline-contradicted"},
        ),
        ({"density": 1e18}, {"density-impossible"}),
        ({"density": 1e9}, {"density-too-low"}),
        ({"density": 1e11}, {"density-unusual"}),
        ({"radius_ratio": 0.5}, {"no-line-energy"}),
        ({"stored_fraction": 2.0}, {"stored-fraction-impossible"}),
        ({"stored_fraction": 0.16}, {"stored-fraction-unusual"}),
        ({"thickness": NAN}, set()),
        # HBW: eight depths of the cap. d = 0.4 mm with a 1 mm ball: 8 h = 0.334 mm, so 0.35 mm
        # are enough where 1.5 d = 0.6 mm would not be
        ({"scale": HBW, "ball": 1e-3, "thickness": 0.35e-3}, set()),
        ({"scale": HBW, "ball": 1e-3, "thickness": 0.33e-3}, {"thin-coupon"}),
        ({"scale": HK, "thickness": 0.14e-3}, set()),
        ({"scale": HK, "thickness": 0.13e-3}, {"thin-coupon"}),
    ],
)
def test_what_goes_with_what(changes: Mapping[str, float | str | bool], expected: set[str]) -> None:
    assert set(judged(**changes)().counts) == expected


def test_values_are_told_in_the_unit_of_the_rule() -> None:
    findings = judged(stress=-5e6, density=NAN, thickness=0.5e-3, u_stress=1e6)()
    table = findings.table(pa.array(["A"]), pa.array([""])).to_pylist()
    told = {row["rule"]: (row["value"], row["limit"], row["unit"]) for row in table}
    assert told["below-baseline"] == (-5.0, 0.0, "MPa")
    assert told["thin-coupon"] == (pytest.approx(1.25), 1.5, "1")


def test_findings_of_a_slice_reach_the_right_coupons() -> None:
    one = state(density=1e18)
    findings = Findings(5)
    judge_coupons(findings, replace(one, coupon=np.array([3])))
    assert findings.has(coupon_rules.DENSITY_IMPOSSIBLE).tolist() == [False] * 3 + [True, False]


def test_far_temperatures_are_told_with_the_end_that_was_passed() -> None:
    told = {}
    for kelvin in (4.0, 1000.0, 1400.0, 296.0):
        table = warm(kelvin)().table(pa.array(["A"]), pa.array([""]))
        told[kelvin] = [(row["rule"], row["limit"]) for row in table.to_pylist()]
    assert told[4.0] == [("temperature-far", -196.15)]
    assert told[1000.0] == [("temperature-far", pytest.approx(1358.0 * 2 / 3 - 273.15))]
    assert told[1400.0] == [("no-shear-modulus", pytest.approx(1358.0 - 273.15))]
    assert told[296.0] == []


def test_brought_to_the_reference_a_warm_test_is_nothing_unusual() -> None:
    assert indents(WARM, temperature_c=200.0)().counts == {}
    assert set(indents(temperature_c=200.0)().counts) == {"test-temperature"}


def test_a_bad_cell_is_told_with_its_place() -> None:
    findings = cells(method(), coupons(25.0, ("thickness_mm", "2 mm")))()
    row = findings.table(pa.array(["A"]), pa.array([""])).to_pylist()[0]
    assert (row["file"], row["line"]) == ("coupons.csv", 7)
    assert row["detail"] == "thickness_mm holds '2 mm': write a number"


def test_a_bad_grain_size_is_not_missing_as_well() -> None:
    findings = cells(PARTS, coupons(NAN, ("grain_size_um", "25,0")))()
    assert set(findings.counts) == {"bad-coupon-cell-needed"}


def test_a_grain_size_that_baseline_and_radius_need_empties_from_the_baseline_on() -> None:
    both = method((HALL_PETCH,), baseline="parts", outer_radius="grain")
    assert set(cells(both, coupons(NAN))().counts) == {"grain-size-missing"}


def test_a_scale_that_is_unwound_needs_a_strain_too() -> None:
    factor = an_input("indentation.HK.constraint_factor", 3.0)
    strain = an_input("indentation.HK.representative_strain", 0.08)
    missing = coupon_rules.SCALE_WITHOUT_CONSTANTS.id
    assert missing in scales(method((factor,), unwinding=True), HK)().counts
    assert missing not in scales(method((factor, strain), unwinding=True), HK)().counts
    assert missing not in scales(method(route="flow"), -1)().counts


@pytest.mark.parametrize(
    ("given", "fires"),
    [
        (an_input("hardening.coefficient", 0.3, 0.06), True),
        (an_input("hardening.coefficient", 0.3, 0.06, "uniform"), True),
        (an_input("hardening.coefficient", 0.3, 0.06, "lognormal"), False),
        (an_input("line_energy.core_radius_b", 1.0, 0.2), True),
        (an_input("line_energy.core_energy", 0.1, 0.1), False),  # may be below zero
        (an_input("strength.baseline_mpa", 50e6, 15e6), False),  # enters before the stress
        (an_input("indentation.constraint_factor", 3.0, 0.6), False),
        (an_input("material.shear_modulus_gpa", 44e9), False),
    ],
)
def test_only_positive_inputs_after_the_stress_are_skewed(given: Input, fires: bool) -> None:
    found = inputs(given)()
    assert found.counts.get("skewed-input", 0) == fires
    if fires:
        row = found.table(pa.array(["A"]), pa.array([""])).to_pylist()[0]
        assert given.name in row["detail"]
        assert row["coupon_id"] is None
        assert row["value"] == pytest.approx(0.2)


def test_a_calibration_of_one_scale_looks_at_its_scale_alone() -> None:
    key = "indentation.HK.constraint_factor"
    assert C.OUTSIDE_CALIBRATION.id in calibrated(key, "hardness", 99.0, HK)().counts
    assert C.OUTSIDE_CALIBRATION.id not in calibrated(key, "hardness", 99.0, HV)().counts
