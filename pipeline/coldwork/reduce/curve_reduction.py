"""One curve to its results: the steps in order."""

from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import (
    Curve,
    CurveFault,
    CurveResult,
    CurveSettings,
    FaultKind,
    Fit,
    Geometry,
    StrainPoint,
    Valued,
)
from coldwork.reduce.curve_branch import Branch, find_branch, moving_mean
from coldwork.reduce.curve_choices import choose, fitted_places
from coldwork.reduce.curve_elastic import Elastic, find_elastic
from coldwork.reduce.curve_laws import fit_hollomon, fit_voce, rate_along
from coldwork.reduce.curve_points import Points, engineering_points
from coldwork.reduce.curve_uncertainty import Budget, budget_of
from coldwork.reduce.curve_values import Choices
from coldwork.reduce.curve_yield import Yield, find_yield

__all__ = ["LEAST_POINTS", "reduce_curve"]

FloatArray = NDArray[np.float64]

LEAST_POINTS: Final = 20  # with both stress and strain, below which a curve is not reduced


def reduce_curve(curve: Curve, geometry: Geometry, settings: CurveSettings) -> CurveResult:
    """Reduce one coupon's curve after ISO 6892-1.

    Parameters
    ----------
    curve : Curve
        The points, n of them.
    geometry : Geometry
        Dimensions.
    settings : CurveSettings
        What the sheet says.

    Returns
    -------
    CurveResult
        All that the curve gives; what it does not give is None, with a fault that says why.

    Raises
    ------
    InvalidArgument
        If the settings contradict each other or the curve, or an array has another
        length than the rest.
    """
    points = engineering_points(curve, geometry, settings)
    branch = find_branch(points, len(points))
    elastic = find_elastic(branch, settings.slope_between, settings.slope)
    assert elastic is not None
    yielding = find_yield(branch, elastic)
    choices = choose(branch, elastic, settings, yielding, points.sense)
    budget = budget_of(branch, choices, settings, points.sense)
    places = fitted_places(budget.state, choices, settings, yielding)
    x, y = budget.state.strain[places], budget.state.stress[places]
    fits = {}
    voce = fit_voce(y, x)
    km = None
    if voce is not None:
        v = budget.fit("voce", voce, places)
        i = [2, 1]
        km = Fit("kocks-mecking", ("initial_hardening", "saturation_stress"), v.parameters[i], v.covariance[np.ix_(i, i)], {k: c[i] for k, c in v.u_shared.items()}, v.residual_sd, v.degrees_of_freedom, v.between, v.misfit)
        if "voce" in settings.fit: fits["voce"] = v
    if "hollomon" in settings.fit:
        h = fit_hollomon(y, x)
        if h is not None: fits["hollomon"] = budget.fit("hollomon", h, places)
    V = budget.valued
    top = V(("top", 0.0))
    rm = float(points.stress.max())
    bias = rm - (top.value if top else np.nan)
    return CurveResult(
        faults=(), noise_stress=branch.noise_stress, noise_strain=branch.noise_strain,
        engineering_stress=points.stress, engineering_strain=points.strain,
        true_stress=budget.state.stress, true_plastic_strain=budget.state.strain, true_start=int(points.index[branch.place[choices.begin]]),
        slope=V(("slope", 0.0)), toe_strain=V(("toe", 0.0)),
        proof={o: V(("proof", o)) for o in choices.proof},
        tensile_strength=budget.recorded(rm, float(np.hypot(bias, top.u_own if top else 0.0))),
        tensile_strength_bias=bias,
        uniform_elongation=V(("elongation", 0.0)), total_elongation_at_max=V(("total_at_top", 0.0)), uniform_plastic_strain=V(("uniform", 0.0)), work_to_uniform=V(("work_to_uniform", 0.0)),
        fits=fits, kocks_mecking=km,
        at_strains=tuple(StrainPoint(s, V(("flow", s)), V(("work", s)), V(("rate", s))) for s in choices.strains),
        rate=rate_along(budget.state.stress, budget.state.strain, (0.002, float(budget.state.strain[-1]))),
    )
