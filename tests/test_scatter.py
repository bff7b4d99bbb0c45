"""Repeatability of a coupon's mean: pooled, own, stated, floored, or not known at all."""

import csv
from dataclasses import replace
from io import StringIO
from math import inf, sqrt
from pathlib import Path
from typing import Final

import numpy as np
import pyarrow as pa
import pytest
from numpy.testing import assert_allclose
from scipy.special import fdtri

from coldwork.inputs.method import Method
from coldwork.inputs.sheet import read_method
from coldwork.reduce.reduced import Reduced
from coldwork.rules.forces import HBW, HV
from coldwork.scatter import BASES, Repeatability, repeatability

NAN: Final = float("nan")
STRIP: Final = Path(__file__).parents[1] / "sample_data" / "copper-strip"


@pytest.fixture(scope="module")
def pooling() -> Method:
    """The strip's method: pooled, and no resolution to get in the way."""
    return replace(read_method(STRIP), resolution=None)


TABLE: Final = """\
condition,scale,force,ball,used,repeats,mean,relative,diagonal
"""


def batch(text: str) -> tuple[Reduced, pa.StringArray]:
    """Coupons from a small table: forces in N, balls in mm, means in MPa, diagonals in um."""
    rows = list(csv.DictReader(StringIO(TABLE + text)))

    def numbers(name: str, factor: float = 1.0) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
        return np.array([float(row[name] or "nan") * factor for row in rows])

    mean = numbers("mean", 1e6)
    repeats = np.array([int(row["repeats"]) for row in rows])
    reduced = Reduced.empty(len(rows), ())
    reduced.used[:] = [int(row["used"]) for row in rows]
    reduced.mean[:] = mean
    reduced.sd[:] = numbers("relative") * mean
    reduced.repeats[:] = repeats
    reduced.effective[:] = np.where(repeats > 0, repeats, 1.6)
    reduced.scale[:] = [int(row["scale"]) for row in rows]
    reduced.force[:] = reduced.applied_force[:] = numbers("force")
    reduced.ball[:] = numbers("ball", 1e-3)
    reduced.mean_diagonal[:] = numbers("diagonal", 1e-6)
    return reduced, pa.array([row["condition"] for row in rows])


def judged(method: Method, text: str) -> Repeatability:
    reduced, conditions = batch(text)
    return repeatability(method, reduced, conditions)


def bases(found: Repeatability) -> list[str]:
    return [BASES[b] for b in found.basis]


FOUR: Final = """\
cold,0,98.07,,5,5,900,0.010,450
cold,0,98.07,,5,5,950,0.012,440
cold,0,98.07,,3,3,920,0.008,445
cold,0,98.07,,1,1,910,,447
"""


def test_pooled_over_the_group(pooling: Method) -> None:
    # JCGM 100, 4.2.4: s_p^2 = sum nu s^2 / sum nu, relative; u = s_p mean / sqrt(n).
    found = judged(pooling, FOUR)
    pooled = sqrt((4 * 0.010**2 + 4 * 0.012**2 + 2 * 0.008**2) / 10)
    assert_allclose(found.pooled, pooled, rtol=1e-12)
    assert_allclose(found.degrees_of_freedom, 10.0)
    mean, n = np.array([900e6, 950e6, 920e6, 910e6]), np.array([5, 5, 3, 1])
    assert_allclose(found.u, pooled * mean / np.sqrt(n), rtol=1e-12)
    assert bases(found) == ["pooled"] * 4
    assert not found.left.any()


def test_own(pooling: Method) -> None:
    # s / sqrt(n), nu = n - 1, and not known for one reading
    found = judged(replace(pooling, repeatability="own"), FOUR)
    assert_allclose(found.u[:3], np.array([9e6, 11.4e6, 7.36e6]) / np.sqrt([5, 5, 3]), rtol=1e-12)
    assert found.degrees_of_freedom[:3].tolist() == [4.0, 4.0, 2.0]
    assert np.isnan(found.u[3])
    assert bases(found) == ["own"] * 3 + ["nothing"]


def test_ten_readings_speak_for_themselves(pooling: Method) -> None:
    found = judged(pooling, FOUR + "cold,0,98.07,,10,10,930,0.011,443\n")
    assert bases(found) == ["pooled"] * 4 + ["own"]
    assert_allclose(found.u[4], 0.011 * 930e6 / sqrt(10), rtol=1e-12)
    assert found.degrees_of_freedom[4] == 9.0
    # and still lend their scatter to the others
    pooled = sqrt((4 * 0.010**2 + 4 * 0.012**2 + 2 * 0.008**2 + 9 * 0.011**2) / 19)
    assert_allclose(found.pooled, pooled, rtol=1e-12)
    nine = judged(pooling, FOUR + "cold,0,98.07,,9,9,930,0.011,443\n")
    assert bases(nine) == ["pooled"] * 5


@pytest.mark.parametrize(
    "other",
    [
        "hot,0,98.07,,5,5,900,0.03,450\n",  # another condition
        "cold,0,49.03,,5,5,900,0.03,320\n",  # another force
        "cold,1,1839,2.5,5,5,900,0.03,1000\n",  # another scale
    ],
)
def test_pools_do_not_mix(pooling: Method, other: str) -> None:
    found, alone = judged(pooling, FOUR + other), judged(pooling, FOUR)
    assert_allclose(found.pooled[:4], alone.pooled)
    assert_allclose(found.pooled[4], 0.03)
    assert found.degrees_of_freedom[4] == 4.0


