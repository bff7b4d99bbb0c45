"""What a tensile or compression curve is, and what its reduction gives back.

One coupon at a time, arrays in SI, no frames and no files. `reduce_curve` in
``reduce.curve_reduction`` turns a `Curve` into a `CurveResult`.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from typing import Final

import numpy as np
from numpy.typing import NDArray

__all__ = [
    "AREA",
    "EXTENSION",
    "FORCE",
    "SLOPE",
    "Curve",
    "CurveFault",
    "CurveResult",
    "CurveSettings",
    "FaultKind",
    "Fit",
    "Geometry",
    "NeckPoint",
    "Rate",
    "RateChange",
    "StrainPoint",
    "Valued",
]

FloatArray = NDArray[np.float64]

FORCE: Final = "tensile.force_u_rel"
EXTENSION: Final = "tensile.extension_u_rel"
AREA: Final = "tensile.area_u_rel"
SLOPE: Final = "tensile.slope_gpa"  # only where the sheet states the slope with a u


@dataclass(frozen=True)
class Curve:
    """One coupon's points in the order of the file.

    Either `force` and `length`, or `stress` and `strain`. In compression either sign
    will do, as long as a curve keeps to one.

    Attributes
    ----------
    time : ndarray of float64, shape (n,), or None
        Since any start; NaN absent. [s]
    force, length : ndarray of float64, shape (n,), or None
        Force, and extension or crosshead travel. [N], [m]
    stress, strain : ndarray of float64, shape (n,), or None
        Given instead; engineering or true as `CurveSettings.stress_is` says. [Pa], [1]
    """

    time: FloatArray | None = None
    force: FloatArray | None = None
    length: FloatArray | None = None
    stress: FloatArray | None = None
    strain: FloatArray | None = None


@dataclass(frozen=True)
class Geometry:
    """Dimensions of the coupon; NaN where a curve of stress and strain needs none.

    Attributes
    ----------
    gauge_length : float
        Length that the extension belongs to; in compression the height. [m]
    area : float
        Cross-section before the test. [m2]
    final_area : float or None
        Smallest cross-section of the neck; in compression the largest, at half
        height. [m2]
    neck_profile_radius : float or None
        Radius of the neck's outline in the plane of the axis (Bridgman's R). [m]
    """

    gauge_length: float = float("nan")
    area: float = float("nan")
    final_area: float | None = None
    neck_profile_radius: float | None = None


@dataclass(frozen=True)
class CurveSettings:
    """What the sheet's ``[tensile]`` says.

    Attributes
    ----------
    mode : str
        ``tension`` or ``compression``.
    strain_from : str or None
        ``extension`` or ``crosshead``; None where the curve brings stress and strain.
    stress_is : str or None
        ``engineering`` or ``true``; None where the curve brings force and length.
    slope_between : tuple of float
        Stated range of the elastic fit, as fractions of the 0.2 % proof stress. [1]
    slope : float or None
        Elastic slope as stated, instead of fitted. [Pa]
    slope_u : float
        Its standard uncertainty, shared by all coupons. [Pa]
    offsets : tuple of float
        Plastic offsets of the proof stresses; 0.002 is always evaluated. [1]
    reported_strains : tuple of float
        True plastic strains at which flow stress and work are wanted. [1]
    fit : tuple of str
        ``voce`` and, or, ``hollomon``.
    fit_between : tuple of float or None
        True plastic strains between which the laws and the hardening line are fitted;
        None takes them from the proof stress to the end of uniform strain. [1]
    force_u_rel, extension_u_rel, area_u_rel : float
        Relative standard uncertainties of the machine, shared by its coupons. [1]
    bridgman : bool
        Whether one more point is wanted, at the measured neck.
    """

    mode: str = "tension"
    strain_from: str | None = "extension"
    stress_is: str | None = None
    slope_between: tuple[float, float] = (0.1, 0.4)
    slope: float | None = None
    slope_u: float = 0.0
    offsets: tuple[float, ...] = (0.002,)
    reported_strains: tuple[float, ...] = ()
    fit: tuple[str, ...] = ()
    fit_between: tuple[float, float] | None = None
    force_u_rel: float = 0.0
    extension_u_rel: float = 0.0
    area_u_rel: float = 0.0
    bridgman: bool = False


@dataclass(frozen=True)
class Valued:
    """A result with its two kinds of uncertainty.

    Attributes
    ----------
    value : float
        The result. [SI]
    u_own : float
        Standard uncertainty from the noise of the coupon's own points. [SI]
    sensitivities : mapping of str to float
        Derivative by the relative error of each machine input that is shared (by the
        slope itself for `SLOPE`), also where its uncertainty is zero. [SI]
    u_shared : mapping of str to float
        Signed contribution of each: sensitivity times standard uncertainty. [SI]
    """

    value: float
    u_own: float
    sensitivities: Mapping[str, float] = field(default_factory=dict)
    u_shared: Mapping[str, float] = field(default_factory=dict)

    @property
    def u(self) -> float:
        """Standard uncertainty [SI], own and shared together."""
        return float(np.sqrt(self.u_own**2 + sum(c**2 for c in self.u_shared.values())))


@dataclass(frozen=True)
class Fit:
    """A law fitted to the points of one curve.

    Attributes
    ----------
    law : str
        ``voce``, ``hollomon`` or ``kocks-mecking``.
    names : tuple of str
        Of the p parameters.
    parameters : ndarray of float64, shape (p,)
        Values. [SI]
    covariance : ndarray of float64, shape (p, p)
        Own: from the noise of the points. [SI]
    u_shared : mapping of str to ndarray of float64, shape (p,)
        Signed contribution of each shared machine input to each parameter. [SI]
    residual_sd : float
        Standard deviation of the points about the law. [Pa]
    degrees_of_freedom : float
        Points less parameters. [1]
    between : tuple of float
        True plastic strains between which it was fitted. [1]
    misfit : float
        `residual_sd` over the noise of the points: well above 1 the law does not
        describe this metal, and `covariance` is blown up accordingly. [1]
    """

    law: str
    names: tuple[str, ...]
    parameters: FloatArray
    covariance: FloatArray
    u_shared: Mapping[str, FloatArray]
    residual_sd: float
    degrees_of_freedom: float
    between: tuple[float, float]
    misfit: float

    def valued(self, name: str) -> Valued:
        """Give one parameter [SI] as a result."""
        i = self.names.index(name)
        shared = {k: float(c[i]) for k, c in self.u_shared.items()}
        return Valued(float(self.parameters[i]), float(np.sqrt(self.covariance[i, i])), {}, shared)


@dataclass(frozen=True)
class StrainPoint:
    """The state at a reported true plastic strain.

    Attributes
    ----------
    strain : float
        True plastic strain. [1]
    flow_stress : Valued
        True stress. [Pa]
    work : Valued
        Plastic work per volume up to there. [J/m3]
    rate : Valued
        Hardening rate, true stress by true plastic strain. [Pa]
    """

    strain: float
    flow_stress: Valued
    work: Valued
    rate: Valued


@dataclass(frozen=True)
class NeckPoint:
    """The one state past necking that a measured neck gives.

    Attributes
    ----------
    strain : float
        Mean true strain of the neck, ln(A0 / A). [1]
    mean_stress : Valued
        Last force over the neck's cross-section. [Pa]
    factor : float
        Bridgman's correction. [1]
    flow_stress : Valued
        Mean stress times the factor. [Pa]
    """

    strain: float
    mean_stress: Valued
    factor: float
    flow_stress: Valued


@dataclass(frozen=True)
class Rate:
    """Hardening rate along the curve, at up to a few hundred places.

    Attributes
    ----------
    strain : ndarray of float64, shape (k,)
        True plastic strain, rising. [1]
    stress : ndarray of float64, shape (k,)
        True stress, smoothed. [Pa]
    rate : ndarray of float64, shape (k,)
        True stress by true plastic strain. [Pa]
    u : ndarray of float64, shape (k,)
        Own standard uncertainty of `rate`. [Pa]
    """

    strain: FloatArray
    stress: FloatArray
    rate: FloatArray
    u: FloatArray


@dataclass(frozen=True)
class RateChange:
    """A stretch of the test at one speed of straining.

    Attributes
    ----------
    start, stop : int
        Points of the file, `stop` not included.
    strain_rate : float
        Engineering strain per time over the stretch. [1/s]
    """

    start: int
    stop: int
    strain_rate: float


class FaultKind(StrEnum):
    """What may be found on a curve. Which of it is grave is for the rules to say."""

    TOO_FEW_POINTS = "too-few-points"  # nothing can be reduced
    FEW_ELASTIC_POINTS = "few-elastic-points"
    ENDS_BEFORE_YIELD = "ends-before-yield"
    STRESS_IMPOSSIBLE = "stress-impossible"  # such as kN read as N
    SLOPE_IMPOSSIBLE = "slope-impossible"  # such as a strain in per cent
    ZERO_OFFSET = "zero-offset"
    GRIP_SLIP = "grip-slip"
    EXTENSOMETER_SLIP = "extensometer-slip"
    EXTENSOMETER_OFF = "extensometer-off"
    SATURATION = "saturation"
    TIME_BACKWARD = "time-backward"
    TIME_STANDING = "time-standing"
    UNLOADING_LOOP = "unloading-loop"
    SERRATIONS = "serrations"  # metal, not a fault
    LUEDERS_PLATEAU = "lueders-plateau"  # metal, not a fault
    NO_MAXIMUM = "no-maximum"  # force still rising at the end: uniform strain not reached
    BARRELLING = "barrelling"
    FRICTION = "friction"


@dataclass(frozen=True)
class CurveFault:
    """One finding on a curve.

    Attributes
    ----------
    kind : FaultKind
        What it is.
    start, stop : int
        Points of the file where it is, `stop` not included.
    value : float
        What was found, in the unit of `limit`.
    limit : float
        What it was held against.
    unit : str
        UCUM unit of both (SI).
    """

    kind: FaultKind
    start: int
    stop: int
    value: float
    limit: float
    unit: str = "1"


@dataclass(frozen=True)
class CurveResult:
    """What one curve came to. A result that does not exist is None, never zero.

    Attributes
    ----------
    faults : tuple of CurveFault
        All findings, in the order of `FaultKind`.
    noise_stress, noise_strain : float
        Standard deviation of a single point, estimated from the curve. [Pa], [1]
    slope : Valued or None
        Elastic slope of engineering stress by engineering strain. [Pa]
    slope_is_modulus : bool
        False for crosshead travel, where it is the machine's, and is not reported.
    slope_range : tuple of int
        Points of the file between which it was fitted (empty where stated).
    toe_strain : Valued or None
        Where the slope line meets zero stress: subtracted from every strain. [1]
    proof : mapping of float to Valued
        Proof stress by offset; an offset that the curve does not reach is missing. [Pa]
    upper_yield, lower_yield : Valued or None
        Where the metal yields at a point. [Pa]
    yield_elongation : Valued or None
        Engineering strain of the plateau. [1]
    tensile_strength : Valued or None
        R_m, the greatest recorded force over the area; its u holds the bias below. [Pa]
    tensile_strength_bias : float
        By how much the greatest recorded point is above the smoothed top. [Pa]
    uniform_elongation : Valued or None
        A_g, engineering, plastic. [1]
    total_elongation_at_max : Valued or None
        A_gt, engineering. [1]
    uniform_plastic_strain : Valued or None
        True plastic strain at the greatest force. [1]
    work_to_uniform : Valued or None
        Plastic work per volume up to there. [J/m3]
    fits : mapping of str to Fit
        The laws that were asked for: ``voce`` (``yield_stress``, ``saturation_stress``,
        and ``initial_hardening``, the slope that its line of rate against stress has at
        zero stress), ``hollomon`` (``coefficient``, ``exponent``).
    kocks_mecking : Fit or None
        ``initial_hardening`` and ``saturation_stress`` of the whole flow stress (as if
        the baseline were 0); ``formulas.kocks_mecking`` takes the baseline off.
    at_strains : tuple of StrainPoint
        At the reported strains that lie before the end of uniform strain.
    neck : NeckPoint or None
        Bridgman, where asked for.
    rate : Rate or None
        Hardening rate along the curve.
    rate_changes : tuple of RateChange
        Stretches of steady straining; empty without time.
    engineering_stress, engineering_strain : ndarray of float64, shape (n,)
        All points of the file, the strain toe-corrected; in compression positive.
        [Pa], [1]
    true_stress, true_plastic_strain : ndarray of float64, shape (m,)
        From the elastic range to the end of uniform strain. [Pa], [1]
    true_start : int
        Point of the file that is the first of these.
    """

    faults: tuple[CurveFault, ...]
    noise_stress: float
    noise_strain: float
    engineering_stress: FloatArray
    engineering_strain: FloatArray
    true_stress: FloatArray
    true_plastic_strain: FloatArray
    true_start: int = 0
    slope: Valued | None = None
    slope_is_modulus: bool = True
    slope_range: tuple[int, int] = (0, 0)
    toe_strain: Valued | None = None
    proof: Mapping[float, Valued] = field(default_factory=dict)
    upper_yield: Valued | None = None
    lower_yield: Valued | None = None
    yield_elongation: Valued | None = None
    tensile_strength: Valued | None = None
    tensile_strength_bias: float = float("nan")
    uniform_elongation: Valued | None = None
    total_elongation_at_max: Valued | None = None
    uniform_plastic_strain: Valued | None = None
    work_to_uniform: Valued | None = None
    fits: Mapping[str, Fit] = field(default_factory=dict)
    kocks_mecking: Fit | None = None
    at_strains: tuple[StrainPoint, ...] = ()
    neck: NeckPoint | None = None
    rate: Rate | None = None
    rate_changes: tuple[RateChange, ...] = ()

    def found(self, kind: FaultKind) -> bool:
        """Say whether a fault of this kind was found."""
        return any(fault.kind == kind for fault in self.faults)
