"""The heat that calorimetry should find for a computed stored energy, and its table."""

from collections.abc import Mapping
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.inputs.method import Method
from coldwork.interval.combine import Ends, Spread, combine
from coldwork.jobs.figures import Figures
from coldwork.measured import Measured, Value
from coldwork.statistics.student import student_quantile

__all__ = ["HEAT_TABLE", "expected_heat", "expected_heat_table", "has_heat"]

_Floats = NDArray[np.float64]
_Column: TypeAlias = "pa.Array[Any]"

HEAT_TABLE: Final = "expected_heat"
_RATIO: Final = "heat.ratio"
_INTERCEPT: Final = "heat.intercept_j_per_g"
_STORED: Final = "stored_energy_j_per_g"
_HEAT: Final = "expected_heat_j_per_g"


def has_heat(method: Method) -> bool:
    """Tell whether the sheet says how heat follows from stored energy."""
    return _RATIO in method.inputs


def expected_heat(
    method: Method,
    inputs: Mapping[str, Value],
    spreads: Mapping[str, Spread],
    stored: Figures,
) -> Figures:
    r"""Give the heat that is expected of each coupon.

    .. math:: q = a + r u, \qquad
        q_\pm = q \pm \sqrt{(r (u_\pm - u))^2 + k^2 u^2(a + r u | u)}

    Parameters
    ----------
    method : Method
        Of a sheet with a section ``[heat]``.
    inputs : mapping of str to Value
        From `inputs_of`. [SI]
    spreads : mapping of str to Spread
        Of every input.
    stored : Figures
        Stored energy per mass of n coupons, as it is published. [J/kg]

    Returns
    -------
    Figures
        The heat. Where there is no stored energy but ends of it, there are ends. [J/kg]
    """
    ratio, intercept = inputs[_RATIO], inputs[_INTERCEPT]
    heat = _measured(ratio * stored.result + intercept)
    combined = combine(heat, spreads)
    k = student_quantile(
        (1.0 + method.coverage) / 2.0, np.nan_to_num(combined.degrees_of_freedom, nan=np.inf)
    )
    slope = method.inputs[_RATIO].value
    at = np.where(np.isnan(stored.result.value), 0.0, stored.result.value)
    there = slope * at + method.inputs[_INTERCEPT].value

    def end(energy: _Floats, sign: float) -> _Floats:
        own = k * _u_of_line(ratio, intercept, np.where(at > 0.0, at, energy), spreads)
        return np.asarray(np.maximum(0.0, there + sign * np.hypot(slope * (energy - at), own)))

    return Figures(heat, combined, Ends(end(stored.ends.lower, -1.0), end(stored.ends.upper, 1.0)))


def expected_heat_table(ids: pa.StringArray, stored: Figures, heat: Figures) -> pa.Table:
    """Build a slice of ``expected_heat.csv``.

    Parameters
    ----------
    ids : pyarrow.StringArray of n
        The coupons.
    stored, heat : Figures
        Theirs. [J/kg]

    Returns
    -------
    pyarrow.Table
        In the contract's order and units.
    """
    c = heat.combined
    numbers = {
        _STORED: stored.result.value,
        _HEAT: heat.result.value,
        f"u_own_{_HEAT}": c.u_own,
        f"u_shared_{_HEAT}": c.u_shared,
        f"u_{_HEAT}": c.u,
        f"lower_{_HEAT}": heat.ends.lower,
        f"upper_{_HEAT}": heat.ends.upper,
    }
    columns: dict[str, _Column] = {"coupon_id": ids}
    for name, values in numbers.items():
        wide = np.broadcast_to(units.from_si(values, "J/g"), (len(ids),))
        columns[name] = pa.array(wide, pa.float64())
    names = contracts.load(f"out/{HEAT_TABLE}").columns
    return pa.table({name: columns[name] for name in names})


def _u_of_line(
    ratio: Value, intercept: Value, energy: _Floats, spreads: Mapping[str, Spread]
) -> _Floats:
    """Give the line's own standard uncertainty at an energy that is taken as exact."""
    line = _measured(ratio * energy + intercept)
    return combine(line, spreads).u if line.sensitivities else np.zeros(energy.shape)


def _measured(x: Value) -> Measured:
    return x if isinstance(x, Measured) else Measured(np.asarray(x, dtype=np.float64))
