"""The shell around the reduction of curves: rules for what is found, and what is kept."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pyarrow as pa
import pytest
from tests.jobs.pulled import SHEET, Strip, several

from coldwork.inputs.sheet import read_method
from coldwork.jobs.gather import Gathered, gather
from coldwork.reduce import tensile as shell
from coldwork.reduce.curve import Curve, CurveFault, CurveResult, FaultKind
from coldwork.reduce.curve_reduction import reduce_curve
from coldwork.reduce.tensile import settings_of
from coldwork.rules.curve import CURVE_RULES, CURVE_WITHOUT_GEOMETRY
from coldwork.rules.rule import Level

Make = Callable[..., Path]
METAL = {FaultKind.SERRATIONS, FaultKind.LUEDERS_PLATEAU, FaultKind.UNLOADING_LOOP}


def gathered(make: Make, *starts: float, **how: object) -> Gathered:
    coupons, curves = several(*starts, **how)
    return gather(read_method(make(SHEET, coupons=coupons, curves=curves)))[0]


def test_every_fault_has_a_rule_of_its_own_and_every_rule_a_fault() -> None:
    rules = {shell._RULES[kind] for kind in FaultKind}
    assert len(rules) == len(FaultKind)
    assert rules | {CURVE_WITHOUT_GEOMETRY} == set(CURVE_RULES)
    assert all(shell._RULES[kind].id == kind.value for kind in FaultKind)


def test_what_the_metal_does_is_no_fault_of_the_test() -> None:
    levels = {kind: shell._RULES[kind].level for kind in FaultKind}
    assert {kind for kind, level in levels.items() if level is Level.INFORMATION} == METAL


@pytest.mark.parametrize("kind", FaultKind)
def test_an_error_takes_the_trust_away_and_nothing_else_does(
    make: Make, monkeypatch: pytest.MonkeyPatch, kind: FaultKind
) -> None:
    def faulty(*arguments: object) -> CurveResult:
        result = reduce_curve(*arguments)  # type: ignore[arg-type]
        unit = shell._RULES[kind].unit or "1"
        size = 1e6 if unit in ("MPa", "GPa") else 2.0
        return replace(result, faults=(CurveFault(kind, 10, 20, size, size / 2.0),))

    monkeypatch.setattr(shell, "reduce_curve", faulty)
    batch = gathered(make, 100.0)
    assert batch.curves is not None
    grave = shell._RULES[kind].level is Level.ERROR
    assert batch.curves.summaries[0].trusted is not grave
    assert np.isnan(batch.reduced.mean[0]) == grave
    flag = batch.findings.table(batch.coupons.ids, batch.coupons.lot_ids).to_pylist()[0]
    assert flag["rule"] == kind.value
    assert flag["detail"] == "points 11 to 20, lines 12 to 21"
    assert (flag["file"], flag["line"]) == ("curves.csv", 12)
    assert flag["value"] == pytest.approx(2.0 * flag["limit"])
    if shell._RULES[kind].unit == "MPa":
        assert flag["value"] == pytest.approx(1.0)  # 1e6 Pa


def test_one_curve_is_held_at_a_time(make: Make, monkeypatch: pytest.MonkeyPatch) -> None:
    sizes: list[int] = []

    def watched(curve: Curve, *rest: object) -> CurveResult:
        assert curve.force is not None
        sizes.append(curve.force.size)
        return reduce_curve(curve, *rest)  # type: ignore[arg-type]

    monkeypatch.setattr(shell, "reduce_curve", watched)
    batch = gathered(make, 50.0, 100.0, 150.0, points=300)
    assert sizes == [300, 300, 300]
    assert batch.curves is not None
    for summary in batch.curves.summaries.values():
        result = summary.result
        assert result is not None
        for kept in ("engineering_stress", "engineering_strain", "true_stress"):
            assert getattr(result, kept).size == 0
        assert summary.picture is None


def test_pictures_are_kept_where_they_are_wanted(make: Make) -> None:
    coupons, curves = several(100.0)
    method = read_method(make(SHEET, coupons=coupons, curves=curves))
    batch = gather(method, pictures=True)[0]
    assert batch.curves is not None
    picture = batch.curves.summaries[0].picture
    assert picture is not None
    assert picture.stress.max() == pytest.approx(1e6 * Strip().drawn(Strip().uniform)[0], rel=1e-4)


def test_settings_are_those_of_the_sheet(make: Make) -> None:
    keys = 'slope_gpa = { value = 118.0, u = 2.0 }\nfit = ["voce"]\noffsets = [0.002, 0.01]\n'
    sheet = SHEET.replace("[tensile]\n", f"[tensile]\n{keys}") + "[flow]\nplastic_strain = 0.004\n"
    coupons, curves = several(100.0)
    method = read_method(make(sheet, coupons=coupons, curves=curves))
    assert method.tensile is not None
    found = settings_of(method, method.tensile)
    assert (found.slope, found.slope_u) == (118e9, 2e9)
    assert found.reported_strains == (0.002, 0.004, 0.05, 0.1, 0.3)  # the flow route's too
    assert (found.force_u_rel, found.extension_u_rel, found.area_u_rel) == (0.005, 0.006, 0.004)
    assert found.offsets == (0.002, 0.01)


def test_points_that_come_back_later_are_put_together(make: Make) -> None:
    coupons, curves = several(60.0, 120.0, points=300)
    halves = [*curves[:150], *curves[300:450], *curves[150:300], *curves[450:]]
    once = gather(read_method(make(SHEET, name="a", coupons=coupons, curves=curves)))[0]
    again = gather(read_method(make(SHEET, name="b", coupons=coupons, curves=halves)))[0]
    np.testing.assert_array_equal(once.reduced.mean, again.reduced.mean)
    assert again.reduced.used.tolist() == [300, 300]


def test_small_blocks_give_the_same(make: Make) -> None:
    coupons, curves = several(60.0, 120.0, points=300)
    method = read_method(make(SHEET, coupons=coupons, curves=curves))
    whole, cut = gather(method)[0], gather(method, block_bytes=2000)[0]
    np.testing.assert_array_equal(whole.reduced.mean, cut.reduced.mean)


@pytest.fixture
def make(tmp_path: Path) -> Make:
    """Write a batch folder from a sheet and rows."""

    def made(sheet: str, *, name: str = "batch", **tables: list[dict[str, object]]) -> Path:
        folder = tmp_path / name
        folder.mkdir()
        (folder / "batch.toml").write_text(sheet, encoding="utf-8")
        for table, content in tables.items():
            whole = pa.Table.from_pylist([{k: str(x) for k, x in row.items()} for row in content])
            lines = [",".join(whole.column_names)]
            lines += [",".join(row.values()) for row in whole.to_pylist()]
            (folder / f"{table}.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
        return folder

    return made
