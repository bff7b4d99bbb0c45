"""An anneal in words: what was found of each coupon, what could not be predicted, cautions."""

from collections.abc import Iterator, Mapping, Sequence
from math import isfinite
from textwrap import wrap
from typing import Final

from coldwork.inputs.furnace import Furnace
from coldwork.interval.onward import Outcome
from coldwork.jobs.annealing.coupons import Worked, size_of
from coldwork.jobs.annealing.states import Row, States
from coldwork.jobs.annealing.table import DRAGS, UNITS, verdicts
from coldwork.statistics.rounding import with_uncertainty
from coldwork.units import from_si

__all__ = ["CAUTIONS", "sentences", "text_of"]

_WIDTH: Final = 100  # characters
_NOTHING: Final = 1e-9  # below this a number is told as smaller than it
_MOST: Final = 60  # coupons that are told one by one
_DRAGS: Final = {
    "zener_pressure_mpa": "drag of particles (Zener)",
    "curvature_pressure_mpa": "pull of the boundary's curvature",
}
_ABOUT: Final = {
    "driving_pressure_mpa": "drives, MPa",
    "net_pressure_mpa": "net, MPa",
    "critical_radius_um": "critical radius, um",
    "critical_radius_net_um": "net of drags, um",
    "dislocation_stress_mpa": "dislocation stress, MPa",
    "recrystallised_fraction": "recrystallised",
    "stored_energy_j_per_g": "energy left, J/g",
    "released_j_per_g": "set free, J/g",
    "adiabatic_rise_k": "adiabatic rise, K",
}
_COLUMNS: Final = {
    "cold-worked": ("driving_pressure_mpa", "net_pressure_mpa", "critical_radius_um"),
    "recovered": ("dislocation_stress_mpa", "stored_energy_j_per_g", "net_pressure_mpa"),
    "annealed": (
        "recrystallised_fraction",
        "stored_energy_j_per_g",
        "released_j_per_g",
        "adiabatic_rise_k",
    ),
}
_HEADS: Final = {
    "cold-worked": "As cold-worked",
    "recovered": "Recovered: after the schedule, where nothing has recrystallised",
    "annealed": "Annealed: after the schedule, recrystallised and recovered parts together",
}
_SAID: Final = {"can-start": "can start", "held": "held", "undecided": "undecided", "": "unknown"}
CAUTIONS: Final = (
    "These are estimates. None of them replaces a furnace trial on this metal.",
    "Local codes and licensed practice at the furnace come first, whatever is computed here.",
    "The driving pressure is the energy in dislocations alone, one number for a coupon. Nuclei "
    "form where it is highest.",
)


def sentences(
    worked: Worked, given: Furnace, states: States, outcomes: Mapping[Row, Outcome]
) -> tuple[str, ...]:
    """Say what an anneal leans on, what could not be predicted, and the cautions.

    Parameters
    ----------
    worked : Worked
        The coupons.
    given : Furnace
        What was given.
    states : States
        What could be computed.
    outcomes : mapping of Row to Outcome
        What was.

    Returns
    -------
    tuple of str
        Sentences.
    """
    return (
        *_leanings(worked, given, states, outcomes),
        *_gaps(worked, given, states),
        *CAUTIONS,
    )


def text_of(
    worked: Worked,
    outcomes: Mapping[Row, Outcome],
    said: Sequence[str],
) -> str:
    """Tell an anneal to a person.

    Parameters
    ----------
    worked : Worked
        The coupons.
    outcomes : mapping of Row to Outcome
        What was computed. [SI]
    said : sequence of str
        From `sentences`.

    Returns
    -------
    str
        Lines of about a hundred characters.
    """
    head = f"Stored energy in the furnace: batch {worked.method['batch_id']}, {worked.metal}"
    lines = [f"{head}, {len(worked.ids)} coupons", ""]
    lines += list(_shared(worked, outcomes))
    for state, title in _HEADS.items():
        if Row(state, "stored_energy_j_per_g") in outcomes:
            lines += [f"{title} ({100 * worked.coverage:g} % interval)", ""]
            lines += [*_coupons(worked, state, outcomes), ""]
    for sentence in said:
        lines += wrap(sentence, _WIDTH, initial_indent="- ", subsequent_indent="  ")
    return "\n".join(lines)


def _shared(worked: Worked, outcomes: Mapping[Row, Outcome]) -> Iterator[str]:
    """Tell what is the same for every coupon."""
    rows = [(Row("cold-worked", name), words) for name, words in _DRAGS.items()]
    rows += [(row, _asked(row)) for row in outcomes if row.state == "holding"]
    told = False
    for row, words in rows:
        if row in outcomes:
            x = outcomes[row]
            unit = UNITS[row.quantity]
            value = float(from_si(x.value[0], unit))
            size = with_uncertainty(value, float(x.combined.u[0]) / size_of(unit), _shown(unit))
            ends = _interval(x, 0, unit)
            percent = f"{100 * worked.coverage:g} %"
            yield f"  {words:34s} {size:24s}" + (f" {percent} interval {ends}" if ends else "")
            told = True
    if told:
        yield ""


def _asked(row: Row) -> str:
    percent = f"{100 * (row.fraction or 0.0):g} %"
    if row.kelvin is not None:
        return f"time to {percent} at {float(from_si(row.kelvin, 'Cel')):g} C"
    return f"temperature to {percent} in {row.seconds:g} s"


