"""Relation 3 fitted: a line of H^2 over 1/h for each condition that has several forces.

Coupons of a condition share the slope, which in that theory is the metal's own, and keep
their own hardness: a difference between coupons never passes for an effect of size. The
slope is an input of the method from then on, with what the scatter leaves of it.
"""

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from math import isfinite, sqrt
from typing import Final, cast

import numpy as np
import pyarrow as pa

from coldwork import units
from coldwork.formulas.pressure import projected_pressure
from coldwork.formulas.size_effect import constants_of_line
from coldwork.inputs.document import number_document
from coldwork.inputs.method import Method
from coldwork.inputs.numbers import Given
from coldwork.inputs.quantity import Input
from coldwork.reduce.reduced import ForceCells, Reduced
from coldwork.rules.forces import HV
from coldwork.statistics.common_slope import fit_parallel_lines

__all__ = ["SIZE_EFFECT", "SizeLine", "with_size_lines"]

SIZE_EFFECT: Final = "size_effect:"  # and the condition, name of the input
_UNIT: Final = "GPa2.um"


@dataclass(frozen=True)
class SizeLine:
    """The size effect of one condition, over the projected area.

    Attributes
    ----------
    condition : str
        As ``coupons.csv`` has it.
    coupons, indents, forces : int
        What it was fitted to: coupons that were read with several forces.
    size_strength_gpa2_um, u_size_strength_gpa2_um : float
        Slope of H^2 over 1/h. [GPa^2.um]
    bulk_hardness_gpa, u_bulk_hardness_gpa : float
        H_0 of the mean of those coupons' lines. [GPa]
    characteristic_depth_um, u_characteristic_depth_um : float
        h* that goes with it. [um]
    correlation : float
        Of H_0 and h*. [1]
    degrees_of_freedom : int
        Indents less coupons less 1. [1]
    relative_scatter : float
        Of a hardness about its coupon's line. [1]
    """

    condition: str
    coupons: int
    indents: int
    forces: int
    size_strength_gpa2_um: float
    u_size_strength_gpa2_um: float
    bulk_hardness_gpa: float
    u_bulk_hardness_gpa: float
    characteristic_depth_um: float
    u_characteristic_depth_um: float
    correlation: float
    degrees_of_freedom: int
    relative_scatter: float


def with_size_lines(method: Method, reduced: Reduced, conditions: pa.StringArray) -> Method:
    """Fit the size effect of every condition, where the sheet asks for it.

    Parameters
    ----------
    method : Method
        The batch's.
    reduced : Reduced
        With its cells; `line` of each coupon is written.
    conditions : pyarrow.StringArray of n
        The condition of each coupon.

    Returns
    -------
    Method
        With an input for each line, and the lines in its document; the same where nothing
        is fitted.
    """
    if method.laws.size_effect != "fitted" or not reduced.cells:
        return method
    cells = ForceCells.joined(reduced.cells)
    usable = np.isfinite(reduced.mean[cells.coupon])
    coded = conditions.dictionary_encode()
    code = np.asarray(coded.indices.to_numpy(zero_copy_only=False), dtype=np.int64)
    lines: list[SizeLine] = []
    for k in np.unique(code[cells.coupon]):
        here = np.flatnonzero((code[cells.coupon] == k) & usable)
        line = _line(cells.take(here), str(coded.dictionary[int(k)].as_py() or ""))
        if line is not None:
            reduced.line[(code == k) & (reduced.scale == HV)] = len(lines)
            lines.append(line)
    return _with_inputs(method, lines)


def _with_inputs(method: Method, lines: Sequence[SizeLine]) -> Method:
    """Put the lines among the inputs and into ``method.json``."""
    given = {found.input.name: found for found in map(_given, lines)}
    told = cast("Mapping[str, object]", method.document["inputs"])
    section = cast("Mapping[str, object]", method.document["indentation"])
    document = {
        **method.document,
        "inputs": {**told, **{name: number_document(x) for name, x in given.items()}},
        "indentation": {**section, "size_lines": [asdict(line) for line in lines]},
    }
    inputs = {**method.inputs, **{name: x.input for name, x in given.items()}}
    return replace(method, inputs=inputs, document=document)


def _given(line: SizeLine) -> Given:
    value, u = line.size_strength_gpa2_um, line.u_size_strength_gpa2_um
    name = SIZE_EFFECT + line.condition
    source = (
        f"{line.indents} indents with {line.forces} forces on {line.coupons} coupons of this batch"
    )
    found = Input(
        name,
        float(units.to_si(value, _UNIT)),
        float(units.to_si(u, _UNIT)),
        _UNIT,
        degrees_of_freedom=float(line.degrees_of_freedom),
        source=source,
        origin="fitted",
    )
    return Given(found, value, u)


def _line(cells: ForceCells, condition: str) -> SizeLine | None:
    """Fit one condition; None where no coupon has two forces or nothing tells the scatter."""
    coupons, place, held = np.unique(cells.coupon, return_inverse=True, return_counts=True)
    cells = cells.take(np.flatnonzero(held[place] > 1))
    coupons = coupons[held > 1]
    indents = int(cells.count.sum())
    freedom = indents - len(coupons) - 1
    if not len(coupons) or freedom < 1:
        return None
    x = 1.0 / cells.depth
    y = np.asarray(projected_pressure(cells.hardness)) ** 2
    fit = fit_parallel_lines(cells.coupon, x, y, cells.count / y**2)
    # Depth and hardness come from one diagonal: H^2 - S/h goes with ln H by 2 H^2 - S/(2 h).
    by_log = 2.0 * y - fit.slope * x / 2.0
    off = (y - fit.intercepts[fit.group] - fit.slope * x) / by_log
    variance = (float(cells.squares.sum()) + float(cells.count @ off**2)) / freedom
    error = variance * by_log**2 / cells.count
    ways = np.stack([fit.intercept_by_y, fit.slope_by_y])
    covariance = (ways * error) @ ways.T
    bulk, depth, both = constants_of_line(fit.intercept, fit.slope, covariance)
    if not isfinite(bulk):
        return None
    u_bulk, u_depth = sqrt(both[0, 0]), sqrt(both[1, 1])

    def told(value: float, unit: str) -> float:
        return float(units.from_si(value, unit))

    return SizeLine(
        condition,
        len(coupons),
        indents,
        len(np.unique(cells.force)),
        told(fit.slope, _UNIT),
        told(sqrt(covariance[1, 1]), _UNIT),
        told(bulk, "GPa"),
        told(u_bulk, "GPa"),
        told(depth, "um"),
        told(u_depth, "um"),
        float(both[0, 1] / (u_bulk * u_depth)) if u_bulk * u_depth > 0.0 else 0.0,
        freedom,
        sqrt(variance),
    )
