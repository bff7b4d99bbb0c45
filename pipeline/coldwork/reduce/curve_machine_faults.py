"""Faults of the record itself: time, zero, range, units, and an extensometer taken off.

Each function looks for one fault and gives what it found, with the named limit that it
was held against. None of them changes a point.
"""

from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import CurveFault, FaultKind
from coldwork.reduce.curve_branch import moving_mean
from coldwork.reduce.curve_points import Points

__all__ = [
    "GREATEST_SLOPE",
    "GREATEST_STRESS",
    "LEAST_SLOPE",
    "LEAST_STRESS",
    "NOTHING_LEFT",
    "OFF_POINTS",
    "PRELOAD_SHARE",
    "REST_SHARE",
    "SATURATED_POINTS",
    "STANDING_POINTS",
    "extensometer_off",
    "saturation",
    "slope_impossible",
    "stress_impossible",
    "time_backward",
    "time_standing",
    "zero_offset",
]

FloatArray = NDArray[np.float64]
Faults = list[CurveFault]

STANDING_POINTS: Final = 5  # with one time, more than a clock of coarse steps gives
SATURATED_POINTS: Final = 10  # of exactly one reading at the end of the range
OFF_POINTS: Final = 20  # at one strain while the test goes on
OFF_SHARE: Final = 0.02  # of all points, at least as many
LEAST_STRESS: Final = 2e6  # greatest stress of a metal's test; lead has 12 MPa or so [Pa]
GREATEST_STRESS: Final = 8e9  # above the strongest steel wire [Pa]
LEAST_SLOPE: Final = 8e9  # half of lead's modulus, for slopes of an extensometer [Pa]
GREATEST_SLOPE: Final = 8e11  # above iridium and osmium [Pa]
PRELOAD_SHARE: Final = 0.05  # of the proof stress may be on at the start (ISO 6892-1)
REST_SHARE: Final = 0.02  # of R_m may be left after the break, or below zero at the start
NOTHING_LEFT: Final = -0.95  # engineering strain at which hardly any length is left [1]
_BROKEN: Final = 0.5  # of the force before; what is above has not come off
_NOISE: Final = 6.0
_COARSE: Final = 3.0  # a standing run is longer than the clock's usual one by this factor
_STEEPER: Final = 8.0  # how far a signal would have gone on, in its steps or its noise


def time_backward(points: Points) -> Faults:
    """Find where the time runs back; the limit is 0 s."""
    if points.time is None:
        return []
    steps = np.diff(points.time)
    back = np.flatnonzero(steps < 0.0)
    if back.size == 0:
        return []
    worst = float(steps[back].min())
    span = int(back[0]), int(back[-1]) + 2
    return [points.fault(FaultKind.TIME_BACKWARD, span, worst, 0.0, "s")]


def time_standing(points: Points) -> Faults:
    """Find where the time stands still for `STANDING_POINTS`, and longer than is usual there.

    A clock that is written with few digits repeats each time alike; a run that is longer
    by a factor of 3 than the median run is more than that.
    """
    if points.time is None or len(points) < 2:
        return []
    starts = np.flatnonzero(np.concatenate([[True], np.diff(points.time) != 0.0]))
    runs = np.diff(np.append(starts, points.time.size))
    limit = max(float(STANDING_POINTS), _COARSE * float(np.median(runs)))
    longest = int(np.argmax(runs))
    if runs[longest] < limit:
        return []
    span = int(starts[longest]), int(starts[longest] + runs[longest])
    return [points.fault(FaultKind.TIME_STANDING, span, float(runs[longest]), limit)]


def saturation(points: Points) -> tuple[int, bool, Faults]:
    """Find force or length that stays at exactly its greatest reading.

    Parameters
    ----------
    points : Points
        The curve.

    Returns
    -------
    stop : int
        Place up to which both can be trusted.
    capped : bool
        Whether it was the force, so that the greatest one is not in the record.
    faults : list of CurveFault
        None or one: a run of `SATURATED_POINTS` of one reading, to which the signal came so
        steeply that in as many points it would have gone on by 8 of its own steps.
    """
    whole = len(points)
    runs = [_run_at_end(series) for series in (points.stress, points.strain)]
    found = [run for run in runs if run is not None]
    if not found:
        return whole, False, []
    first = [int(np.argmax(points.stress == points.stress.max()))] if runs[0] else []
    stop = min(first + [start for start, _ in found])
    count = float(found[0][1] - found[0][0])
    fault = points.fault(FaultKind.SATURATION, found[0], count, float(SATURATED_POINTS))
    return stop, runs[0] is not None, [fault]


