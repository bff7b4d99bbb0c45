"""What each plot says about its own subject."""

from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from tests.plots.drawn import Sheet, drawn
from tests.plots.frames import CONTEXT, LIMIT, Batch, batch, flow

from coldwork.plots import budget, density, drift, readings, scatter, stored_energy


def sheet(figure: object) -> Sheet:
    return drawn("one", figure)  # type: ignore[arg-type]


def test_readings_of_two_scales_do_not_share_an_axis() -> None:
    made = batch(12)
    coupons = made.frames["coupons"].assign(
        hardness_scale=["HV10"] * 8 + ["HBW2.5/62.5"] * 3 + [""]
    )
    figures = readings.draw({**made.frames, "coupons": coupons}, made.context)
    labels = [figure.axes[0].get_xlabel() for figure in figures]
    assert ["HV10" in label for label in labels] == [True, False]
    assert "HBW2.5/62.5" in labels[1]


def test_set_aside_readings_are_counted_with_their_rules() -> None:
    made = batch(5)
    (figure,) = readings.draw(made.frames, made.context)
    words = sheet(figure).texts
    assert "× 2 not-a-number, excluded" in words
    assert "× 1 row-width" in words


def test_a_reading_far_out_is_marked_at_the_edge_and_named() -> None:
    made = batch(5)
    table = made.frames["readings"].copy()
    table.loc[9, "hardness"] = 1234.0
    (figure,) = readings.draw({**made.frames, "readings": table}, made.context)
    assert any("CU-00-2 no. 3 at +" in text for text in sheet(figure).texts)
    assert figure.axes[0].get_xlim()[1] < 200.0


def test_points_at_another_strain_are_told_from_repeats() -> None:
    made = flow()
    (figure,) = readings.draw(made.frames, made.context)
    texts = sheet(figure).texts
    assert "point of the curve at another strain" in texts
    assert any("18 readings used" in text for text in texts)


def test_density_goes_by_coupon_where_few_strains_are_given() -> None:
    made = batch(12)
    given = made.frames["coupons_in"].copy()
    given.loc[3:, "prior_true_strain"] = np.nan
    (by_strain,) = density.draw(made.frames, made.context)
    (by_coupon,) = density.draw({**made.frames, "coupons_in": given}, made.context)
    assert "Prior true strain" in by_strain.axes[0].get_xlabel()
    assert "Dislocation density" in by_coupon.axes[0].get_xlabel()


def test_coupons_of_one_strain_stand_side_by_side() -> None:
    made = batch(35)
    (figure,) = density.draw(made.frames, made.context)
    marks = [line for line in figure.axes[0].lines if line.get_marker() == "o"]
    x = np.sort(np.concatenate([np.asarray(line.get_xdata(), dtype=float) for line in marks]))
    assert len(x) == 33  # one without readings, one without a strain
    assert np.diff(x).min() > 0.004


def test_the_gravest_decision_of_several_limits_is_shown() -> None:
    made = batch(5)
    second = {**LIMIT, "id": "roof", "lower": None, "upper": 0.05}
    decisions = made.frames["decisions"]
    harder = decisions.assign(limit_id="roof", decision="non-conforming", probability=0.0)
    frames = {**made.frames, "decisions": pd.concat([decisions, harder])}
    context = replace(CONTEXT, limits=(LIMIT, second))
    (figure,) = stored_energy.draw(frames, context)
    texts = sheet(figure).texts
    assert sum("■ non-conforming" in text for text in texts) == 5
    assert "■ non-conforming (2) < 0.01" in texts
    assert any(text.startswith("limit 2: roof, at most 0.05 J/g") for text in texts)


def test_each_limited_quantity_has_its_own_figure() -> None:
    made = batch(5)
    second = {**LIMIT, "id": "hard", "quantity": "hardness", "lower": 60.0, "upper": None}
    figures = stored_energy.draw(made.frames, replace(CONTEXT, limits=(second, LIMIT)))
    titles = [str(figure.get_label()) for figure in figures]
    assert titles[0].startswith("Hardness of each coupon, against its limits")
    assert titles[1].startswith("Stored energy in dislocations of each coupon, against its limits")


