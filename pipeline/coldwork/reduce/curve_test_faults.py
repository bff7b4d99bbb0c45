"""What happened in the test: slips and unloading, told apart from what the metal does.

========================  =============================  ==============================
what                      stress                         strain
========================  =============================  ==============================
slip in the grips         drops within a few points,     falls with it (extensometer),
                          comes back along the           or goes on (crosshead)
                          elastic line
unloading loop            falls over many points, comes  falls and comes back with it
                          back along the elastic line
slip of the extensometer  goes on as before              jumps
serrations                drops again and again          goes on
yield point, plateau      drops once, stays low          goes on at one stress
========================  =============================  ==============================
"""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.reduce.curve import CurveFault, FaultKind
from coldwork.reduce.curve_branch import Branch, moving_mean
from coldwork.reduce.curve_points import Points

__all__ = [
    "JUMP_STRAIN",
    "LOOP_POINTS",
    "PLATEAU_STRAIN",
    "SERRATIONS",
    "SERRATION_DROP",
    "SLIP_DROP",
    "Drop",
    "find_drops",
    "grip_slip",
    "plateau",
    "serrations",
    "strain_jump",
    "unloading_loops",
]

FloatArray = NDArray[np.float64]
Faults = list[CurveFault]

SLIP_DROP: Final = 0.02  # of R_m: a drop from here on is held for a slip
LOOP_POINTS: Final = 10  # a fall over as many points was meant
JUMP_STRAIN: Final = 0.0002  # in one go: a tenth of the offset of the proof stress [1]
SERRATION_DROP: Final = 0.003  # of R_m
SERRATIONS: Final = 5  # drops, from which it is the metal and no slip
PLATEAU_STRAIN: Final = 0.004  # over which the stress stays [1]
_REGAINED: Final = 0.8  # of a drop, over which its way back is looked at
_RELOAD: Final = 0.4  # of the elastic slope, at least, on the way back from a slip
_LAG: Final = 3  # points in which a slip is over
_NOISE: Final = 8.0
_MANY: Final = 60  # drops that are counted at most
_RISE: Final = 0.03  # of the plateau's stress: there it has ended
_CORNER: Final = 3.0  # past a plateau the metal hardens this many times as fast


@dataclass(frozen=True)
class Drop:
    """A fall of the stress and its way back, by places in `Points`."""

    start: int
    bottom: int
    back: int | None  # where four fifths of it are regained; None where they never are
    size: float  # [Pa]


def find_drops(points: Points, noise: float, last: int) -> list[Drop]:
    """Find falls of the stress by `SERRATION_DROP` of R_m, and 8 times the noise, or more.

    Parameters
    ----------
    points : Points
        The curve.
    noise : float
        Of one stress, where the curve is quiet. [Pa]
    last : int
        Place of the break, or of the end; drops that end there are not counted.

    Returns
    -------
    list of Drop
        In order, at most 60.
    """
    mean = moving_mean(points.stress[: last + 1], _LAG)
    least = max(SERRATION_DROP * float(mean.max()), _NOISE * noise)
    drops: list[Drop] = []
    place = 0
    while len(drops) < _MANY:
        fall = _first_turn(mean, place, least)
        if fall is None:
            break
        top = fall[0]
        rise = _first_turn(-mean, top, least)
        if rise is None:
            break
        bottom = rise[0]
        size = float(mean[top] - mean[bottom])
        regained = np.flatnonzero(mean[bottom:] >= mean[bottom] + _REGAINED * size)
        back = bottom + int(regained[0]) if regained.size else None
        drops.append(Drop(top, bottom, back, size))
        place = bottom
    return drops


def _first_turn(series: FloatArray, start: int, least: float) -> tuple[int, int] | None:
    """Find the first top past `start` from which a series falls by `least`, and where it has."""
    length = 512
    while start < series.size - 1:
        stop = min(start + length, series.size)
        best = np.maximum.accumulate(series[start:stop])
        fallen = np.flatnonzero(series[start:stop] <= best - least)
        if fallen.size:
            place = int(fallen[0])
            return start + int(np.argmax(series[start : start + place + 1])), start + place
        if stop == series.size:
            return None
        length *= 4
    return None


