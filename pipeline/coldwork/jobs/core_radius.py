"""The core radius that makes computed and measured heat of a recrystallisation peak agree."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.chain import Start, line
from coldwork.errors import BatchRefused, Cause
from coldwork.inputs.method import Method
from coldwork.inputs.sheet import method_of
from coldwork.inputs.source import read_sheet
from coldwork.intake.pairs import Pairs
from coldwork.measured import Measured, Value

__all__ = ["CORE_RADIUS_KEY", "RadiusFit", "conditions_of", "fit_core_radius"]

FloatArray = NDArray[np.float64]

CORE_RADIUS_KEY: Final = "line_energy.core_radius_b"
_BELIEVABLE: Final = (0.1, 2.0)  # Burgers vectors; beyond it is no core radius but another fault
_DENSITY: Final = "density"


@dataclass(frozen=True)
class RadiusFit:
    """Core radii of n coupons, and their mean.

    Attributes
    ----------
    value : float
        Weighted geometric mean. [Burgers vectors]
    u_log : float
        Standard uncertainty of its logarithm from the points' stated ones. [1]
    radius, u_log_each : ndarray of float64, shape (n,)
        Of each coupon. [Burgers vectors], [1]
    residual, leverage : ndarray of float64, shape (n,)
        Of the logarithms over their standard uncertainties; share of each in the mean. [1]
    chi_squared : float
        Of the logarithms about their mean. [1]
    """

    value: float
    u_log: float
    radius: FloatArray
    u_log_each: FloatArray
    residual: FloatArray
    leverage: FloatArray
    chi_squared: float


def conditions_of(method: Method) -> dict[str, object]:
    """Give what a sheet must say for the core radius to hold there."""
    return {
        "material.name": method.material,
        "line_energy.elasticity": method.laws.elasticity,
        "line_energy.outer_radius": method.laws.outer_radius,
    }


def fit_core_radius(
    pairs: Pairs, sheet: Path, u: Mapping[str, FloatArray], correlation: FloatArray
) -> tuple[RadiusFit, Method]:
    r"""Find the core radius from densities and the heats of their recrystallisation peaks.

    .. math:: \ln r_i = \ln r_0 + (u_i(r_0) - q_i) / B_i, \qquad B = -\partial u / \partial \ln r_0

    with u the computed energy per mass and q the heat; u is linear in the logarithm.

    Parameters
    ----------
    pairs : Pairs
        With ``dislocation_density_per_m2`` and ``heat_j_per_g``.
    sheet : Path
        Batch folder whose sheet gives every other constant; they count as exact, since the radius
        belongs to them.
    u : mapping of str to ndarray, shape (n,)
        Standard uncertainties of those two columns. [their units]
    correlation : ndarray, shape (n,)
        Of the errors of the two. [1]

    Returns
    -------
    RadiusFit
        The radius.
    Method
        The method of that sheet.

    Raises
    ------
    BatchRefused
        If the sheet cannot be used, the coupons have no line energy, or the radius is outside
        0.1 to 2 Burgers vectors.

    References
    ----------
    Hirth and Lothe, Theory of Dislocations (1982): core radii of metals are of the order of
    the Burgers vector, between a quarter of it and all of it (from memory).
    """
    method = method_of(read_sheet(sheet), sheet, with_files=False)
    if method.laws.outer_radius == "grain":
        what = "the outer radius is the grain, which paired measurements do not tell"
        cause = Cause(str(sheet), what, "The energy must follow from the density.", "Use another.")
        raise BatchRefused(str(sheet), [cause])
    density = units.to_si(pairs.columns["dislocation_density_per_m2"], "m-2")
    heat = units.to_si(pairs.columns["heat_j_per_g"], "J/g")
    stored, by_density, by_log = _computed(method, density)
    if not np.isfinite(stored).all():
        ids = [pairs.ids[i] for i in np.flatnonzero(~np.isfinite(stored))]
        what = f"{', '.join(ids[:5])}: the density leaves no room for a line energy"
        cause = Cause(pairs.name, what, "The outer radius lies beyond the core.", "Look at them.")
        raise BatchRefused(pairs.name, [cause])
    per_log = -by_log
    log = np.log(method.inputs[CORE_RADIUS_KEY].value) + (stored - heat) / per_log
    by_heat = -1.0 / per_log * units.to_si(u["heat_j_per_g"], "J/g")
    slope = by_density / per_log - (stored - heat) / (per_log * density)  # B goes with the density
    by_rho = slope * u["dislocation_density_per_m2"]
    variance = by_heat**2 + by_rho**2 + 2.0 * correlation * by_heat * by_rho
    weight = 1.0 / variance
    mean = float(weight @ log / weight.sum())
    value = float(np.exp(mean))
    if not _BELIEVABLE[0] <= value <= _BELIEVABLE[1]:
        what = f"the core radius comes out as {value:.3g} Burgers vectors"
        why = (
            f"A core is {_BELIEVABLE[0]:g} to {_BELIEVABLE[1]:g} of them; outside, the heat is not "
        )
        why += "that of the dislocations alone, or the densities are off."
        mend = "Take the heat of the recrystallisation peak alone, and look at the densities."
        raise BatchRefused(pairs.name, [Cause(pairs.name, what, why, mend)])
    residual = (log - mean) / np.sqrt(variance)
    return (
        RadiusFit(
            value,
            float(weight.sum() ** -0.5),
            np.exp(log),
            np.sqrt(variance),
            residual,
            weight / weight.sum(),
            float(residual @ residual),
        ),
        method,
    )


def _computed(method: Method, density: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the stored energy per mass, its slope in the density and in the log of the radius."""
    inputs: dict[str, Value] = {name: np.float64(x.value) for name, x in method.inputs.items()}
    radius = method.inputs[CORE_RADIUS_KEY].value
    inputs[CORE_RADIUS_KEY] = Measured.of_input(CORE_RADIUS_KEY, radius)
    nothing = np.full(density.shape, np.nan)
    scale = np.full(density.shape, -1, dtype=np.int8)
    start = Start(nothing, scale, nothing, nothing, nothing, nothing, method.plastic_strain)
    rho = Measured(density, {_DENSITY: np.asarray(1.0)})
    found: Any = line(method.laws, inputs, rho, start)["stored_energy_j_per_g"]
    ones = np.ones(density.shape)
    return (
        found.value,
        found.sensitivities[_DENSITY] * ones,
        found.sensitivities[CORE_RADIUS_KEY] * radius * ones,
    )
