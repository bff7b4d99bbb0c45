"""Small indents as plots want them: H^2 and 1/h of readings, and the lines of coupons."""

from collections.abc import Mapping
from typing import TYPE_CHECKING, cast

import numpy as np
from numpy.typing import NDArray

from coldwork import units
from coldwork.formulas.hardness import vickers_diagonal
from coldwork.formulas.pressure import projected_pressure
from coldwork.formulas.size_effect import indentation_depth
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.reduce.reduced import Reduced
from coldwork.reduce.size_lines import SIZE_EFFECT
from coldwork.rules.forces import HV

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["size_frames"]

_Floats = NDArray[np.float64]
_GPA2 = 1e18  # Pa^2 in one GPa^2


def size_frames(
    method: Method, reduced: Reduced, coupons: Coupons, readings: "pd.DataFrame"
) -> "dict[str, pd.DataFrame]":
    """Bring readings and lines of relation 3 into frames.

    Parameters
    ----------
    method : Method
        The batch's, with what was fitted.
    reduced : Reduced
        The batch's.
    coupons : Coupons
        For names and conditions.
    readings : DataFrame
        ``readings.csv``.

    Returns
    -------
    dict of str to DataFrame
        `size_points`, `size_lines` and `size_conditions`, as the plot says; nothing where no
        size effect is taken out.
    """
    import pandas as pd

    if method.laws.size_effect == "none":
        return {}
    held = [str(name or "") for name in coupons.conditions.to_pylist()]
    of = dict(zip(coupons.ids.to_pylist(), held, strict=True))
    small = readings[readings["scale"] == "HV"]
    hardness = units.to_si(small["hardness"].to_numpy(dtype=np.float64), "kgf/mm2")
    x, y = _place(hardness, small["force_n"].to_numpy(dtype=np.float64))
    points = pd.DataFrame(
        {
            "condition": [of[name] for name in small["coupon_id"]],
            "inverse_depth_per_um": x,
            "square_gpa2": y,
        }
    )
    rows = np.flatnonzero((reduced.scale == HV) & np.isfinite(reduced.mean))
    at, square = _place(reduced.mean[rows], reduced.applied_force[rows])
    slope = _slopes(method, reduced.line[rows], at, square)
    lines = pd.DataFrame(
        {
            "condition": [held[i] for i in rows],
            "intercept_gpa2": square - slope * at,
            "slope_gpa2_um": slope,
        }
    )
    remarks = _remarks(method)
    names = list(dict.fromkeys(points["condition"]))
    told = pd.DataFrame({"condition": names, "remark": [remarks.get(name, "") for name in names]})
    return {"size_points": points, "size_lines": lines, "size_conditions": told}


def _place(hardness: _Floats, force: _Floats) -> tuple[_Floats, _Floats]:
    """Give 1/h [1/um] and the square of the pressure over the projected area [GPa^2]."""
    depth = indentation_depth(vickers_diagonal(force, hardness))
    return 1.0 / units.from_si(depth, "um"), projected_pressure(hardness) ** 2 / _GPA2


def _slopes(method: Method, line: NDArray[np.int64], at: _Floats, square: _Floats) -> _Floats:
    """Give the slope of each coupon's line. [GPa^2.um]."""
    if method.laws.size_effect == "length":
        length = method.inputs["indentation.characteristic_depth_um"].value
        star = float(units.from_si(length, "um"))
        return square * star / (1.0 + star * at)
    if method.laws.size_effect == "strength":
        strength = method.inputs["indentation.size_strength_gpa2_um"].value
        return np.full(len(at), float(units.from_si(strength, "GPa2.um")))
    fitted = [x.value for name, x in method.inputs.items() if name.startswith(SIZE_EFFECT)]
    each = np.append(units.from_si(np.array(fitted), "GPa2.um"), np.nan)
    return each[line]


def _remarks(method: Method) -> Mapping[str, str]:
    section = cast("Mapping[str, object]", method.document["indentation"])
    lines = cast("list[dict[str, float]]", section.get("size_lines", []))
    return {
        str(line["condition"]): f"{line['bulk_hardness_gpa']:.3g}, "
        f"{line['characteristic_depth_um']:.3g}"
        for line in lines
    }