def serrations(points: Points, drops: list[Drop]) -> Faults:
    """Find `SERRATIONS` drops or more: the metal's own, such as of Portevin and Le Chatelier."""
    if len(drops) < SERRATIONS:
        return []
    span = drops[0].start, drops[-1].bottom + 1
    return [points.fault(FaultKind.SERRATIONS, span, float(len(drops)), float(SERRATIONS))]


def grip_slip(points: Points, drops: list[Drop], slope: float) -> Faults:
    """Find sudden drops from which the stress comes back along the elastic line.

    Parameters
    ----------
    points : Points
        The curve.
    drops : list of Drop
        What `find_drops` gave; `SERRATIONS` of them or more are the metal's.
    slope : float
        Elastic slope. [Pa]

    Returns
    -------
    list of CurveFault
        The greatest slip, if one is `SLIP_DROP` of R_m or more.
    """
    if len(drops) >= SERRATIONS:
        return []
    limit = SLIP_DROP * float(points.stress.max())
    slips = [
        drop
        for drop in drops
        if drop.size >= limit and _sudden(points, drop) and _comes_back(points, drop, slope)
    ]
    if not slips:
        return []
    worst = max(slips, key=lambda drop: drop.size)
    span = worst.start, worst.bottom + 1
    return [points.fault(FaultKind.GRIP_SLIP, span, worst.size, limit, "Pa")]


def unloading_loops(points: Points, branch: Branch) -> Faults:
    """Find falls along the elastic line over `LOOP_POINTS` or more: they were meant."""
    found = []
    for loop in branch.loops:
        drop = Drop(loop.start, loop.bottom, loop.stop, loop.drop)
        if not _sudden(points, drop):
            span = loop.start, loop.stop + 1
            limit = SLIP_DROP * float(points.stress.max())
            found.append(points.fault(FaultKind.UNLOADING_LOOP, span, loop.drop, limit, "Pa"))
    return found


def strain_jump(
    points: Points, noise: tuple[float, float], slope: float, ends: tuple[int, int]
) -> Faults:
    """Find strain that jumps while the stress goes on as before.

    What jumps before the elastic part is the seating of the coupon: the toe's correction
    takes it off.

    Parameters
    ----------
    points : Points
        The curve.
    noise : tuple of float
        Of one stress and one strain. [Pa], [1]
    slope : float
        Elastic slope. [Pa]
    ends : tuple of int
        First and last place to look at.

    Returns
    -------
    list of CurveFault
        The greatest jump, if within 3 points the strain gains `JUMP_STRAIN` more than is
        usual there, more than twice the usual gain, and more than noise gives, and the
        stress does not answer it.
    """
    here = slice(ends[0], ends[1] + 1)
    strain, stress = points.strain[here], points.stress[here]
    if strain.size < 4 * _LAG:
        return []
    step = strain[_LAG:] - strain[:-_LAG]
    answer = np.abs(stress[_LAG:] - stress[:-_LAG])
    quiet = answer < np.maximum(_NOISE * noise[0], 0.1 * slope * np.abs(step))
    least = max(JUMP_STRAIN, 1.5 * _NOISE * noise[1])
    candidates = np.flatnonzero((np.abs(step) > least) & quiet)
    usual = _usual_step(step, candidates)
    excess = step[candidates] - usual
    limit = np.maximum(least, np.abs(usual))
    over = np.abs(excess) / limit
    if candidates.size == 0 or over.max() <= 1.0:
        return []
    worst = int(np.argmax(over))
    start = ends[0] + int(candidates[worst])
    span = start, start + _LAG + 1
    value, held = float(excess[worst]), float(limit[worst])
    return [points.fault(FaultKind.EXTENSOMETER_SLIP, span, value, held)]


