"""What friction on the platens does to a compression test, told from its dimensions."""

from typing import Final

import numpy as np

from coldwork.reduce.curve import CurveFault, FaultKind, Geometry
from coldwork.reduce.curve_points import Points

__all__ = ["GREATEST_BARREL", "SLENDERNESS", "barrelling", "friction"]

GREATEST_BARREL: Final = 1.1  # greatest cross-section over that of an even piece of the volume
SLENDERNESS: Final = (1.0, 2.5)  # height over diameter: below friction counts, above it buckles


def barrelling(points: Points, geometry: Geometry) -> list[CurveFault]:
    """Compare the greatest final cross-section with that of a piece that stayed a cylinder.

    Parameters
    ----------
    points : Points
        The curve; its last strain gives the final height.
    geometry : Geometry
        Cross-section before, and at half height after the test.

    Returns
    -------
    list of CurveFault
        None or one: the ratio of the two above `GREATEST_BARREL`.

    References
    ----------
    Roebuck, Lord, Brooks, Loveday, Sellars and Evans, Mater. High Temp. 23 (2006) 59-83
    (barrelling coefficient h d^2 / (h0 d0^2), near 1 in a good test; from memory).
    """
    if geometry.final_area is None or not len(points):
        return []
    height = 1.0 - float(points.strain.max())
    ratio = geometry.final_area * height / geometry.area
    if not ratio > GREATEST_BARREL:
        return []
    span = 0, len(points)
    return [points.fault(FaultKind.BARRELLING, span, ratio, GREATEST_BARREL)]


def friction(points: Points, geometry: Geometry) -> list[CurveFault]:
    """Hold height over diameter against the range in which friction matters little.

    Parameters
    ----------
    points : Points
        The curve.
    geometry : Geometry
        Height and cross-section before the test, taken as round.

    Returns
    -------
    list of CurveFault
        None or one: a piece outside `SLENDERNESS`.

    References
    ----------
    ASTM E9, proportions of specimens (from memory: short ones of 0.8, medium of 3).
    """
    ratio = geometry.gauge_length / float(np.sqrt(4.0 * geometry.area / np.pi))
    low, high = SLENDERNESS
    if not (ratio < low or ratio > high):
        return []
    limit = low if ratio < low else high
    return [points.fault(FaultKind.FRICTION, (0, len(points)), ratio, limit)]