def test_without_limits_the_stored_energy_is_shown_plainly() -> None:
    made = batch(5)
    (figure,) = stored_energy.draw(made.frames, replace(CONTEXT, limits=()))
    assert any("no limit in the batch sheet" in text for text in sheet(figure).texts)


def test_shares_of_a_condition_add_up() -> None:
    made = batch(35)
    (figure,) = budget.draw(made.frames, made.context)
    assert len(figure.axes) == 7
    for axes in figure.axes:
        bars = [patch.get_width() for patch in axes.patches]  # type: ignore[attr-defined]
        assert sum(bars) == pytest.approx(100.0, abs=0.2)  # inputs below 0.1 % are left out


def test_many_conditions_are_grouped_by_value() -> None:
    made = batch(35)
    names = [f"state {i}" for i in range(35)]
    coupons = made.frames["coupons"].assign(condition=names)
    (figure,) = budget.draw({**made.frames, "coupons": coupons}, made.context)
    assert len(figure.axes) == 5
    assert any("34 conditions: mean of 5 classes" in text for text in sheet(figure).texts)


def test_conditions_count_whatever_the_lot_where_there_are_many() -> None:
    made = batch(35)
    coupons = made.frames["coupons"].assign(lot_id=[f"coil {i % 2}" for i in range(35)])
    (figure,) = budget.draw({**made.frames, "coupons": coupons}, made.context)
    assert [axes.get_title(loc="left").split("\n")[0] for axes in figure.axes][1] == "rolled 5 %"


def test_a_coupon_that_left_the_pool_says_so() -> None:
    made = batch(35)
    (figure,) = scatter.draw(made.frames, made.context)
    texts = sheet(figure).texts
    left = int(made.frames["scatter"]["left_pool"].sum())
    assert left > 0
    assert sum("left the pool" in text and "%" in text for text in texts) == left
    assert "1, no scatter" in texts


def test_drift_is_seen_against_the_condition() -> None:
    made = batch(35, testers=("T1",))
    table = made.frames["readings"].copy()
    table["hardness"] *= np.linspace(1.0, 1.1, len(table))  # the tester creeps up by 10 %
    (figure,) = drift.draw({**made.frames, "readings": table}, made.context)
    bars = [line for line in figure.axes[0].lines if line.get_linewidth() == 2.4]
    levels = [float(np.asarray(line.get_ydata())[0]) for line in bars]
    assert max(levels) - min(levels) > 0.5
    assert "median of its condition" in figure.axes[0].get_ylabel().replace("\n", " ")


def test_without_times_the_order_is_said_to_be_that_of_the_numbers() -> None:
    made = batch(5, timed=False, testers=(), operators=())
    (figure,) = drift.draw(made.frames, made.context)
    assert len(figure.axes) == 1
    assert "no times were given" in figure.axes[0].get_xlabel()
    assert "reading" in sheet(figure).texts


def test_a_few_readings_without_a_time_are_counted() -> None:
    made = batch(5)
    table = made.frames["readings"].copy()
    table.loc[:2, "measured_at"] = None
    (figure,) = drift.draw({**made.frames, "readings": table}, made.context)
    assert "3 readings not shown: without a time." in sheet(figure).texts


def test_more_operators_than_marks_are_joined() -> None:
    made = batch(35, operators=[f"operator-{i}" for i in range(1, 10)])
    table = made.frames["readings"]
    table = table.assign(tester=["ABCDEFGH"[i % 8] for i in range(len(table))])
    (figure,) = drift.draw({**made.frames, "readings": table}, made.context)
    texts = sheet(figure).texts
    assert "3 other operators" in texts
    assert "3 other testers" in texts
    assert len(figure.axes) == 6


def test_single_readings_show_no_drift() -> None:
    made: Batch = batch(5, readings=1, conditions=False)
    assert drift.draw(made.frames, made.context) == []
