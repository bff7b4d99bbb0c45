"""One curve to its results: the steps in order."""

from coldwork.reduce.curve import Curve, CurveResult, CurveSettings, Geometry

__all__ = ["reduce_curve"]


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
    raise NotImplementedError
