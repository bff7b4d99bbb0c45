"""Indents of one coupon with several forces, brought to one indent that stands for them.

Relation 3 is a straight line of H^2 over 1/h. The mean of H^2 and the mean of 1/h, by the
same weights, lie on a coupon's line, whatever its slope: an indent there stands for all.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coldwork.formulas.hardness import vickers_diagonal, vickers_hardness
from coldwork.formulas.size_effect import indentation_depth
from coldwork.reduce.reduced import ForceCells, Reduced

__all__ = ["Indented", "join_forces"]

_Floats = NDArray[np.float64]
_Counts = NDArray[np.int64]


@dataclass(frozen=True)
class Indented:
    """Vickers indents of whole coupons, n of them.

    Attributes
    ----------
    coupon : ndarray of int32, shape (n,)
        Row of each one's coupon.
    hardness : ndarray, shape (n,)
        Corrected for the tester. [Pa]
    force, nominal : ndarray, shape (n,)
        As applied, and as meant. [N]
    tester : ndarray of int64, shape (n,)
        Place of the tester among those with a calibration.
    """

    coupon: NDArray[np.int32]
    hardness: _Floats
    force: _Floats
    nominal: _Floats
    tester: _Counts


def join_forces(indents: Indented, reduced: Reduced) -> tuple[_Counts, _Floats]:
    """Fill the rows of coupons that were read with several forces; keep cells for lines.

    A cell is what one coupon reads at one force. Scatter is taken inside cells, since
    between them it is the effect itself. Weights are those of H^2 as it scatters when the
    relative scatter of H is one for all: readings over the fourth power of H.

    Parameters
    ----------
    indents : Indented
        All that were made on the pyramid.
    reduced : Reduced
        The batch's table, filled as if there were one force.

    Returns
    -------
    cell : ndarray of int64, shape (n,)
        Which cell each indent is in, counted from 0.
    weight : ndarray, shape (n,)
        Its share in its coupon's mean. [1]
    """
    keys = np.stack([indents.coupon.astype(np.float64), indents.nominal], axis=1)
    distinct, cell, count = np.unique(keys, axis=0, return_inverse=True, return_counts=True)
    cell = cell.reshape(-1)
    hardness = np.bincount(cell, indents.hardness) / count
    deviation = indents.hardness / hardness[cell] - 1.0
    force = np.bincount(cell, indents.force) / count
    cells = ForceCells(
        coupon=distinct[:, 0].astype(np.int64),
        force=distinct[:, 1],
        count=count.astype(np.int64),
        hardness=hardness,
        depth=indentation_depth(vickers_diagonal(force, hardness)),
        squares=np.asarray(np.bincount(cell, deviation**2), dtype=np.float64),
    )
    reduced.cells.append(cells)
    rows, place, forces = np.unique(cells.coupon, return_inverse=True, return_counts=True)

    def over(values: _Floats) -> _Floats:
        return np.asarray(np.bincount(place, values), dtype=np.float64)

    readings = over(cells.count.astype(np.float64))
    each = 1.0 / hardness**4  # weight of one indent in the mean of H^2
    total = over(count * each)
    square = over(count * each * hardness**2) / total
    depth = total / over(count * each / cells.depth)
    own = each[cell] / total[place[cell]]
    several = forces > 1
    into = rows[several]
    root = np.sqrt(square)
    free = readings - forces
    with np.errstate(invalid="ignore", divide="ignore"):
        relative = np.sqrt(over(cells.squares) / free)
    reduced.mean[into] = root[several]
    reduced.sd[into] = np.where(free > 0, relative * root, np.nan)[several]
    reduced.repeats[into] = (free + 1.0)[several]
    reduced.effective[into] = (square**2 * total)[several]
    reduced.force[into] = np.nan
    diagonal = depth / indentation_depth(1.0)
    reduced.mean_diagonal[into] = diagonal[several]
    unit = vickers_hardness(1.0, diagonal, diagonal)  # of one newton
    reduced.applied_force[into] = (root / unit)[several]
    for i, share in enumerate(reduced.shares.values()):
        moved = np.where(indents.tester == i, own * indents.hardness**2, 0.0)
        share[into] = (np.bincount(place[cell], moved) / square)[several]
    return cell, np.where(several[place[cell]], own, 1.0 / readings[place[cell]])
