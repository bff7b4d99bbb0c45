"""All that is found on a curve, by asking each rule once."""

from collections.abc import Iterable
from typing import Final

from coldwork.reduce.curve import CurveFault, CurveSettings, FaultKind, Geometry
from coldwork.reduce.curve_branch import Branch
from coldwork.reduce.curve_choices import is_by_crosshead
from coldwork.reduce.curve_compression import barrelling, friction
from coldwork.reduce.curve_elastic import LEAST_ELASTIC_POINTS, Elastic
from coldwork.reduce.curve_machine_faults import (
    slope_impossible,
    stress_impossible,
    time_backward,
    time_standing,
    zero_offset,
)
from coldwork.reduce.curve_points import Points
from coldwork.reduce.curve_test_faults import (
    find_drops,
    grip_slip,
    plateau,
    serrations,
    strain_jump,
    unloading_loops,
)
from coldwork.statistics.noise import quiet_noise

__all__ = ["faults_of_record", "faults_of_test", "in_order"]

Faults = list[CurveFault]

_ORDER: Final = {kind: place for place, kind in enumerate(FaultKind)}


def in_order(faults: Iterable[CurveFault]) -> tuple[CurveFault, ...]:
    """Sort findings by kind, then by where they are; of equal ones one stays."""
    unique = {(fault.kind, fault.start): fault for fault in faults}
    return tuple(sorted(unique.values(), key=lambda fault: (_ORDER[fault.kind], fault.start)))


def faults_of_record(points: Points) -> Faults:
    """Find what is wrong with the record whatever the metal: time, units."""
    return [
        *time_backward(points),
        *time_standing(points),
        *stress_impossible(points),
    ]


def faults_of_test(
    points: Points,
    branch: Branch,
    elastic: Elastic,
    last: int,
    settings: CurveSettings,
    geometry: Geometry,
) -> Faults:
    """Find what went wrong in the test, and what is the metal's own.

    Parameters
    ----------
    points : Points
        The curve.
    branch : Branch
        The part that is reduced.
    elastic : Elastic
        Its elastic part.
    last : int
        Place of the last point before the break.
    settings : CurveSettings
        Where the strain comes from; the mode.
    geometry : Geometry
        Dimensions, for compression.

    Returns
    -------
    list of CurveFault
        Everything found, in no order.
    """
    slope = elastic.line.slope
    by_crosshead = is_by_crosshead(settings)
    noise = branch.noise_stress, branch.noise_strain
    proof = float(branch.stress[branch.peak if elastic.proof_at is None else elastic.proof_at])
    places = int(branch.place[elastic.start]), int(branch.place[elastic.stop - 1]) + 1
    drops = find_drops(points, quiet_noise(points.stress[: last + 1]), last)
    jumps = strain_jump(points, noise, slope, (places[0], int(branch.place[-1])))
    faults = [
        *jumps,
        *zero_offset(points, noise[0], proof, last),
        *grip_slip(points, drops, slope),
        *serrations(points, drops),
        *unloading_loops(points, branch),
        *plateau(points, branch, elastic.proof_at, slope, jumps, by_crosshead=by_crosshead),
    ]
    if not by_crosshead and settings.slope is None:
        faults += slope_impossible(points, slope, places)
    count = elastic.stop - elastic.start
    if count < LEAST_ELASTIC_POINTS:
        limit = float(LEAST_ELASTIC_POINTS)
        faults.append(points.fault(FaultKind.FEW_ELASTIC_POINTS, places, float(count), limit))
    if settings.mode == "compression":
        faults += [*barrelling(points, geometry), *friction(points, geometry)]
    return faults
