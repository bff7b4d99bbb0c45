"""The line of rate against stress, seen from the baseline."""

import numpy as np
from numpy.testing import assert_allclose

from coldwork.formulas.hardening_laws import voce_stress
from coldwork.formulas.kocks_mecking import (
    hardening_above_baseline,
    saturation_above_baseline,
)


def test_the_same_curve_less_its_baseline_follows_the_shifted_line() -> None:
    # The dislocation stress of a Voce metal is a Voce metal: same decay, counted from the
    # baseline. theta_0 / sigma_s is the decay and stays.
    baseline, strain = 50e6, np.linspace(0.0, 0.4, 9)
    whole = voce_stress(strain, 90e6, 370e6, 1.9e9)
    theta = hardening_above_baseline(1.9e9, 370e6, baseline)
    limit = saturation_above_baseline(370e6, baseline)
    assert_allclose(voce_stress(strain, 40e6, limit, theta), whole - baseline, rtol=1e-13)
    assert_allclose(theta / limit, 1.9e9 / 370e6, rtol=1e-15)


def test_no_baseline_changes_nothing() -> None:
    assert hardening_above_baseline(1.9e9, 370e6, 0.0) == 1.9e9
    assert saturation_above_baseline(370e6, 0.0) == 370e6
