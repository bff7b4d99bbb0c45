"""The published table of an anneal: outcomes in SI to rows in the contract's units."""

from collections.abc import Mapping
from typing import Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts
from coldwork.interval.onward import Outcome
from coldwork.jobs.annealing.coupons import size_of
from coldwork.jobs.annealing.states import Row
from coldwork.units import from_si

__all__ = ["DRAGS", "UNITS", "anneal_table", "verdicts"]

_Floats: TypeAlias = NDArray[np.float64]
UNITS: Final[Mapping[str, str]] = {
    "driving_pressure_mpa": "MPa",
    "zener_pressure_mpa": "MPa",
    "curvature_pressure_mpa": "MPa",
    "net_pressure_mpa": "MPa",
    "critical_radius_um": "um",
    "critical_radius_particles_um": "um",
    "critical_radius_net_um": "um",
    "dislocation_stress_mpa": "MPa",
    "stored_energy_j_per_g": "J/g",
    "released_j_per_g": "J/g",
    "adiabatic_rise_k": "K",
    "recrystallised_fraction": "1",
    "time_s": "s",
    "temperature_c": "Cel",
}
DRAGS: Final = ("zener_pressure_mpa", "curvature_pressure_mpa")
_NO_ENERGY: Final = "the results hold no stored energy of this coupon"
_WHY_NOT: Final = {
    "cold-worked": "no size grows: what holds the boundary is as large as what drives it",
    "recovered": "its stress alone would carry the lines past what holds them: the law of "
    "recovery does not reach there",
    "annealed": "the boundary is held, so that nothing recrystallises",
    "holding": "no temperature is high enough in that time",
}
_NO_HEAT_CAPACITY: Final = "no heat capacity of the metal is known"
_NOT_ABOVE: Final = (
    "its net pressure is not above zero, and whether the boundary starts is undecided"
)
_LEANS: Final = "holds if the boundary can start: its net pressure is undecided"


def verdicts(net: Outcome, *, dragged: bool) -> list[str]:
    """Say of each coupon whether its boundary can start; empty if not known, or nothing drags."""
    words = np.full(net.value.shape, "undecided", dtype=object)
    words[net.ends.lower > 0.0] = "can-start"
    words[net.ends.upper <= 0.0] = "held"
    words[(np.isnan(net.ends.lower) & np.isnan(net.ends.upper)) | (not dragged)] = ""
    return [str(word) for word in words]


def anneal_table(
    ids: tuple[str, ...], outcomes: Mapping[Row, Outcome], coverage: float
) -> pa.Table:
    """Build ``anneal.csv``, coupon by coupon.

    Parameters
    ----------
    ids : tuple of str, n
        The coupons.
    outcomes : mapping of Row to Outcome
        m rows of each. [SI]
    coverage : float
        Of the intervals. [1]

    Returns
    -------
    pyarrow.Table, n m rows
        In the contract's order and units.
    """
    rows, n, m = list(outcomes), len(ids), len(outcomes)
    numbers = [_published(row, outcomes[row]) for row in rows]
    dragged = any(row.quantity in DRAGS for row in rows)
    told = {
        row.state: verdicts(outcomes[row], dragged=dragged)
        for row in rows
        if row.quantity == "net_pressure_mpa"
    }
    last = list(told.values())[-1]
    words = [_words(row, outcomes, told, last) for row in rows]

    def each(values: list[object]) -> list[object]:
        return values * n

    def flat(parts: list[_Floats]) -> _Floats:
        return np.stack([np.broadcast_to(part, (n,)) for part in parts], axis=1).ravel()

    seconds = [row.seconds for row in rows]
    celsius = [None if row.kelvin is None else float(from_si(row.kelvin, "Cel")) for row in rows]
    columns = {
        "coupon_id": pa.array([name for name in ids for _ in range(m)], pa.string()),
        "state": pa.array(each([row.state for row in rows]), pa.string()),
        "quantity": pa.array(each([row.quantity for row in rows]), pa.string()),
        "fraction": pa.array(each([row.fraction for row in rows]), pa.float64()),
        "at_temperature_c": pa.array(each(list(celsius)), pa.float64()),
        "at_time_s": pa.array(each(list(seconds)), pa.float64()),
        "unit": pa.array(each([UNITS[row.quantity] for row in rows]), pa.string()),
        "coverage": pa.array(np.full(n * m, coverage)),
        "verdict": _texts([verdict for verdict, _ in words], n),
        "reason": _texts([reason for _, reason in words], n),
    }
    columns |= {key: pa.array(flat([x[key] for x in numbers])) for key in numbers[0]}
    return pa.table({name: columns[name] for name in contracts.load("out/anneal").columns})


def _published(row: Row, x: Outcome) -> dict[str, _Floats]:
    unit = UNITS[row.quantity]
    size = size_of(unit)
    freedom = x.combined.degrees_of_freedom
    return {
        "value": from_si(x.value, unit),
        "u_own": x.combined.u_own / size,
        "u_shared": x.combined.u_shared / size,
        "u": x.combined.u / size,
        "lower": from_si(x.ends.lower, unit),
        "upper": from_si(x.ends.upper, unit),
        "degrees_of_freedom": np.where(
            np.isfinite(freedom) & np.isfinite(x.combined.u), freedom, np.nan
        ),
    }


def _words(
    row: Row, outcomes: Mapping[Row, Outcome], told: Mapping[str, list[str]], last: list[str]
) -> tuple[list[str], list[str]]:
    """Give verdict and reason of a row of each coupon."""
    value = outcomes[row].value
    n = len(last)
    verdict = told[row.state] if row.quantity == "net_pressure_mpa" else [""] * n
    nothing = np.isnan(outcomes[Row("cold-worked", "driving_pressure_mpa")].value)
    left = outcomes.get(Row("recovered", "driving_pressure_mpa"))
    lost = nothing if left is None else np.isnan(left.value)
    reasons = []
    for i in range(n):
        if not np.isnan(value[i]):
            leans = row.state == "annealed" and last[i] == "undecided"
            reasons.append(_LEANS if leans else "")
        elif row.state != "holding" and nothing[i]:
            reasons.append(_NO_ENERGY)
        elif row.state in {"recovered", "annealed"} and lost[i]:
            reasons.append(_WHY_NOT["recovered"])
        elif row.quantity == "adiabatic_rise_k" and not np.isnan(_released(row, outcomes)[i]):
            reasons.append(_NO_HEAT_CAPACITY)
        elif row.state == "annealed" and last[i] == "undecided":
            reasons.append(_NOT_ABOVE)
        else:
            sizes = row.quantity.startswith("critical")
            reasons.append(_WHY_NOT["cold-worked" if sizes else row.state])
    return verdict, reasons


def _released(row: Row, outcomes: Mapping[Row, Outcome]) -> _Floats:
    return outcomes[Row(row.state, "released_j_per_g")].value


def _texts(rows: list[list[str]], n: int) -> pa.StringArray:
    words = [rows[j][i] or None for i in range(n) for j in range(len(rows))]
    return pa.array(words, pa.string())
