"""One slice of coupons through chain and interval: mean of the readings to quantities."""

from collections.abc import Collection, Mapping
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork.chain import Start, Strength, strength
from coldwork.inputs.method import Method
from coldwork.intake.coupons import Coupons
from coldwork.interval.before import before_superposition
from coldwork.interval.combine import Combined, Ends, Spread, combine, strength_ends
from coldwork.interval.reach import LATE, Reach
from coldwork.jobs.prior import work_of
from coldwork.jobs.routes import Beside, Routes, join_routes
from coldwork.measured import Measured, Value, broadcast, kept_where, select, value_of
from coldwork.reduce.reduced import Reduced
from coldwork.sampling.sampler import Sampled
from coldwork.scatter import Repeatability

__all__ = [
    "FLOW_REPEATABILITY",
    "GRAIN",
    "QUANTITIES",
    "REPEATABILITY",
    "STRENGTHS",
    "Evaluated",
    "evaluate",
    "inputs_of",
    "start_of",
    "with_readings",
]

REPEATABILITY: Final = "repeatability"  # name of the input that the readings' scatter makes
FLOW_REPEATABILITY: Final = "repeatability:flow"  # that of a flow curve beside indents
GRAIN: Final = "grain_size_um"  # and of that which a coupon's grain size makes
STRENGTHS: Final = (
    "hardness",
    "flow_stress_mpa",
    "baseline_stress_mpa",
    "dislocation_stress_mpa",
)
QUANTITIES: Final = (*STRENGTHS, *LATE)


@dataclass(frozen=True)
class Evaluated:
    """What a slice of n coupons comes to. SI, arrays of shape (n,).

    Attributes
    ----------
    start : Start
        What the chain began with.
    strength : Strength
        The first half of the chain.
    reach : Reach
        The second half, ready to be asked for ends and probabilities.
    results : mapping of str to Measured
        Every quantity by column name.
    combined : mapping of str to Combined
        Their uncertainties.
    ends : mapping of str to Ends
        Their intervals at the method's coverage.
    spreads : mapping of str to Spread
        Every input's uncertainty, the coupons' own ones included.
    first_order : mapping of str to Ends or None
        The intervals by first order, where `ends` are those of draws.
    sampled, own : Sampled or None
        What draws say, of all inputs and with shared ones taken as exact.
    routes : Routes or None
        The two routes apart, where both are joined.
    """

    start: Start
    strength: Strength
    reach: Reach
    results: Mapping[str, Measured]
    combined: Mapping[str, Combined]
    ends: Mapping[str, Ends]
    spreads: Mapping[str, Spread]
    first_order: Mapping[str, Ends] | None = None
    sampled: Sampled | None = None
    own: Sampled | None = None
    routes: Routes | None = None

    @property
    def stress(self) -> Measured:
        """The dislocation stress, in Pa."""
        return self.reach.stress


def inputs_of(method: Method) -> tuple[dict[str, Value], dict[str, Spread]]:
    """Make the chain's inputs from the method's: `Measured` where they are uncertain.

    Parameters
    ----------
    method : Method
        The batch's method.

    Returns
    -------
    dict of str to Value
        By name; testers are left out, they act on the mean, and so are the components of
        calibrations, which act on what was calibrated. [SI]
    dict of str to Spread
        The uncertainty of each, testers too.
    """
    values: dict[str, Value] = {}
    spreads: dict[str, Spread] = {}
    for name, x in method.inputs.items():
        spreads[name] = Spread(x.u, x.shared, x.degrees_of_freedom)
        if name in method.mixes:
            mix = {source: np.asarray(c) for source, c in method.mixes[name].items()}
            values[name] = Measured(np.asarray(x.value), mix)
        elif not name.startswith(("tester:", "calibration:")):
            exact = np.float64(x.value)
            values[name] = Measured.of_input(name, x.value) if x.u > 0.0 else exact
    return values, spreads


def with_readings(method: Method, gathered: Method) -> Method:
    """Give a method what the batch's own readings told of testers and of size effects.

    Parameters
    ----------
    method : Method
        Another one for the same readings.
    gathered : Method
        That which they were read by.

    Returns
    -------
    Method
        With its inputs ``tester:ID`` and ``size_effect:CONDITION``.
    """
    told = ("tester:", "size_effect:")
    own = {name: x for name, x in gathered.inputs.items() if name.startswith(told)}
    return replace(method, testers=gathered.testers, inputs={**method.inputs, **own})