def test_balls_do_not_mix(pooling: Method) -> None:
    text = "a,1,1839,2.5,5,5,900,0.01,1000\na,1,1839,5,5,5,900,0.02,1000\n"
    assert_allclose(judged(pooling, text).pooled, [0.01, 0.02])


NOISY: Final = "".join(f"cold,0,98.07,,5,5,900,{s},450\n" for s in (0.01, 0.011, 0.009, 0.01))


def test_a_noisy_coupon_leaves_the_pool(pooling: Method) -> None:
    # F at 1 % / 5 of 4 and 16 degrees of freedom against the other four: 6.90 (scipy).
    limit = float(fdtri(4, 16, 1 - 0.01 / 5))
    assert_allclose(limit, 6.90, atol=0.01)
    others = sqrt((0.01**2 + 0.011**2 + 0.009**2 + 0.01**2) / 4)
    for factor, leaves in ((0.99, False), (1.01, True)):
        s = factor * others * sqrt(limit)
        found = judged(pooling, NOISY + f"cold,0,98.07,,5,5,900,{s!r},450\n")
        assert found.left.tolist() == [False] * 4 + [leaves]
        assert_allclose(found.limit[4], others * sqrt(limit), rtol=1e-9)
        assert_allclose(found.ratio[4], factor**2 * limit, rtol=1e-9)
        assert_allclose(found.ratio_limit[4], limit, rtol=1e-9)
        if leaves:  # keeps its own scatter; the others pool without it
            assert bases(found) == ["pooled"] * 4 + ["own"]
            assert_allclose(found.u[4], s * 900e6 / sqrt(5), rtol=1e-12)
            assert found.degrees_of_freedom.tolist() == [16.0] * 4 + [4.0]
            assert_allclose(found.pooled, others, rtol=1e-12)


def test_leaving_repeats_until_nobody_leaves(pooling: Method) -> None:
    # The second hides behind the first: with it in the pool the ratio is too small.
    found = judged(
        pooling, NOISY + "cold,0,98.07,,5,5,900,0.08,450\ncold,0,98.07,,5,5,900,0.035,450\n"
    )
    assert found.left.tolist() == [False] * 4 + [True, True]


def test_coupons_that_agree_to_the_last_digit(pooling: Method) -> None:
    # no scatter at all among the others: an honest coupon is not thrown out by 0 / 0
    found = judged(pooling, "cold,0,98.07,,5,5,900,0,450\n" * 3)
    assert not found.left.any()
    assert found.u.tolist() == [0.0, 0.0, 0.0]


def test_a_stated_repeatability_serves_where_nothing_is_repeated(pooling: Method) -> None:
    method = replace(pooling, repeatability_rel=0.012)
    text = "wire,-1,,,1,1,500,,\nwire,-1,,,5,5,500,0.004,\nwire,-1,,,4,0,520,,\n"
    found = judged(method, text)
    assert bases(found) == ["stated", "pooled", "stated"]
    # the third lies between two points of a curve: 1.6 readings' worth
    assert_allclose(
        found.u,
        [0.012 * 500e6, 0.004 * 500e6 / sqrt(5), 0.012 * 520e6 / sqrt(1.6)],
        rtol=1e-12,
    )
    assert found.degrees_of_freedom.tolist() == [inf, 4.0, inf]


def test_never_below_the_resolution_of_the_diagonal(pooling: Method) -> None:
    # H ~ 1/d^2: u(H)/H = 2 u(d)/d, with u(d) = resolution / sqrt(12) in the mean diagonal.
    method = replace(pooling, resolution=0.5e-6)
    text = "cold,0,98.07,,5,5,900,0.0001,450\ncold,0,9.807,,5,5,900,0.02,140\n"
    found = judged(method, text)
    floor = 2.0 * 900e6 / 450e-6 * 0.5e-6 / sqrt(12.0)
    assert_allclose(found.u[0], floor, rtol=1e-12)
    assert found.degrees_of_freedom[0] == inf
    assert_allclose(found.u[1], 0.02 * 900e6 / sqrt(5), rtol=1e-12)
    assert bases(found) == ["resolution", "pooled"]


def test_the_floor_of_a_ball(pooling: Method) -> None:
    # d H / d d by a central difference of ISO 6506-1's formula, D 2.5 mm, F 1839 N, d 1 mm
    method = replace(pooling, resolution=5e-6)
    assert HBW == 1
    assert HV == 0

    def hardness(d: float) -> float:
        return 2.0 * 1839.0 / (np.pi * 2.5e-3 * (2.5e-3 - sqrt(2.5e-3**2 - d**2)))

    h = 1e-9
    slope = (hardness(1e-3 - h) - hardness(1e-3 + h)) / (2 * h)
    mpa = hardness(1e-3) / 1e6
    found = judged(method, f"a,1,1839,2.5,5,5,{mpa!r},0.00001,1000\n")
    assert_allclose(found.u, slope * 5e-6 / sqrt(12.0), rtol=1e-6)


def test_a_single_reading_without_a_pool_is_not_known(pooling: Method) -> None:
    found = judged(pooling, "cold,0,98.07,,1,1,900,,450\nhot,0,98.07,,0,0,,,\n")
    assert np.isnan(found.u).all()
    assert bases(found) == ["nothing", "nothing"]
    # and a resolution alone does not make a repeatability
    found = judged(replace(pooling, resolution=1e-7), "cold,0,98.07,,1,1,900,,450\n")
    assert np.isnan(found.u).all()


def test_no_coupon_at_all(pooling: Method) -> None:
    assert judged(pooling, "").u.shape == (0,)
