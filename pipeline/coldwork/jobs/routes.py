"""Both routes of a slice: indents and flow curve brought to one strain, compared and joined."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

from coldwork import contracts, units
from coldwork.chain import Start, Strength, strength
from coldwork.inputs.both import SAME_STRAIN, flow_of
from coldwork.inputs.method import Method
from coldwork.interval.combine import Spread, combine
from coldwork.interval.routes import Agreement, agreement, joined
from coldwork.measured import Measured, Value, broadcast, value_of

__all__ = ["ROUTES_TABLE", "Beside", "Routes", "join_routes", "routes_table"]

_Bools = NDArray[np.bool_]
_Floats = NDArray[np.float64]
_Column: TypeAlias = "pa.Array[Any]"

ROUTES_TABLE: Final = "routes"


@dataclass(frozen=True)
class Beside:
    """The flow curves beside the indents of a slice of n coupons.

    Attributes
    ----------
    start : Start
        What they bring to the chain.
    sound, indents_sound : ndarray of bool, shape (n,)
        Where no error stands on the flow curve, and on the indents.
    """

    start: Start
    sound: _Bools
    indents_sound: _Bools


@dataclass(frozen=True)
class Routes:
    """Both routes of a slice of n coupons. SI, arrays of shape (n,).

    Attributes
    ----------
    beside : Beside
        The flow curves.
    flow : Strength
        The first half of the chain by the flow route.
    by_indent, by_flow : Measured
        Dislocation stress by each, NaN where a route has none.
    indent_strain, flow_strain : ndarray
        Test strain of the state that each describes. [1]
    agreement : Agreement
        How they compare; the first is that by indents.
    """

    beside: Beside
    flow: Strength
    by_indent: Measured
    by_flow: Measured
    indent_strain: _Floats
    flow_strain: _Floats
    agreement: Agreement

    @property
    def flow_alone(self) -> _Bools:
        """Where the flow curve alone was taken."""
        return np.asarray(self.agreement.weight == 0.0)

    @property
    def taken(self) -> NDArray[np.str_]:
        """Which routes the coupon's stress was taken from: indent, flow or both."""
        one = np.where(self.flow_alone, "flow", "indent")
        joint = np.isfinite(self.agreement.error)
        return np.where(joint, "both", one)


def join_routes(
    method: Method,
    inputs: Mapping[str, Value],
    spreads: Mapping[str, Spread],
    half: Strength,
    beside: Beside,
) -> tuple[Strength, Routes]:
    """Run the flow curves to the dislocation stress, compare them and join them there.

    Parameters
    ----------
    method : Method
        Of both routes.
    inputs : mapping of str to Value
        By name. [SI]
    spreads : mapping of str to Spread
        Of every input, the coupons' own ones included.
    half : Strength
        The first half of the chain by the indents.
    beside : Beside
        The flow curves.

    Returns
    -------
    Strength
        With the joined stress; where a coupon has no indents it is that of the flow curve.
    Routes
        The two apart.
    """
    n = len(half.test_strain)
    flow = strength(flow_of(method).laws, inputs, beside.start)
    by_indent = _measured(half.dislocation_stress, n).where(beside.indents_sound)
    by_flow = _measured(flow.dislocation_stress, n).where(beside.sound)
    alike = _alike(method, half, flow, spreads)
    found = agreement(by_indent, by_flow, spreads, method.coverage, alike)
    routes = Routes(beside, flow, by_indent, by_flow, half.test_strain, flow.test_strain, found)
    alone = routes.flow_alone

    def of_route(a: Value, b: Value) -> _Floats:
        return np.where(alone, value_of(b), value_of(a))

    both = replace(
        half,
        tested_stress=of_route(half.tested_stress, flow.tested_stress),
        flow_stress=joined(
            found.weight, _measured(half.flow_stress, n), _measured(flow.flow_stress, n)
        ),
        dislocation_stress=joined(found.weight, by_indent, by_flow),
        test_strain=of_route(half.test_strain, flow.test_strain),
        unwound=np.where(alone, flow.unwound, half.unwound),
    )
    return both, routes


def routes_table(method: Method, ids: pa.StringArray, routes: Routes, emptied: _Bools) -> pa.Table:
    """Build a slice of ``routes.csv``.

    Parameters
    ----------
    method : Method
        For its coverage.
    ids : pyarrow.StringArray of n
        The coupons.
    routes : Routes
        Theirs.
    emptied : ndarray of bool, shape (n,)
        Where an error leaves the coupon without a stress, whatever the routes say.

    Returns
    -------
    pyarrow.Table
        In the contract's order and units.
    """
    found, contract = routes.agreement, contracts.load(f"out/{ROUTES_TABLE}")
    apart, there = found.of_difference, np.isfinite(found.error)
    of_one = np.isfinite(routes.by_indent.value), np.isfinite(routes.by_flow.value)
    freedom = np.where(np.isinf(apart.degrees_of_freedom), np.nan, apart.degrees_of_freedom)
    told = (of_one[0] | of_one[1]) & ~emptied
    numbers = {
        "test_strain_indent": np.where(of_one[0], routes.indent_strain, np.nan),
        "dislocation_stress_indent_mpa": routes.by_indent.value,
        "u_dislocation_stress_indent_mpa": found.first.u,
        "test_strain_flow": np.where(of_one[1], routes.flow_strain, np.nan),
        "dislocation_stress_flow_mpa": routes.by_flow.value,
        "u_dislocation_stress_flow_mpa": found.second.u,
        "difference_mpa": found.difference.value,
        "u_difference_mpa": apart.u,
        "degrees_of_freedom": np.where(there, freedom, np.nan),
        "normalised_error": found.error,
        "weight_indent": np.where(told, found.weight, np.nan),
    }
    columns: dict[str, _Column] = {
        name: pa.array(units.from_si(x, contract.field(name).unit or "1"), pa.float64())
        for name, x in numbers.items()
    }
    columns |= {
        "coupon_id": ids,
        "coverage": pa.array(np.full(len(ids), method.coverage)),
        "taken": pa.array(routes.taken.tolist(), pa.string(), mask=~told),
    }
    return pa.table({name: columns[name] for name in contract.columns})


def _alike(method: Method, half: Strength, flow: Strength, spreads: Mapping[str, Spread]) -> _Bools:
    """Say where both describe one state: unwound, or at one strain that is exactly known.

    At saturation nothing is unwound, and no strain adds any strength.
    """
    n = len(half.test_strain)
    if method.laws.unwinding:
        return np.ones(n, dtype=bool)
    strain = _measured(half.strain, n)
    near = np.abs(strain.value - flow.test_strain) <= SAME_STRAIN
    return np.asarray(near & (combine(strain, spreads).u == 0.0))


def _measured(x: Value, n: int) -> Measured:
    wide = broadcast(x, (n,))
    return wide if isinstance(wide, Measured) else Measured(value_of(wide))