def _coupons(worked: Worked, state: str, outcomes: Mapping[Row, Outcome]) -> Iterator[str]:
    names = [name for name in _COLUMNS[state] if Row(state, name) in outcomes]
    columns = [["coupon", *worked.ids[:_MOST]]]
    for name in names:
        x = outcomes[Row(state, name)]
        cells = [_cell(x, i, UNITS[name]) for i in range(len(worked.ids[:_MOST]))]
        columns.append([_ABOUT[name], *cells])
    net = outcomes.get(Row(state, "net_pressure_mpa"))
    if net is not None and any(row.quantity in DRAGS for row in outcomes):
        said = verdicts(net, dragged=True)[:_MOST]
        columns.append(["boundary", *(_SAID[verdict] for verdict in said)])
    widths = [max(map(len, column)) for column in columns]
    for line in zip(*columns, strict=True):
        padded = (cell.ljust(wide) for cell, wide in zip(line, widths, strict=True))
        yield "  " + "  ".join(padded).rstrip()
    if len(worked.ids) > _MOST:
        yield f"  and {len(worked.ids) - _MOST} more: --into DIR writes all of them"


def _cell(x: Outcome, i: int, unit: str) -> str:
    value = float(from_si(x.value[i], unit))
    ends = _interval(x, i, unit)
    told = _short(value) if isfinite(value) else "none"
    return f"{told} ({ends})" if ends else told


def _interval(x: Outcome, i: int, unit: str) -> str:
    low, high = (float(from_si(end[i], unit)) for end in (x.ends.lower, x.ends.upper))
    if not isfinite(low) and not isfinite(high):
        return ""
    if not isfinite(high):
        return f"from {_short(low)}"
    return f"{_short(low)} to {_short(high)}" if isfinite(low) else f"up to {_short(high)}"


def _short(x: float) -> str:
    if 0.0 < x < _NOTHING:
        return f"<{_NOTHING:g}".replace("e-0", "e-")
    return f"{x:.3g}".replace("e-0", "e-").replace("e+0", "e")


def _shown(unit: str) -> str:
    return {"Cel": "C"}.get(unit, unit)


def _leanings(
    worked: Worked, given: Furnace, states: States, outcomes: Mapping[Row, Outcome]
) -> Iterator[str]:
    energy = given.numbers.get("boundary.energy_j_per_m2")
    if energy is not None:
        told = with_uncertainty(energy.value, energy.u, "J/m2")
        source = f", {energy.input.source}" if energy.input.source else ""
        whose = "of the library" if energy.input.origin == "library" else "as given"
        yield f"Boundary energy {told}, {whose}{source}."
    radius = given.numbers.get("boundary.curvature_radius_um")
    if radius is not None:
        told = with_uncertainty(radius.value, radius.u, "um")
        yield f"Curvature is taken as 2 gamma / R, of a sphere with R = {told}."
    if states.recovers:
        yield (
            "Recovery comes first and lowers the pressure: the stored energy goes with the square "
            "of the dislocation stress. What it leaves is of metal that has not recrystallised."
        )
    if states.has_kinetics:
        yield (
            "The constants of recrystallisation hold for the cold work that they were measured "
            "at; they do not follow a coupon's own stored energy. Parts of a schedule are added."
        )
        if not given.correlation:
            yield (
                "ln B_0 and Q are taken as independent. Fitted together they are not: say "
                "[recrystallisation] correlation, or the intervals are too long."
            )
    nets = [x for row, x in outcomes.items() if row.quantity == "net_pressure_mpa"]
    if states.drags:
        found = verdicts(nets[-1], dragged=True)
        counts = {word: found.count(word) for word in ("can-start", "held", "undecided")}
        when = " after recovery" if states.recovers else ""
        yield (
            f"Boundaries{when}: {counts['can-start']} can start, {counts['held']} held, "
            f"{counts['undecided']} undecided, of {len(worked.ids)} coupons."
        )


def _gaps(worked: Worked, given: Furnace, states: States) -> Iterator[str]:
    if states.boundary_energy is None:
        yield (
            f"No boundary energy of {worked.metal} is known, so there are no critical sizes and no "
            "drags: say [boundary] energy_j_per_m2."
        )
    missing = [
        words
        for key, words in (("particles.fraction", "particles"), (_RADIUS, "curvature"))
        if key not in given.numbers
    ]
    if missing:
        yield (
            f"Nothing is taken off for {' and '.join(missing)}, none being given: a net pressure "
            "above zero is then necessary and not enough for a start."
        )
    if not given.has("recovery"):
        yield "Recovery is not predicted: that needs [recovery] of a furnace file, measured."
    elif not states.recovers:
        yield "Recovery is not predicted: it needs a schedule."
    if not states.has_kinetics:
        yield (
            "How far recrystallisation comes, how long it takes and what heat it sets free is not "
            "predicted: that needs [recrystallisation] of a furnace file, constants of kinetics "
            "measured on this metal at this cold work. Without them there are pressures and "
            "sizes only."
        )
    elif states.heating is None:
        yield "No schedule was given, so there is no fraction at its end."


_RADIUS: Final = "boundary.curvature_radius_um"
