"""Nominal test forces against the standards' tables."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from coldwork.rules.forces import HBW, HK, HV, force_labels, force_not_nominal, nominal_force

# Forces in N as ISO 6507-1 prints them, to four figures (from memory; each is also its kgf
# times 9.80665).
PRINTED = {
    "HV0.01": 0.09807,
    "HV0.1": 0.9807,
    "HV0.2": 1.961,
    "HV0.3": 2.942,
    "HV0.5": 4.903,
    "HV1": 9.807,
    "HV2": 19.61,
    "HV3": 29.42,
    "HV5": 49.03,
    "HV10": 98.07,
    "HV20": 196.1,
    "HV30": 294.2,
    "HV50": 490.3,
    "HV100": 980.7,
}


def codes(scale: int, n: int = 1) -> np.ndarray[tuple[int], np.dtype[np.int8]]:
    return np.full(n, scale, dtype=np.int8)


@pytest.mark.parametrize(("label", "force"), PRINTED.items())
def test_a_printed_vickers_force_is_nominal_and_named(label: str, force: float) -> None:
    scale, ball = codes(HV), np.array([np.nan])
    nominal = nominal_force(scale, np.array([force]), ball)
    assert_allclose(nominal, force, rtol=3e-4)  # four printed figures
    assert force_labels(scale, nominal, ball).to_pylist() == [label]
    fired, value = force_not_nominal(scale, np.array([force]), ball)
    assert not fired[0]
    assert abs(value[0]) < 3e-4


@pytest.mark.parametrize(
    ("ball_mm", "force", "label"),
    [
        # ISO 6506-1, table of test conditions (from memory): 0.102 F/D2 of 30, 10, 30, 30, 2.5.
        (10.0, 29420.0, "HBW 10/3000"),
        (10.0, 9807.0, "HBW 10/1000"),
        (5.0, 7355.0, "HBW 5/750"),
        (2.5, 1839.0, "HBW 2.5/187.5"),
        (10.0, 2452.0, "HBW 10/250"),
        # 210 HBW 5/250: 250 kgf are 2.452 kN.
        (5.0, 2452.0, "HBW 5/250"),
        (1.0, 294.2, "HBW 1/30"),
    ],
)
def test_a_brinell_force_goes_with_the_square_of_the_ball(
    ball_mm: float, force: float, label: str
) -> None:
    scale, f, ball = codes(HBW), np.array([force]), np.array([ball_mm * 1e-3])
    nominal = nominal_force(scale, f, ball)
    assert force_labels(scale, nominal, ball).to_pylist() == [label]
    assert not force_not_nominal(scale, f, ball)[0][0]


def test_knoop_forces_are_those_of_its_own_table() -> None:
    # ISO 4545-1 (from memory): HK0.1 is 0.9807 N; there is no HK0.015 as there is an HV0.015.
    force, ball = np.array([0.9807, 0.015 * 9.80665]), np.full(2, np.nan)
    labels = force_labels(codes(HK, 2), nominal_force(codes(HK, 2), force, ball), ball)
    assert labels.to_pylist() == ["HK0.1", "HK0.015"]
    assert force_not_nominal(codes(HK, 2), force, ball)[0].tolist() == [False, True]
    assert force_not_nominal(codes(HV, 2), force, ball)[0].tolist() == [False, False]


@pytest.mark.parametrize(
    ("force", "fired"), [(98.07, False), (98.98, False), (99.2, True), (97.2, False), (97.0, True)]
)
def test_a_force_may_be_one_per_cent_off(force: float, fired: bool) -> None:
    found, value = force_not_nominal(codes(HV), np.array([force]), np.array([np.nan]))
    assert found[0] == fired
    assert_allclose(value, force / 98.0665 - 1.0, rtol=0.0, atol=1e-15)


def test_a_force_in_the_wrong_unit_fires() -> None:
    # 10 kgf written into a column of newtons is near no force of the table but HV1.
    fired, _ = force_not_nominal(codes(HV), np.array([10.0]), np.array([np.nan]))
    assert fired[0]


def test_an_odd_force_keeps_its_own_name_and_stays_one_group() -> None:
    force, ball = np.array([70.0, 70.04, 95.0]), np.full(3, np.nan)
    nominal = nominal_force(codes(HV, 3), force, ball)
    assert nominal[0] == nominal[1]
    assert force_labels(codes(HV, 3), nominal, ball).to_pylist() == ["HV7.1", "HV7.1", "HV10"]
    assert force_not_nominal(codes(HV, 3), force, ball)[0].all()


def test_what_is_missing_has_no_nominal_force_and_no_name() -> None:
    scale = np.array([HV, HBW, -1, HBW], dtype=np.int8)
    force = np.array([np.nan, 7355.0, 98.07, 7355.0])
    ball = np.array([np.nan, np.nan, np.nan, 5e-3])
    nominal = nominal_force(scale, force, ball)
    assert np.isnan(nominal).tolist() == [True, True, True, False]
    assert force_labels(scale, nominal, ball).to_pylist() == [None, None, None, "HBW 5/750"]
    assert force_not_nominal(scale, force, ball)[0].tolist() == [False] * 4


def test_no_readings_have_no_names() -> None:
    none = np.empty(0)
    assert len(force_labels(np.empty(0, dtype=np.int8), none, none)) == 0


def test_names_of_many_coupons_of_two_scales() -> None:
    n = 200_000
    scale = np.tile(np.array([HV, HBW], dtype=np.int8), n // 2)
    force = np.where(scale == HV, 98.0665, 7354.9875)
    labels = force_labels(scale, force, np.full(n, 5e-3))
    assert labels.slice(n - 2).to_pylist() == ["HV10", "HBW 5/750"]
    assert len(labels.unique()) == 2
