"""The points of a curve as engineering stress and strain, in the sense of the test."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.errors import InvalidArgument
from coldwork.formulas.tensile import (
    engineering_from_true,
    engineering_strain,
    engineering_stress,
    true_plastic_strain,
    true_strain,
    true_stress,
)
from coldwork.reduce.curve import Curve, CurveFault, CurveSettings, FaultKind, Geometry

__all__ = ["Points", "engineering_points", "plastic_part", "plastic_states"]

FloatArray = NDArray[np.float64]

_MODES: Final = ("tension", "compression")
_LENGTHS: Final = ("extension", "crosshead")
_STRESSES: Final = ("engineering", "true")


@dataclass(frozen=True)
class Points:
    """Points that have both stress and strain.

    Attributes
    ----------
    index : ndarray of int64, shape (k,)
        Which points of the file they are.
    count : int
        Points in the file.
    time : ndarray of float64, shape (k,), or None
        [s]
    stress, strain : ndarray of float64, shape (k,)
        Engineering, positive in the sense of the test, as recorded: the toe is still in.
        [Pa], [1]
    sense : float
        1 in tension, -1 in compression. [1]
    """

    index: NDArray[np.int64]
    count: int
    time: FloatArray | None
    stress: FloatArray
    strain: FloatArray
    sense: float

    def __len__(self) -> int:
        return int(self.index.size)

    def fault(
        self, kind: FaultKind, span: tuple[int, int], value: float, limit: float, unit: str = "1"
    ) -> CurveFault:
        """Make a finding [`unit`] at places of these points, turned into points of the file."""
        start = int(self.index[min(span[0], len(self) - 1)])
        stop = int(self.index[min(span[1], len(self)) - 1]) + 1
        return CurveFault(kind, start, stop, value, limit, unit)


def engineering_points(curve: Curve, geometry: Geometry, settings: CurveSettings) -> Points:
    """Turn what the machine wrote into engineering stress and strain.

    Parameters
    ----------
    curve : Curve
        The points, n of them.
    geometry : Geometry
        Gauge length and area, for a curve of force and length.
    settings : CurveSettings
        Mode, and what a given stress is.

    Returns
    -------
    Points
        The k points that have both.

    Raises
    ------
    InvalidArgument
        If the curve brings neither pair or both, arrays differ in length, a needed
        dimension is missing, or a setting is none of its choices.
    """
    _check(curve, settings)
    stress, strain = _given(curve, geometry)
    there = np.isfinite(stress) & np.isfinite(strain)
    index = np.flatnonzero(there)
    stress, strain = stress[there], strain[there]
    time = None if curve.time is None else curve.time[there]
    sense = 1.0
    if settings.mode == "compression" and index.size:
        sense = -1.0
        greatest = int(np.argmax(np.abs(stress)))
        stress = stress * np.sign(stress[greatest])
        strain = strain * np.sign(strain[greatest] - strain[0])
    if settings.stress_is == "true":
        signed, strain = engineering_from_true(sense * stress, sense * strain)
        stress, strain = sense * signed, sense * strain
    return Points(index, int(there.size), time, stress, strain, sense)


def plastic_states(
    stress: FloatArray, strain: FloatArray, slope: float, sense: float, *, by_crosshead: bool
) -> tuple[FloatArray, FloatArray]:
    """Compute true stress and true plastic strain, positive in the sense of the test.

    Parameters
    ----------
    stress, strain : ndarray of float64, shape (n,)
        Engineering, positive in that sense, the toe taken off. [Pa], [1]
    slope : float
        Of the elastic part. [Pa]
    sense : float
        1 in tension, -1 in compression. [1]
    by_crosshead : bool
        Whether the elastic part of the strain is mostly the machine's. It then takes no
        part in the coupon's change of section, and the coupon's own, R / E, is neglected.

    Returns
    -------
    stress, strain : ndarray of float64, shape (n,)
        True. [Pa], [1]
    """
    if by_crosshead:
        plastic = sense * plastic_part(strain, stress, slope)
        return sense * true_stress(sense * stress, plastic), sense * true_strain(plastic)
    signed = sense * strain
    sigma = true_stress(sense * stress, signed)
    plastic = true_plastic_strain(true_strain(signed), sigma, slope)
    return sense * sigma, sense * plastic


def plastic_part(strain: FloatArray, stress: FloatArray, slope: float) -> FloatArray:
    """Take the elastic part, of the slope [Pa], off engineering strains [1]."""
    return np.asarray(strain - stress / slope)


def _given(curve: Curve, geometry: Geometry) -> tuple[FloatArray, FloatArray]:
    """Give stress and strain as the curve brings them, or from its force and length."""
    if curve.stress is not None and curve.strain is not None:
        return curve.stress, curve.strain
    if curve.force is None or curve.length is None:
        message = "curve must bring either force and length or stress and strain"
        raise InvalidArgument(message)
    _need("gauge_length", geometry.gauge_length)
    _need("area", geometry.area)
    stress = engineering_stress(curve.force, geometry.area)
    return stress, engineering_strain(curve.length, geometry.gauge_length)


def _check(curve: Curve, settings: CurveSettings) -> None:
    _one_of("mode", settings.mode, _MODES)
    by_force = curve.force is not None and curve.length is not None
    by_stress = curve.stress is not None and curve.strain is not None
    if by_force == by_stress:
        message = "curve must bring either force and length or stress and strain"
        raise InvalidArgument(message)
    if by_force:
        _one_of("strain_from", settings.strain_from, _LENGTHS)
    else:
        _one_of("stress_is", settings.stress_is, _STRESSES)
    arrays = (curve.time, curve.force, curve.length, curve.stress, curve.strain)
    sizes = {a.shape for a in arrays if a is not None}
    if len(sizes) > 1 or any(len(shape) != 1 for shape in sizes):
        message = f"curve must hold one point per row (its arrays have the shapes {sorted(sizes)})"
        raise InvalidArgument(message)
    low, high = settings.slope_between
    if not 0.0 <= low < high < 1.0:
        message = f"slope_between must rise within 0 and 1 (it is {low:g} to {high:g})"
        raise InvalidArgument(message)


def _one_of(name: str, value: str | None, choices: tuple[str, ...]) -> None:
    if value not in choices:
        message = f"{name} must be one of {', '.join(choices)} (it is {value})"
        raise InvalidArgument(message)


def _need(name: str, value: float) -> None:
    if not np.isfinite(value):
        message = f"{name} must be given for a curve of force and length"
        raise InvalidArgument(message)
