"""Draws of single inputs: their shapes, their keys, and what cannot be."""

from math import inf, log, sqrt
from typing import Final

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from coldwork.errors import BatchRefused
from coldwork.inputs.quantity import Input
from coldwork.sampling.streams import BLOCK, Distribution, deviations, distribution_of, generator

Floats = NDArray[np.float64]
NAME: Final = "hardening.taylor_factor"


def drawn(x: Distribution, blocks: int = 10) -> Floats:
    return np.concatenate(
        [deviations(x, generator(1, x.name, block=b), BLOCK)[0] for b in range(blocks)]
    )


@pytest.mark.parametrize(
    ("x", "expected"),
    [
        (Distribution("a", 5.0, 0.3), stats.norm(scale=0.3)),
        (Distribution("b", 5.0, 0.3, degrees_of_freedom=4.0), stats.t(4.0, scale=0.3)),
        (
            Distribution("c", 5.0, 0.3, shape="uniform"),  # JCGM 101, 6.4.2: half width u sqrt(3)
            stats.uniform(-0.3 * sqrt(3), 0.6 * sqrt(3)),
        ),
        (
            Distribution("d", 5.0, 0.3, shape="triangular"),  # 6.4.5: half width u sqrt(6)
            stats.triang(0.5, -0.3 * sqrt(6), 0.6 * sqrt(6)),
        ),
        (
            Distribution("e", 5.0, 5 * log(1.2), shape="lognormal", log_factor=log(1.2)),
            stats.lognorm(log(1.2), loc=-5.0, scale=5.0),
        ),
    ],
    ids=["normal", "student", "uniform", "triangular", "lognormal"],
)
def test_draws_follow_their_distribution(x: Distribution, expected: "stats.rv_continuous") -> None:
    # Kolmogorov and Smirnov's test would call 1 in 1,000 honest sets bad; the seed is fixed.
    assert stats.kstest(drawn(x), expected.cdf).pvalue > 1e-3


def test_a_block_depends_on_seed_names_and_its_number_alone() -> None:
    def first(*names: str, seed: int = 1, block: int = 0) -> float:
        return float(generator(seed, *names, block=block).standard_normal())

    keys = {first("a"), first("b"), first("a", "b"), first("ab"), first("a", seed=2)}
    keys |= {first("a", block=1), first("a", "b", block=1), first("b", "a")}
    assert len(keys) == 8
    assert first("a") == first("a")


def test_fewer_draws_are_the_beginning_of_more() -> None:
    x = Distribution("a", 1.0, 0.1, low=0.0)
    more, _ = deviations(x, generator(1, "a", block=0), BLOCK)
    again, _ = deviations(x, generator(1, "a", block=0), BLOCK)
    assert np.array_equal(more, again)


def test_a_draw_that_cannot_be_is_drawn_again_and_counted() -> None:
    # P(z < -3.3) = 4.8 in 10,000 (tables of the normal distribution)
    x = Distribution("a", 3.3, 1.0, low=0.0)
    counts = [deviations(x, generator(s, "a", block=0), BLOCK)[1] for s in range(40)]
    assert sum(counts) / (40 * BLOCK) == pytest.approx(4.8e-4, rel=0.25)
    for seed in range(5):
        found, _ = deviations(x, generator(seed, "a", block=0), BLOCK)
        assert (found + 3.3 > 0.0).all()


def test_too_many_of_them_refuse_the_batch_with_advice() -> None:
    x = Distribution(NAME, 3.06, 1.2, low=0.0)
    with pytest.raises(BatchRefused, match="lognormal: give a factor") as refused:
        deviations(x, generator(1, NAME, block=0), BLOCK)
    assert NAME in str(refused.value)
    assert "drawn again" in str(refused.value)


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [
        (NAME, 0.0, inf),
        ("material.poisson_ratio", -1.0, 0.5),
        ("strength.baseline_mpa", -inf, inf),  # a stress that is taken off may come out below 0
        ("strength.terms_mpa.solutes", -inf, inf),
        ("strength.superposition_exponent", 1.0, 2.0),
        ("strength.obstacle_mpa", -1e-300, inf),
        ("structure.wall_fraction", 0.0, 1.0),
        ("structure.density_ratio", 0.0, inf),
        ("material.shear_modulus_slope", -inf, inf),
        ("tester:T1", -1.0, inf),
    ],
)
def test_what_an_input_can_be(name: str, low: float, high: float) -> None:
    found = distribution_of(Input(name, 1.0, 0.1, "1"))
    assert (found.low, found.high) == (low, high)
