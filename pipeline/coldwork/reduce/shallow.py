"""Vickers indents too shallow for relation 3, told from those that it can take."""

from typing import Final

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
from numpy.typing import NDArray

from coldwork import units
from coldwork.formulas.hardness import vickers_diagonal
from coldwork.formulas.size_effect import indentation_depth
from coldwork.inputs.method import Method
from coldwork.reduce.readings import Readings

__all__ = ["SHALLOW", "shallow"]

SHALLOW: Final = 0.2e-6  # depth below which measured hardness falls short of the relation [m]
_OTHERS: Final = pa.array(["HBW", "HK"])


def shallow(readings: Readings, method: Method) -> NDArray[np.bool_]:
    """Find Vickers indents less than 0.2 um deep, where a size effect is taken out.

    Parameters
    ----------
    readings : Readings
        Indents, or points of flow curves.
    method : Method
        The batch's.

    Returns
    -------
    ndarray of bool, shape (n,)
        False everywhere where the sheet asks for no size effect.
    """
    if method.laws.size_effect == "none":
        return np.zeros(len(readings), dtype=bool)
    diagonal = units.to_si(readings.column("d1_um") + readings.column("d2_um"), "um") / 2.0
    hardness = units.to_si(readings.column("hardness"), "kgf/mm2")
    force = units.to_si(readings.column("force_n"), "N")
    read = np.isnan(diagonal)
    diagonal[read] = vickers_diagonal(force[read], hardness[read])
    text = readings.texts.get("scale")
    if text is not None:
        other = pc.is_in(text, value_set=_OTHERS).to_numpy(zero_copy_only=False)
        diagonal[other] = np.nan
    return indentation_depth(diagonal) < SHALLOW
