"""Two routes compared and joined, against general least squares."""

from collections.abc import Mapping

import numpy as np
from numpy.testing import assert_allclose
from scipy.stats import norm

from coldwork.interval.combine import Spread, combine
from coldwork.interval.routes import agreement, joined
from coldwork.measured import Measured

N = 60
NAMES = ("baseline", "constraint", "scatter", "noise")
RNG = np.random.default_rng(20261)
ALIKE = np.ones(N, dtype=bool)


def spreads(u: Mapping[str, float]) -> dict[str, Spread]:
    return {
        name: Spread(np.full(N, x), shared=name in NAMES[:2], degrees_of_freedom=np.inf)
        for name, x in u.items()
    }


def two(scale: float = 1.0) -> tuple[Measured, Measured]:
    """Two values that lean on a baseline in different measure, and on scatters of their own."""
    random = np.random.default_rng(7)
    values = 200.0 + 10.0 * random.standard_normal((2, N))
    c = random.uniform(0.5, 2.0, (4, N))
    first = {"baseline": -c[0], "constraint": c[1], "scatter": np.asarray(1.0)}
    second = {"baseline": -c[2], "noise": c[3]}
    return tuple(  # type: ignore[return-value]
        Measured(scale * y, {name: np.asarray(scale * x) for name, x in slopes.items()})
        for y, slopes in zip(values, (first, second), strict=True)
    )


U = spreads({"baseline": 5.0, "constraint": 8.0, "scatter": 3.0, "noise": 4.0})


def test_the_joined_value_is_that_of_whitened_least_squares() -> None:
    # Independent: numpy's lstsq of the problem whitened by the Cholesky factor of the full
    # covariance, which is built from the sensitivities.
    first, second = two()
    found = agreement(first, second, U, 0.95, ALIKE)
    mean = joined(found.weight, first, second)
    u = combine(mean, U).u
    for i in range(N):
        c = np.zeros((2, len(NAMES)))
        for row, one in enumerate((first, second)):
            for name, x in one.sensitivities.items():
                c[row, NAMES.index(name)] = np.broadcast_to(x, (N,))[i]
        sizes = np.array([np.broadcast_to(U[name].u, (N,))[i] for name in NAMES])
        covariance = (c * sizes**2) @ c.T
        root = np.linalg.cholesky(covariance)
        design = np.linalg.solve(root, np.ones(2))
        seen = np.linalg.solve(root, np.array([first.value[i], second.value[i]]))
        expected = np.linalg.lstsq(design[:, None], seen)[0][0]
        assert_allclose(mean.value[i], expected, rtol=1e-11)
        assert_allclose(u[i], 1.0 / np.linalg.norm(design), rtol=1e-11)
        d = c[0] - c[1]
        assert_allclose(found.of_difference.u[i] ** 2, np.sum((d * sizes) ** 2), rtol=1e-12)
    assert ((found.weight < 0) | (found.weight > 1)).any()  # a shared baseline does that
    assert ((found.weight > 0) & (found.weight < 1)).any()


def test_values_that_share_nothing_are_weighed_by_their_variances() -> None:
    first = Measured(np.full(N, 210.0), {"scatter": np.asarray(1.0)})
    second = Measured(np.full(N, 200.0), {"noise": np.asarray(1.0)})
    found = agreement(first, second, U, 0.95, ALIKE)
    mean = joined(found.weight, first, second)
    w = np.array([1 / 9, 1 / 16])
    assert_allclose(found.weight, w[0] / w.sum(), rtol=1e-14)
    assert_allclose(mean.value, (w @ [210.0, 200.0]) / w.sum(), rtol=1e-14)
    assert_allclose(combine(mean, U).u, 1 / np.sqrt(w.sum()), rtol=1e-14)
    # E_n as ISO 13528 writes it for such values: over the root of the sum of both U squared
    expanded = norm.ppf(0.975) * np.array([3.0, 4.0])
    assert_allclose(found.error, 10.0 / np.hypot(*expanded), rtol=1e-12)


def test_what_both_share_alike_drops_out_of_the_difference() -> None:
    plain = agreement(
        Measured(np.full(N, 210.0), {"scatter": np.asarray(1.0)}),
        Measured(np.full(N, 200.0), {"noise": np.asarray(1.0)}),
        U,
        0.95,
        ALIKE,
    )
    with_baseline = agreement(
        Measured(np.full(N, 210.0), {"scatter": np.asarray(1.0), "baseline": np.asarray(-1.0)}),
        Measured(np.full(N, 200.0), {"noise": np.asarray(1.0), "baseline": np.asarray(-1.0)}),
        U,
        0.95,
        ALIKE,
    )
    assert_allclose(with_baseline.error, plain.error, rtol=1e-14)
    assert_allclose(with_baseline.weight, plain.weight, rtol=1e-12)
    assert (with_baseline.first.u > plain.first.u).all()


def test_another_unit_moves_neither_error_nor_weight() -> None:
    here, there = (agreement(*two(scale), U, 0.95, ALIKE) for scale in (1.0, 1e6))
    assert_allclose(there.error, here.error, rtol=1e-12)
    assert_allclose(there.weight, here.weight, rtol=1e-9)
    assert_allclose(there.of_difference.u, 1e6 * here.of_difference.u, rtol=1e-12)


def test_a_route_that_is_not_there_has_no_weight() -> None:
    first, second = two()
    value = first.value.copy()
    value[0] = np.nan  # no indents
    other = second.value.copy()
    other[1] = np.nan  # no flow curve
    noise = np.full(N, 4.0)
    noise[2] = np.nan  # a flow curve without repeatability
    scatter = np.full(N, 3.0)
    scatter[3] = np.nan  # indents without
    scatter[4] = noise[4] = np.nan  # both without
    alike = ALIKE.copy()
    alike[5] = False  # at two strains
    u = U | {
        "scatter": Spread(scatter, shared=False, degrees_of_freedom=np.inf),
        "noise": Spread(noise, shared=False, degrees_of_freedom=np.inf),
    }
    a, b = Measured(value, first.sensitivities), Measured(other, second.sensitivities)
    found = agreement(a, b, u, 0.95, alike)
    assert found.weight[:6].tolist() == [0.0, 1.0, 1.0, 0.0, 1.0, 1.0]
    assert np.isnan(found.error[:6]).all()
    mean = joined(found.weight, a, b)
    together = combine(mean, u)
    assert mean.value[:4].tolist() == [b.value[0], a.value[1], a.value[2], b.value[3]]
    assert_allclose(together.u[[0, 3]], found.second.u[[0, 3]], rtol=1e-14)
    assert_allclose(together.u[[1, 2]], found.first.u[[1, 2]], rtol=1e-14)
    assert np.isnan(together.u[4])
    assert np.isfinite(found.error[6:]).all()
