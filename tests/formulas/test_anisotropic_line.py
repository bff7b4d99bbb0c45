"""Energy factors of lines in crystals: closed forms, printed values, an independent integral."""

import tomllib
from pathlib import Path
from typing import Final

import numpy as np
import pytest
from numpy.testing import assert_allclose
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas.anisotropic_line import (
    UNIFORM_ANGLES,
    energy_factor_of_line,
    mean_energy_factor,
)
from coldwork.formulas.crystals import cubic_stiffness, hexagonal_stiffness, stiffness_tensor
from coldwork.formulas.slip_systems import slip_system

REFERENCE: Final = Path(__file__).parents[1] / "reference"
PRINTED: Final = tomllib.loads((REFERENCE / "crystal_energy_factors.toml").read_text())
CUBIC: Final[dict[str, list[float]]] = PRINTED["cubic"]
HEXAGONAL: Final[dict[str, list[float]]] = PRINTED["hexagonal"]
FCC: Final = ("Al", "Cu", "Ag", "Au", "Ni", "Pb")
DIGIT = 0.0051  # GPa; printed to two decimals
HEXAGONAL_DIGIT = 0.012  # the constants of Ti were rounded to two decimals as well
SCREW, EDGE, SIXTY = 0.0, np.pi / 2, np.pi / 3


def isotropic(shear: float, poisson: float, ratio: float = 1.0) -> NDArray[np.float64]:
    return cubic_stiffness(
        2 * shear * (1 - poisson) / (1 - 2 * poisson),
        2 * shear * poisson / (1 - 2 * poisson),
        shear * ratio,
    )


def factor(c: NDArray[np.float64], system: str, angle: float, **kinds: bool) -> float:
    slip = slip_system(system, hexagonal=kinds.get("hexagonal", False))
    return float(energy_factor_of_line(c, slip.burgers, slip.normal, angle)[0][0])


def by_integral(
    c: NDArray[np.float64],
    burgers: tuple[float, float, float],
    normal: tuple[float, float, float],
    angle: float,
    points: int = 400,
) -> float:
    """Barnett and Lothe's integral for L by the rule of rectangles, which a period makes exact.

    L = (1/pi) int_0^pi [(mm) - (mn)(nn)^-1(nm)] dw, m and n turning about the line.
    """
    tensor = stiffness_tensor(c)
    b, n0 = np.array(burgers), np.array(normal)
    line = np.cos(angle) * b + np.sin(angle) * np.cross(n0, b)
    m0 = np.cross(n0, line)
    total = np.zeros((3, 3))
    for w in np.arange(points) * np.pi / points:
        m, n = np.cos(w) * m0 + np.sin(w) * n0, -np.sin(w) * m0 + np.cos(w) * n0
        mm = np.einsum("ijkl,i,l->jk", tensor, m, m)
        mn = np.einsum("ijkl,i,l->jk", tensor, m, n)
        nn = np.einsum("ijkl,i,l->jk", tensor, n, n)
        total += mm - mn @ np.linalg.solve(nn, mn.T)
    return float(b @ (total / points) @ b)


@pytest.mark.parametrize("metal", FCC)
def test_fcc_lines_in_the_printed_digits(metal: str) -> None:
    c11, c12, c44, *_, screw, edge, sixty = CUBIC[metal]
    c = cubic_stiffness(c11, c12, c44)
    for angle, printed in ((SCREW, screw), (EDGE, edge), (SIXTY, sixty)):
        assert_allclose(factor(c, "{111}<110>", angle), printed, atol=DIGIT)


@pytest.mark.parametrize("metal", sorted(set(CUBIC) - set(FCC)))
def test_bcc_lines_in_the_printed_digits(metal: str) -> None:
    c11, c12, c44, *_, screw, edge, other = CUBIC[metal]
    c = cubic_stiffness(c11, c12, c44)
    for system, angle, printed in (
        ("{110}<111>", SCREW, screw),
        ("{110}<111>", EDGE, edge),
        ("{112}<111>", EDGE, other),
    ):
        assert_allclose(factor(c, system, angle), printed, atol=DIGIT)


@pytest.mark.parametrize("metal", HEXAGONAL)
def test_hexagonal_lines_in_the_printed_digits(metal: str) -> None:
    *constants, _, _, _, screw, basal, prismatic = HEXAGONAL[metal]
    c = hexagonal_stiffness(*constants)
    for system, angle, printed in (
        ("{0001}<11-20>", SCREW, screw),
        ("{0001}<11-20>", EDGE, basal),
        ("{10-10}<11-20>", EDGE, prismatic),
    ):
        found = factor(c, system, angle, hexagonal=True)
        assert_allclose(found, printed, atol=HEXAGONAL_DIGIT)


@pytest.mark.parametrize("metal", FCC)
def test_the_fcc_screw_has_a_closed_form(metal: str) -> None:
    # sqrt(C44 (C11 - C12) / 2): quoted by several public sources for <110> screws.
    c11, c12, c44, *_ = CUBIC[metal]
    closed = np.sqrt(c44 * (c11 - c12) / 2)
    assert_allclose(factor(cubic_stiffness(c11, c12, c44), "{111}<110>", SCREW), closed, rtol=1e-12)


@pytest.mark.parametrize("metal", HEXAGONAL)
def test_the_hexagonal_screw_has_a_closed_form(metal: str) -> None:
    c11, c12, _, _, c44, *_ = HEXAGONAL[metal]
    c = hexagonal_stiffness(*HEXAGONAL[metal][:5])
    closed = np.sqrt(c44 * (c11 - c12) / 2)  # sqrt(C44 C66)
    assert_allclose(factor(c, "{0001}<11-20>", SCREW, hexagonal=True), closed, rtol=1e-12)