def plateau(
    points: Points,
    branch: Branch,
    proof_at: int | None,
    slope: float,
    jumps: Faults,
    *,
    by_crosshead: bool,
) -> Faults:
    """Find strain at one stress over `PLATEAU_STRAIN` or more, and hardening only past it.

    A metal that hardens steadily hardens less and less. Where it hardens 3 times as fast
    past a plateau as on it, it is Lueders' band that went through; where it goes on along
    the elastic line, something slipped.

    Parameters
    ----------
    points : Points
        The curve.
    branch : Branch
        The part that is reduced.
    proof_at : int or None
        Place in it where the curve passes the 0.2 % parallel.
    slope : float
        Elastic slope. [Pa]
    jumps : list of CurveFault
        What `strain_jump` gave: strain that the coupon did not see is none of a plateau's.
    by_crosshead : bool
        Whether the strain is the crosshead's: then the grips slipped, else the extensometer.

    Returns
    -------
    list of CurveFault
        None or one.
    """
    ends = _flat_stretch(branch, proof_at)
    if ends is None or proof_at is None:
        return []
    end, on = ends
    run, mean = branch.run, branch.mean
    length = float(run[end] - run[proof_at])
    ahead = run[end] + length * np.array([0.125, 0.25, 0.5, 1.0])
    places = np.searchsorted(np.maximum.accumulate(run), ahead)
    if places[-1] >= len(branch):
        return []
    past = (mean[places] - mean[end]) / np.maximum(run[places] - run[end], 1e-12)
    if past[-1] <= _CORNER * max(on, 0.0):
        return []
    kind = FaultKind.LUEDERS_PLATEAU
    if past.max() > _RELOAD * slope:
        kind = FaultKind.GRIP_SLIP if by_crosshead else FaultKind.EXTENSOMETER_SLIP
    place = branch.place[[proof_at, end]]
    found = points.fault(kind, (int(place[0]), int(place[1]) + 1), length, PLATEAU_STRAIN)
    jumped = sum(jump.value for jump in jumps if found.start <= jump.start < found.stop)
    return [found] if length - jumped >= PLATEAU_STRAIN else []


def _flat_stretch(branch: Branch, proof_at: int | None) -> tuple[int, float] | None:
    """Where the stress has risen 3 % above that past yield, and its slope until halfway there."""
    if proof_at is None or len(branch) - proof_at < 8 * _LAG:
        return None
    run = np.maximum.accumulate(branch.run)
    some = int(np.searchsorted(run, run[proof_at] + PLATEAU_STRAIN))
    if some >= len(branch) - 2:
        return None
    level = float(np.median(branch.stress[proof_at : some + 1]))
    mean = moving_mean(branch.stress, 2 * ((some - proof_at) // 40) + 1)
    above = np.flatnonzero(mean[proof_at:] > (1.0 + _RISE) * level)
    if above.size == 0 or run[proof_at + above[0]] - run[proof_at] < PLATEAU_STRAIN:
        return None
    end = proof_at + int(above[0])
    begun = float(np.median(branch.stress[proof_at : (3 * proof_at + end) // 4 + 1]))
    middle = (proof_at + end) // 2
    on = (float(mean[middle]) - begun) / max(float(run[middle] - run[proof_at]), 1e-12)
    return end, on


def _sudden(points: Points, drop: Drop) -> bool:
    """Whether nine tenths of a drop went by in less than `LOOP_POINTS`."""
    fall = points.stress[drop.start : drop.bottom + 1]
    low = fall[0] - 0.9 * drop.size
    high = fall[0] - 0.1 * drop.size
    reached = np.flatnonzero(fall <= low)
    left = np.flatnonzero(fall[: reached[0] + 1] >= high) if reached.size else reached
    return bool(left.size) and int(reached[0] - left[-1]) < LOOP_POINTS


def _comes_back(points: Points, drop: Drop, slope: float) -> bool:
    if drop.back is None:
        return False
    rise = float(np.median(points.strain[drop.back - 1 : drop.back + 2]))
    rise -= float(np.median(points.strain[drop.bottom - 1 : drop.bottom + 2]))
    return _REGAINED * drop.size >= _RELOAD * slope * rise


def _usual_step(step: FloatArray, candidates: NDArray[np.int64]) -> FloatArray:
    """Take the larger of the median steps in the 15 points before and after each candidate."""
    reach = np.arange(_LAG + 1, _LAG + 16)
    if candidates.size == 0:
        return np.zeros(0)
    before = step[np.maximum(candidates[:, None] - reach, 0)]
    after = step[np.minimum(candidates[:, None] + reach, step.size - 1)]
    return np.asarray(np.maximum(np.median(before, axis=1), np.median(after, axis=1)))