def _run_at_end(series: FloatArray) -> tuple[int, int] | None:
    """Find the longest run of exactly the greatest reading, if the signal went on behind it."""
    edges = np.flatnonzero(np.diff(np.pad((series == series.max()).view(np.int8), 1)))
    runs = edges.reshape(-1, 2)
    start, stop = (int(k) for k in runs[np.argmax(runs[:, 1] - runs[:, 0])])
    count = stop - start
    if count < SATURATED_POINTS or start < 3:
        return None
    before = series[max(0, start - count) : start]
    come = float(series[start] - before.mean()) * 2.0  # over as many points
    steps = np.abs(np.diff(before))
    step = max(float(np.median(steps)), float(steps[steps > 0].min(initial=np.inf)))
    goes_on = np.isfinite(step) and come > min(_STEEPER, 0.5 * before.size) * step
    return (start, stop) if goes_on else None


def extensometer_off(points: Points, noise: float, last: int) -> tuple[int, Faults]:
    """Find where the strain stops following the test for good.

    Parameters
    ----------
    points : Points
        The curve.
    noise : float
        Of one strain. [1]
    last : int
        Place of the break, or of the end.

    Returns
    -------
    stop : int
        Place up to which the strain can be trusted.
    faults : list of CurveFault
        None or one: strains that stand for at least `OFF_POINTS`, 2 % of all points, and
        8 times the points in which they would have left the noise; or a strain that no
        coupon can have, since it leaves no length.
    """
    whole = len(points)
    gone = np.flatnonzero(points.sense * points.strain <= NOTHING_LEFT)
    if gone.size:
        stop = int(gone[0])
        value = float(points.sense * points.strain[stop])
        span = stop, whole
        return stop, [points.fault(FaultKind.EXTENSOMETER_OFF, span, value, NOTHING_LEFT)]
    strain = moving_mean(points.strain[: last + 1])
    if strain.size < 3 * OFF_POINTS:
        return whole, []
    end = float(np.median(points.strain[last - 6 : last + 1]))
    band = _NOISE * noise + 1e-9 * float(np.ptp(strain))
    away = np.flatnonzero(np.abs(strain - end) > band)
    start = int(away[-1]) + 1 if away.size else 0
    run = strain.size - start
    typical = float(np.ptp(strain)) / strain.size
    leaves = 8.0 * band / max(typical, 1e-300)
    limit = max(float(OFF_POINTS), OFF_SHARE * strain.size, leaves)
    if run < limit or start == 0:
        return whole, []
    stop = min(start, int(np.argmax(strain[: start + 1])) + 1)
    span = stop, last + 1
    fault = points.fault(FaultKind.EXTENSOMETER_OFF, span, float(run), limit, "1")
    return max(stop - 3, 1), [fault]


def stress_impossible(points: Points) -> Faults:
    """Hold the greatest stress against what metals bear: kN read as N shows here."""
    top = float(points.stress.max())
    limit = LEAST_STRESS if top < LEAST_STRESS else GREATEST_STRESS
    if LEAST_STRESS <= top <= GREATEST_STRESS:
        return []
    return [points.fault(FaultKind.STRESS_IMPOSSIBLE, (0, len(points)), top, limit, "Pa")]


def slope_impossible(points: Points, slope: float, places: tuple[int, int]) -> Faults:
    """Hold the elastic slope of an extensometer against the moduli of metals."""
    if LEAST_SLOPE <= slope <= GREATEST_SLOPE:
        return []
    limit = LEAST_SLOPE if slope < LEAST_SLOPE else GREATEST_SLOPE
    return [points.fault(FaultKind.SLOPE_IMPOSSIBLE, places, slope, limit, "Pa")]


def zero_offset(points: Points, noise: float, proof: float, last: int) -> Faults:
    """Hold the force before the test and after the break against zero.

    Parameters
    ----------
    points : Points
        The curve.
    noise : float
        Of one stress. [Pa]
    proof : float
        Proof stress, or what stands for it. [Pa]
    last : int
        Place of the break, or of the end.

    Returns
    -------
    list of CurveFault
        None or one. At the start `PRELOAD_SHARE` of the proof stress may be on, as a
        preload; below zero, and after the break, `REST_SHARE` of the greatest stress.

    References
    ----------
    ISO 6892-1, setting of the force zero point and preliminary force of at most 5 % of
    the yield strength (from memory).
    """
    rest = REST_SHARE * float(points.stress.max()) + _NOISE * noise
    before = float(np.median(points.stress[:3]))
    limit = PRELOAD_SHARE * proof + _NOISE * noise if before > 0.0 else -rest
    if before > limit > 0.0 or before < limit < 0.0:
        return [points.fault(FaultKind.ZERO_OFFSET, (0, 3), before, limit, "Pa")]
    after = points.stress[last + 3 :]
    if after.size >= 3:
        left = float(np.median(after))
        moves = float(np.median(np.abs(after - left)))  # the tail of a neck does, rest does not
        broken = left < _BROKEN * float(points.stress[last])
        if abs(left) > rest > 2.0 * moves and broken:
            span = last + 3, len(points)
            limit = float(np.copysign(rest, left))
            return [points.fault(FaultKind.ZERO_OFFSET, span, left, limit, "Pa")]
    return []
