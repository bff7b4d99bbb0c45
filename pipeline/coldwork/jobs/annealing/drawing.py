"""Plots of an anneal: its table as frames, then as pictures."""

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Final

import numpy as np
import pyarrow as pa

from coldwork import contracts
from coldwork.contracts.frames import frame
from coldwork.formulas.schedule import Schedule, schedule
from coldwork.interval.combine import Spread, combine
from coldwork.jobs.annealing.coupons import Worked
from coldwork.jobs.annealing.states import States, reaction_of
from coldwork.jobs.drawing import MOST_COUPONS
from coldwork.measured import Measured
from coldwork.plots import Context, furnace, save
from coldwork.statistics.student import student_quantile
from coldwork.units import from_si

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["drawn"]

_POINTS: Final = 120  # along the schedule


def drawn(
    worked: Worked, states: States, spreads: Mapping[str, Spread], table: pa.Table
) -> Iterator[tuple[str, bytes]]:
    """Draw pressures and progress; name and bytes of each file, SVG and PNG."""
    import pandas as pd

    context = Context(
        batch_id=str(worked.method["batch_id"]),
        material=worked.metal,
        route=str(worked.method["laws"]["route"]),
        coverage=worked.coverage,
    )
    frames = {
        "coupons": pd.DataFrame(worked.labels),
        "anneal": frame(contracts.load("out/anneal"), table),
    }
    figures = []
    if len(worked.ids) <= MOST_COUPONS:
        figures += [("pressures", f) for f in furnace.draw_pressures(frames, context)]
    if states.has_kinetics and states.heating is not None:
        along = _progress(states, states.heating, spreads, worked.coverage)
        figures += [("progress", f) for f in furnace.draw_progress({"progress": along}, context)]
    names = [name for name, _ in figures]
    for i, (name, figure) in enumerate(figures):
        several = names.count(name) > 1
        digits = len(str(names.count(name)))
        stem = f"{name}-{names[: i + 1].count(name):0{digits}d}" if several else name
        svg, png = save(figure, stem)
        yield f"plots/{stem}.svg", svg
        yield f"plots/{stem}.png", png


def _progress(
    states: States, heating: Schedule, spreads: Mapping[str, Spread], coverage: float
) -> "pd.DataFrame":
    """Give temperature and recrystallised fraction, with its interval, along the schedule."""
    import pandas as pd

    ends = (heating.times[0], heating.times[-1])
    times = np.unique(np.concatenate([np.linspace(*ends, _POINTS), heating.times]))
    kelvin = np.interp(times, heating.times, heating.temperatures)
    rows = []
    for time, now in zip(times[1:], kelvin[1:], strict=True):
        before = heating.times < time
        cut = schedule(
            np.append(heating.times[before], time), np.append(heating.temperatures[before], now)
        )
        one = reaction_of(states.numbers, cut)
        wide = Measured(np.atleast_1d(one.value), one.sensitivities)
        known = combine(wide, spreads)
        k = student_quantile((1.0 + coverage) / 2.0, known.degrees_of_freedom)
        reach = np.nan_to_num(k * known.u)
        rows.append([wide.value[0], (wide.value - reach)[0], (wide.value + reach)[0]])
    with np.errstate(over="ignore"):
        fractions = np.vstack([np.zeros(3), -np.expm1(-np.exp(np.array(rows)))])
    columns = dict(zip(("fraction", "lower", "upper"), fractions.T, strict=True))
    return pd.DataFrame({"time_s": times, "temperature_c": from_si(kelvin, "Cel"), **columns})