@pytest.mark.parametrize("angle", np.linspace(0, np.pi, 13))
def test_the_isotropic_limit_for_all_angles(angle: float) -> None:
    # G (1 - nu cos^2 beta) / (1 - nu): Hirth and Lothe (1982), chapter 3.
    g, nu = 50e9, 0.3
    wanted = g * (1 - nu * np.cos(angle) ** 2) / (1 - nu)
    assert_allclose(factor(isotropic(g, nu), "{111}<110>", angle), wanted, rtol=1e-12)


@pytest.mark.parametrize("off", [-1e-6, -1e-12, 0.0, 1e-12, 1e-6])
def test_smooth_through_the_isotropic_point(off: float) -> None:
    # K changes by no more than the constants do, at the point itself as beside it.
    for angle in (SCREW, SIXTY, EDGE):
        at = factor(isotropic(50e9, 0.3), "{111}<110>", angle)
        near = factor(isotropic(50e9, 0.3, 1 + off), "{111}<110>", angle)
        assert abs(near / at - 1) <= abs(off) + 1e-14


@pytest.mark.parametrize("angle", [SCREW, 0.4, SIXTY, EDGE, 2.3])
@pytest.mark.parametrize("system", ["{110}<111>", "{112}<111>", "{111}<110>"])
def test_against_an_independent_integral(system: str, angle: float) -> None:
    slip = slip_system(system, hexagonal=False)
    for metal in ("Fe", "Nb", "Pb"):
        c = cubic_stiffness(*CUBIC[metal][:3])
        integral = by_integral(c, slip.burgers, slip.normal, angle)
        assert_allclose(factor(c, system, angle), integral, rtol=1e-12)


def test_a_general_hexagonal_line_against_the_integral() -> None:
    slip = slip_system("{11-22}<11-23>", hexagonal=True, c_over_a=1.588)
    c = hexagonal_stiffness(*HEXAGONAL["Ti"][:5])
    found = energy_factor_of_line(c, slip.burgers, slip.normal, 0.7)[0][0]
    assert_allclose(found, by_integral(c, slip.burgers, slip.normal, 0.7), rtol=1e-12)


def test_an_angle_of_the_mix_stands_for_both_senses_of_turn() -> None:
    slip = slip_system("{110}<111>", hexagonal=False)
    c = cubic_stiffness(*CUBIC["Fe"][:3])
    turned = energy_factor_of_line(c, slip.burgers, slip.normal, [0.7, -0.7])[0]
    mean = mean_energy_factor(c, slip.burgers, slip.normal, [0.7], [1.0])[0]
    assert_allclose(mean, turned.mean(), rtol=1e-14)


def test_a_uniform_mix_is_the_mean_over_the_angle() -> None:
    slip = slip_system("{111}<110>", hexagonal=False)
    c = cubic_stiffness(*CUBIC["Cu"][:3])
    share = np.full(UNIFORM_ANGLES.size, 1 / UNIFORM_ANGLES.size)
    few = mean_energy_factor(c, slip.burgers, slip.normal, UNIFORM_ANGLES, share)[0]
    fine = np.arange(1000) * np.pi / 1000
    many = energy_factor_of_line(c, slip.burgers, slip.normal, fine)[0].mean()
    assert_allclose(few, many, rtol=1e-13)


def test_slopes_by_the_constants_against_differences() -> None:
    slip = slip_system("{110}<111>", hexagonal=False)
    base = np.array(CUBIC["Fe"][:3])
    changes = np.array([cubic_change(i) for i in range(3)])
    _, slopes = energy_factor_of_line(
        cubic_stiffness(*base), slip.burgers, slip.normal, [0.6], changes
    )
    for i in range(3):
        step = np.zeros(3)
        step[i] = 1e-3
        up, down = (
            energy_factor_of_line(cubic_stiffness(*x), slip.burgers, slip.normal, [0.6])[0]
            for x in (base + step, base - step)
        )
        assert_allclose(slopes[0, i], (up - down) / 2e-3, rtol=1e-8)


def test_slopes_add_up_to_the_factor_since_it_scales_with_the_constants() -> None:
    slip = slip_system("{111}<110>", hexagonal=False)
    base = np.array(CUBIC["Cu"][:3])
    changes = np.array([cubic_change(i) for i in range(3)])
    k, slopes = energy_factor_of_line(
        cubic_stiffness(*base), slip.burgers, slip.normal, [0.0, 1.0], changes
    )
    assert_allclose(slopes @ base, k, rtol=1e-13)  # Euler's theorem


def cubic_change(which: int) -> NDArray[np.float64]:
    change = np.zeros((6, 6))
    off_diagonal = 1.0 - np.eye(3)
    if which == 0:
        change[:3, :3] = np.eye(3)
    elif which == 1:
        change[:3, :3] = off_diagonal
    else:
        change[3:, 3:] = np.eye(3)
    return change


def test_many_crystals_at_once() -> None:
    slip = slip_system("{111}<110>", hexagonal=False)
    c = cubic_stiffness(np.array([168.4, 108.2]), np.array([121.4, 61.3]), np.array([75.4, 28.5]))
    k, _ = energy_factor_of_line(c, slip.burgers, slip.normal, [SCREW, EDGE])
    assert k.shape == (2, 2)
    assert_allclose(k, [[42.09, 74.02], [25.85, 40.37]], atol=DIGIT)


def test_a_burgers_vector_out_of_the_plane_is_refused() -> None:
    with pytest.raises(InvalidArgument, match="burgers must lie in the slip plane"):
        energy_factor_of_line(cubic_stiffness(168.4, 121.4, 75.4), (1, 1, 0), (1, 1, 1), 0.0)
