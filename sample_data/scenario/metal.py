"""The laws that the sample data obey, written for this folder alone. SI throughout."""

from dataclasses import dataclass
from math import exp, expm1, log, pi, radians, sin, sqrt
from typing import Final

__all__ = [
    "KGF_PER_MM2",
    "Metal",
    "brinell_diameter",
    "hardened",
    "hardening_work",
    "knoop_diagonal",
    "rolling_strain",
    "sized_hardness",
    "vickers_diagonal",
]

KGF_PER_MM2: Final = 9.80665e6  # Pa in one unit of a hardness number
_VICKERS: Final = 2.0 * sin(radians(68.0))  # contact area is d^2 over this
_KNOOP: Final = 14.22896  # long diagonal squared over projected area


@dataclass(frozen=True)
class Metal:
    """A metal that hardens from an annealed state by the law of Voce.

    Attributes
    ----------
    shear_modulus, burgers_vector, poisson_ratio, mass_density, molar_mass : float
        Constants. [Pa], [m], [1], [kg/m^3], [kg/mol]
    taylor : float
        Taylor factor times Taylor coefficient. [1]
    baseline : float
        What dislocations do not carry. [Pa]
    """

    shear_modulus: float
    burgers_vector: float
    poisson_ratio: float
    mass_density: float
    molar_mass: float
    taylor: float
    baseline: float

    def stress(self, density: float) -> float:
        """Give the dislocation stress [Pa] of a density (Taylor 1934)."""
        return self.taylor * self.shear_modulus * self.burgers_vector * sqrt(density)

    def density(self, stress: float) -> float:
        """Give the density [1/m^2] of a dislocation stress."""
        return (stress / (self.taylor * self.shear_modulus * self.burgers_vector)) ** 2

    def stored_energy(self, density: float) -> float:
        """Give the energy [J/m^3] of lines, half screw and half edge.

        Hirth and Lothe 1982: the mean of K b^2 / (4 pi) ln(R / b) with K = G for a
        screw and G / (1 - nu) for an edge, R the mean spacing.
        """
        factor = self.shear_modulus * (1.0 + 1.0 / (1.0 - self.poisson_ratio)) / 2.0
        reach = log(1.0 / (sqrt(density) * self.burgers_vector))
        return density * factor * self.burgers_vector**2 / (4.0 * pi) * reach


def hardened(start: float, strain: float, slope: float, saturation: float) -> float:
    """Give the dislocation stress [Pa] after a strain, from `start` (Voce 1948)."""
    return saturation - (saturation - start) * exp(-slope * strain / saturation)


def hardening_work(start: float, strain: float, slope: float, saturation: float) -> float:
    """Give the work [J/m^3] of that dislocation stress over that strain."""
    scale = saturation / slope
    return saturation * strain + (saturation - start) * scale * expm1(-strain / scale)


def rolling_strain(reduction: float) -> float:
    """Give the von Mises strain [1] of rolling by a reduction in thickness, plane strain."""
    return 2.0 / sqrt(3.0) * log(1.0 / (1.0 - reduction))


def vickers_diagonal(force: float, number: float) -> float:
    """Give the mean diagonal [um] of an indent of that hardness number (ISO 6507-1)."""
    return 1e6 * sqrt(_VICKERS * force / (number * KGF_PER_MM2))


def sized_hardness(force: float, bulk: float, depth: float) -> float:
    """Give what an indent reads [HV] where a large one reads `bulk` and h* is `depth` [um].

    H = H_0 sqrt(1 + h*/h), h = d / 7.0006 (Nix and Gao 1998): H and h follow one another.
    """
    number = bulk
    for _ in range(60):
        number = bulk * sqrt(1.0 + depth * 7.0006 / vickers_diagonal(force, number))
    return number


def knoop_diagonal(force: float, number: float) -> float:
    """Give the long diagonal [um] of an indent of that hardness number (ISO 4545-1)."""
    return 1e6 * sqrt(_KNOOP * force / (number * KGF_PER_MM2))


def brinell_diameter(force: float, number: float, ball: float) -> float:
    """Give the diameter [um] of an indent of that number (ISO 6506-1); `ball` in metre."""
    depth = force / (pi * ball * number * KGF_PER_MM2)
    return 2e6 * sqrt(depth * (ball - depth))
