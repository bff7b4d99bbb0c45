"""The one state past necking: from the neck that was measured after the test."""

import numpy as np

from coldwork.errors import InvalidArgument
from coldwork.formulas.necking import bridgman_factor
from coldwork.reduce.curve import FORCE, Geometry, NeckPoint, Valued
from coldwork.reduce.curve_points import Points

__all__ = ["neck_point"]


def neck_point(
    points: Points, geometry: Geometry, last: int, noise: float, force_u_rel: float
) -> NeckPoint:
    """Give stress and strain in the neck at the break.

    Parameters
    ----------
    points : Points
        The curve.
    geometry : Geometry
        Cross-section before the test, that of the neck, and the radius of its outline.
    last : int
        Place of the last point before the break.
    noise : float
        Of one stress. [Pa]
    force_u_rel : float
        Standard uncertainty of the force, relative. [1]

    Returns
    -------
    NeckPoint
        Mean stress over the neck, Bridgman's factor and their product. What the neck's
        dimensions are uncertain by is not in it.

    Raises
    ------
    InvalidArgument
        If the neck was not measured.
    """
    if geometry.final_area is None or geometry.neck_profile_radius is None:
        message = "final_area and neck_profile_radius must be given for a Bridgman correction"
        raise InvalidArgument(message)
    ratio = geometry.area / geometry.final_area
    mean = float(points.stress[last]) * ratio
    radius = float(np.sqrt(geometry.final_area / np.pi))
    factor = float(bridgman_factor(radius, geometry.neck_profile_radius))

    def valued(part: float) -> Valued:
        by_force = {FORCE: mean * part}
        return Valued(
            mean * part, noise * ratio * part, by_force, {FORCE: mean * part * force_u_rel}
        )

    return NeckPoint(float(np.log(ratio)), valued(1.0), factor, valued(factor))
