"""Bias of a tester from its checks, by hand."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.errors import InvalidArgument
from coldwork.statistics.tester_checks import Check, bias_of_tester


def check(*readings: float, certified: float = 200.0, u: float = 1.0) -> Check:
    return Check(np.array(readings), certified, u)


def test_one_check_by_hand() -> None:
    # Readings 201 203 205 on 200 +- 1: mean 203, s 2, u^2 = (1/200)^2 + (2/200)^2 / 3.
    one = check(201.0, 203.0, 205.0)
    assert_allclose(one.bias, 0.015, rtol=1e-12)
    assert_allclose(one.repeatability, 4.0 / 203.0)
    found = bias_of_tester([one])
    assert_allclose(found.bias, 0.015, rtol=1e-12)
    assert_allclose(found.u, np.sqrt(0.005**2 + 0.01**2 / 3.0), rtol=1e-12)
    scatter = 0.01**2 / 3.0
    assert_allclose(found.degrees_of_freedom, (0.005**2 + scatter) ** 2 / (scatter**2 / 2.0))


def test_days_that_differ_by_more_than_their_readings() -> None:
    # Biases 0, 0.01, 0.02 with s 0.01 from day to day; readings alike within a day.
    days = [check(200.0, 200.0), check(202.0, 202.0), check(204.0, 204.0)]
    found = bias_of_tester(days)
    assert_allclose(found.bias, 0.01, rtol=1e-12)
    assert_allclose(found.u, np.hypot(0.005, 0.01), rtol=1e-12)


def test_days_that_agree_by_chance_keep_the_scatter_of_their_readings() -> None:
    found = bias_of_tester([check(199.0, 201.0), check(198.0, 202.0)])
    assert_allclose(found.u**2, 0.005**2 + (2.0 + 8.0) / 2.0 / 200.0**2 / 2.0, rtol=1e-12)


def test_single_readings_on_two_days() -> None:
    assert_allclose(bias_of_tester([check(200.0), check(202.0)]).u ** 2, 0.005**2 + 0.01**2 / 2.0)


def test_refusals() -> None:
    with pytest.raises(InvalidArgument, match="must be a check"):
        bias_of_tester([])
    with pytest.raises(InvalidArgument, match="tells no scatter"):
        bias_of_tester([check(200.0)])