def start_of(
    method: Method, coupons: Coupons, reduced: Reduced, scatter: Repeatability, rows: slice
) -> tuple[Start, dict[str, Spread]]:
    """Make what a slice of coupons brings to the chain, and the spread of its own inputs."""
    mean = reduced.mean[rows]
    beside = method.both and method.laws.route == "flow"
    repeats = FLOW_REPEATABILITY if beside else REPEATABILITY
    slopes: dict[str, NDArray[np.float64]] = {repeats: np.asarray(1.0)}
    for tester in method.testers:
        share = reduced.shares[tester.id][rows]
        if tester.bias.u > 0.0 and reduced.shares[tester.id].any():
            slopes[tester.bias.name] = -mean * share / (1.0 + tester.bias.value)
    for name, slope in reduced.machine.items():
        if method.inputs[name].u > 0.0 and slope[rows].any():
            slopes[name] = slope[rows]
    own = {
        repeats: Spread(
            scatter.u[rows], shared=False, degrees_of_freedom=scatter.degrees_of_freedom[rows]
        )
    }
    grain: Value = coupons.grain_size[rows]
    u_grain = np.nan_to_num(coupons.u_grain_size[rows])
    if np.nansum(coupons.u_grain_size) > 0.0:
        grain = Measured.of_input(GRAIN, coupons.grain_size[rows])
        own[GRAIN] = Spread(u_grain, shared=False, degrees_of_freedom=np.inf)
    work = _prior_work(method, coupons, rows, grain)
    if method.laws.route == "indent" and not method.laws.unwinding:
        work = np.full(mean.shape, np.nan)  # the state includes the indent's own strain
    start = Start(
        Measured(mean, slopes),
        reduced.scale[rows],
        reduced.applied_force[rows],
        reduced.ball[rows],
        grain,
        work,
        method.plastic_strain,
        _temperature(method, reduced.temperature[rows]),
        method.reference_temperature,
        reduced.line[rows],
    )
    return start, own


def _prior_work(method: Method, coupons: Coupons, rows: slice, grain: Value) -> Value:
    """Give the work as it is stated, else along the curve; none of an annealed coupon's is 0."""
    value = coupons.prior_plastic_work[rows]
    work = np.where(value > 0.0, value, np.nan)
    stated = coupons.work_stated
    if method.laws.prior_work == "stated" or stated is None or bool(stated[rows].all()):
        return work
    curve = work_of(method, inputs_of(method)[0], coupons.prior_true_strain[rows], grain)
    curve = kept_where(curve, value > 0.0)
    return select(stated[rows].astype(np.int8), {1: work, 0: curve})


def _temperature(method: Method, tested: NDArray[np.float64]) -> NDArray[np.float64]:
    """Give the temperature of the tests; that of the sheet for a curve, which tells none. [K]."""
    return np.where(np.isnan(tested), method.test_temperature, tested)


def evaluate(
    method: Method,
    inputs: Mapping[str, Value],
    spreads: Mapping[str, Spread],
    start: Start,
    with_ends: Collection[str] = QUANTITIES,
    beside: Beside | None = None,
) -> Evaluated:
    """Run a slice of coupons through the chain and take the intervals.

    Parameters
    ----------
    method : Method
        Laws and coverage.
    inputs : mapping of str to Value
        From `inputs_of`. [SI]
    spreads : mapping of str to Spread
        Of every input, the coupons' own ones included.
    start : Start
        The slice.
    with_ends : collection of str, optional
        Quantities whose intervals are wanted; the others' ends are NaN.
    beside : Beside, optional
        The flow curves of a slice of both routes, which meet the indents at the
        dislocation stress.

    Returns
    -------
    Evaluated
        Everything about the slice, SI.
    """
    half, routes = strength(method.laws, inputs, start), None
    if beside is not None:
        half, routes = join_routes(method, inputs, spreads, half, beside)
    n = start.scale.shape[0]
    stress = _measured(half.dislocation_stress, n)
    before = before_superposition(method.laws, inputs, value_of(half.excess), value_of(half.strain))
    reach = Reach(method.laws, inputs, spreads, start, stress, before=before)
    results = _strengths(method, start, half, n) | reach.results
    probability = (1.0 + method.coverage) / 2.0
    blank = np.full(n, np.nan)
    combined: dict[str, Combined] = {}
    ends: dict[str, Ends] = {}
    for name, result in results.items():
        late = name in LATE
        combined[name] = reach.combined[name] if late else combine(result, spreads)
        if name not in with_ends:
            ends[name] = Ends(blank, blank)
        elif late:
            ends[name] = reach.interval(name, probability)
        elif name == "dislocation_stress_mpa" and reach.mapped:
            ends[name] = reach.stress_interval(probability)
        else:
            ends[name] = strength_ends(result.value, combined[name], probability)
    return Evaluated(start, half, reach, results, combined, ends, spreads, routes=routes)


def _strengths(method: Method, start: Start, half: Strength, n: int) -> dict[str, Measured]:
    found = {
        "flow_stress_mpa": half.flow_stress,
        "baseline_stress_mpa": half.baseline_stress,
        "dislocation_stress_mpa": half.dislocation_stress,
    }
    if method.laws.route == "indent":
        found = {"hardness": start.mean, **found}
    return {name: _measured(x, n) for name, x in found.items()}


def _measured(x: Value, n: int) -> Measured:
    wide = broadcast(x, (n,))
    return wide if isinstance(wide, Measured) else Measured(value_of(wide))
