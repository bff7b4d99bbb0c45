"""Intervals of what is computed onward: against random draws, limits, one-sided ends."""

from collections.abc import Mapping

import numpy as np
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.formulas.annealing import CRITICAL_BULGE_RADIUS, NET_PRESSURE
from coldwork.interval.combine import Ends, Spread
from coldwork.interval.onward import Onward, Pivot, onward
from coldwork.measured import Measured, Value, apply
from coldwork.statistics.student import student_quantile

K = float(student_quantile(0.975, np.inf))
SPREADS = {
    "own": Spread(1.0, shared=False, degrees_of_freedom=np.inf),
    "gamma": Spread(1.0, shared=True, degrees_of_freedom=np.inf),
    "drag": Spread(1.0, shared=True, degrees_of_freedom=np.inf),
    "both": Spread(1.0, shared=True, degrees_of_freedom=np.inf),
}
FloatArray = NDArray[np.float64]


def lognormal(value: float, own: float, both: float = 0.0) -> Pivot:
    """Make a pivot of which ln is normal, from an own and a shared input. [any unit]."""
    x = np.array([value])
    u = np.hypot(own, both)
    slopes = {"own": x * own, "both": x * both}
    return Pivot(Measured(x, slopes), Ends(x * np.exp(-K * u), x * np.exp(K * u)))


def test_a_pivot_alone_keeps_its_interval() -> None:
    pivot = lognormal(1e6, 0.4)
    found = onward(lambda at: {"same": Onward(at["p"])}, {"p": pivot}, SPREADS, 0.95)["same"]
    assert_allclose(found.ends.lower, pivot.ends.lower, rtol=1e-12)
    assert_allclose(found.ends.upper, pivot.ends.upper, rtol=1e-12)
    assert_allclose(found.combined.u_own, 0.4e6, rtol=1e-12)
    assert found.combined.u_shared == 0.0


def test_it_falls_with_a_pivot_that_rises() -> None:
    def inverse(at: Mapping[str, Value]) -> dict[str, Onward]:
        gamma = Measured(np.asarray(0.6), {"gamma": np.asarray(0.06)})
        size = apply(CRITICAL_BULGE_RADIUS, boundary_energy=gamma, net_pressure=at["p"])
        return {"size": Onward(size)}

    found = onward(inverse, {"p": lognormal(1e6, 0.4)}, SPREADS, 0.95)["size"]
    reach = K * np.hypot(0.4, 0.1)  # ln of a ratio of two independent numbers
    assert_allclose(found.ends.lower, 1.2e-6 * np.exp(-reach), rtol=1e-12)
    assert_allclose(found.ends.upper, 1.2e-6 * np.exp(reach), rtol=1e-12)


def test_ends_are_those_of_random_draws() -> None:
    # 2e5 draws of a skewed pressure less a normal drag, with an input that stands in both.
    def net(at: Mapping[str, Value]) -> dict[str, Onward]:
        drag = Measured(np.asarray(0.5e6), {"drag": np.asarray(0.1e6), "both": np.asarray(0.05e6)})
        left = apply(
            NET_PRESSURE, driving_pressure=at["p"], zener_pressure=drag, curvature_pressure=0.0
        )
        return {"net": Onward(left, "plain")}

    found = onward(net, {"p": lognormal(1e6, 0.4, 0.2)}, SPREADS, 0.95)["net"]
    own, drag, both = np.random.default_rng(7).standard_normal((3, 200_000))
    drawn = 1e6 * np.exp(0.4 * own + 0.2 * both) - 0.5e6 - 0.1e6 * drag - 0.05e6 * both
    inside = (drawn > found.ends.lower) & (drawn < found.ends.upper)
    assert 0.935 < inside.mean() < 0.97
    assert 0.01 < (drawn < found.ends.lower).mean() < 0.04
    assert 0.01 < (drawn > found.ends.upper).mean() < 0.04


def test_two_pivots_of_one_error_move_together() -> None:
    pivot = lognormal(2.0, 0.3)
    found = onward(
        lambda at: {"product": Onward(at["a"] * at["b"])},
        {"a": pivot, "b": pivot},
        SPREADS,
        0.95,
    )["product"]
    assert_allclose(found.ends.upper, 4.0 * np.exp(2.0 * K * 0.3), rtol=1e-12)
    assert_allclose(found.ends.lower, 4.0 * np.exp(-2.0 * K * 0.3), rtol=1e-12)


def test_a_fraction_stays_between_zero_and_one() -> None:
    g = Measured(np.array([np.log(np.log(2.0))]), {"own": np.array([1.0])})  # X = 1/2
    pivot = Pivot(g, Ends(g.value - K, g.value + K))
    found = onward(lambda at: {"x": Onward(at["g"], "fraction")}, {"g": pivot}, SPREADS, 0.95)["x"]
    assert_allclose(found.value, 0.5, rtol=1e-14)
    assert_allclose(found.combined.u, 0.5 * np.log(2.0), rtol=1e-12)  # dX/dg by hand
    assert_allclose(found.ends.lower, 1.0 - 0.5 ** np.exp(-K), rtol=1e-12)
    assert_allclose(found.ends.upper, 1.0 - 0.5 ** np.exp(K), rtol=1e-12)


def test_without_a_value_there_is_one_end() -> None:
    none = Pivot(Measured(np.array([np.nan])), Ends(np.array([0.0]), np.array([1e6])))

    def work(at: Mapping[str, Value]) -> dict[str, Onward]:
        size = apply(CRITICAL_BULGE_RADIUS, boundary_energy=0.5, net_pressure=at["p"])
        return {"drives": Onward(at["p"]), "size": Onward(size)}

    found = onward(work, {"p": none}, SPREADS, 0.95)
    assert np.isnan(found["drives"].value)
    assert_allclose(found["drives"].ends.upper, 1e6, rtol=1e-12)
    assert found["drives"].ends.lower == 0.0
    assert_allclose(found["size"].ends.lower, 1e-6, rtol=1e-12)
    assert np.isnan(found["size"].ends.upper)


def test_an_end_that_does_not_exist_is_open() -> None:
    # A pressure whose interval goes down to nothing has no largest critical size.
    pivot = Pivot(
        Measured(np.array([1e6]), {"own": np.array([6e5])}), Ends(*np.array([[0], [3e6]]))
    )
    found = onward(
        lambda at: {
            "size": Onward(apply(CRITICAL_BULGE_RADIUS, boundary_energy=0.5, net_pressure=at["p"]))
        },
        {"p": pivot},
        SPREADS,
        0.95,
    )["size"]
    assert np.isnan(found.ends.upper)
    assert_allclose(found.ends.lower, 1.0 / 3e6, rtol=1e-12)


def test_nothing_at_all_has_a_value_and_no_interval() -> None:
    pivot = Pivot(Measured(np.array([0.0]), {"own": np.array([1.0])}), Ends(*np.array([[0], [1]])))
    found = onward(lambda at: {"same": Onward(at["p"])}, {"p": pivot}, SPREADS, 0.95)["same"]
    assert found.value == 0.0
    assert np.isnan(found.combined.u)
    assert np.isnan(found.ends.upper)
