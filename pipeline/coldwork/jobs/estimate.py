"""One value from options: a density, a stress or a hardness to stored energy."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields, replace
from math import isfinite
from pathlib import Path
from typing import Any, Final

import numpy as np

from coldwork import units
from coldwork.chain import Start, core_alone, line
from coldwork.errors import UsageError
from coldwork.formulas.line_energy import line_energy_rule_of_thumb
from coldwork.inputs.core import core_words
from coldwork.inputs.method import Method
from coldwork.interval.combine import Spread, combine
from coldwork.interval.reach import LATE
from coldwork.jobs.evaluate import REPEATABILITY, evaluate, inputs_of
from coldwork.jobs.options import method_of_options
from coldwork.jobs.remarks import NOTHING, UNJUDGED, remarks
from coldwork.jobs.tables import unit_of
from coldwork.judge.coupon_rules import State
from coldwork.measured import Measured, Value, value_of
from coldwork.rules.forces import SCALES, SECTIONS
from coldwork.statistics.rounding import interval_ends, with_uncertainty
from coldwork.statistics.student import student_quantile

__all__ = ["Estimate", "Known", "estimate"]

_DENSITY: Final = "dislocation density"  # as the name of an input
_CAUTION: Final = (
    "Stored energy in dislocations alone: calorimetry finds more, since point defects and stacking "
    "faults also release heat. An estimate releases no part by itself."
)


@dataclass(frozen=True)
class Known:
    """A number with what is known of it.

    Attributes
    ----------
    value : float
        NaN where there is none.
    u : float
        Standard uncertainty.
    lower, upper : float
        Interval at the coverage; NaN where an end does not exist or is infinite.
    """

    value: float
    u: float = float("nan")
    lower: float = float("nan")
    upper: float = float("nan")


@dataclass(frozen=True)
class Estimate:
    """What one density, stress or hardness comes to; units stand in the names.

    Attributes
    ----------
    coverage : float
        Of the intervals. [1]
    rule_of_thumb_line_energy_j_per_m : float
        G b^2 / 2, beside the full line energy. [J/m]
    rule_of_thumb_over_line_energy : float
        How far off that is: its ratio to the full line energy. [1]
    total_line_length_m, total_stored_energy_j : Known
        In the volume that was given; NaN without one.
    core : str
        What the core radius means, with or without an energy of the core.
    remark : str
        What a person must know about it, a line for all that a batch would flag; empty where
        there is nothing.
    """

    flow_stress_mpa: Known
    baseline_stress_mpa: Known
    dislocation_stress_mpa: Known
    dislocation_density_per_m2: Known
    mean_spacing_nm: Known
    line_energy_j_per_m: Known
    stored_energy_j_per_m3: Known
    stored_energy_j_per_mol: Known
    stored_energy_j_per_g: Known
    temperature_rise_k: Known
    coverage: float
    rule_of_thumb_line_energy_j_per_m: float
    rule_of_thumb_over_line_energy: float
    total_line_length_m: Known
    total_stored_energy_j: Known
    core: str
    remark: str

    def as_json(self) -> dict[str, Any]:
        """Give it for a program to read: NaN is null."""
        return {field.name: _plain(getattr(self, field.name)) for field in fields(self)}

    def text(self) -> str:
        """Tell it to a person, rounded: u to two digits."""
        lines = ["Stored energy in dislocations, an estimate", ""]
        for name, unit, words in _TOLD:
            known: Known = getattr(self, name)
            if isfinite(known.value) or isfinite(known.upper):
                lines.append(f"  {words:32s} {_told(known, unit, self.coverage)}")
        thumb, ratio = self.rule_of_thumb_line_energy_j_per_m, self.rule_of_thumb_over_line_energy
        far = f": {100 * (ratio - 1):+.1f} % off the full line energy" if isfinite(ratio) else ""
        lines += [
            "",
            f"  {'rule of thumb G b^2 / 2':32s} {with_uncertainty(thumb, None, 'J/m')}{far}",
        ]
        lines += ["", f"Of the line energy: {self.core}."]
        return "\n".join([*lines, "", *([self.remark, ""] if self.remark else []), _CAUTION])


_TOLD: Final = (
    ("flow_stress_mpa", "MPa", "flow stress"),
    ("baseline_stress_mpa", "MPa", "baseline stress"),
    ("dislocation_stress_mpa", "MPa", "dislocation stress"),
    ("dislocation_density_per_m2", "m-2", "dislocation density"),
    ("mean_spacing_nm", "nm", "mean spacing"),
    ("line_energy_j_per_m", "J/m", "line energy"),
    ("stored_energy_j_per_m3", "J/m3", "stored energy"),
    ("stored_energy_j_per_mol", "J/mol", "per mole"),
    ("stored_energy_j_per_g", "J/g", "per gram"),
    ("temperature_rise_k", "K", "temperature rise if released"),
    ("total_line_length_m", "m", "length of line in the volume"),
    ("total_stored_energy_j", "J", "stored energy in the volume"),
)
_STRESSES: Final = ("flow_stress_mpa", "baseline_stress_mpa", "dislocation_stress_mpa")


def estimate(
    material: str | None = None,
    *,
    density_per_m2: float | None = None,
    stress_mpa: float | None = None,
    hardness: float | None = None,
    u: float | None = None,
    scale: str = "HV",
    force_n: float | None = None,
    ball_mm: float | None = None,
    volume_mm3: float | None = None,
    sheet: str | Path | None = None,
    settings: Sequence[str] = (),
) -> Estimate:
    """Estimate the stored energy that goes with one density, stress or hardness.

    Parameters
    ----------
    material : str, optional
        A metal of the library; the sheet's own where it is not said.
    density_per_m2 : float, optional
        Dislocation density. Exactly one of this and the next two is given. [1/m^2]
    stress_mpa : float, optional
        Flow stress. [MPa]
    hardness : float, optional
        Hardness number of `scale`. [kgf/mm^2]
    u : float, optional
        Standard uncertainty of what is given; exact without it. [its unit]
    scale : str, optional
        ``HV``, ``HBW`` or ``HK``.
    force_n, ball_mm : float, optional
        Needed for HBW. [N], [mm]
    volume_mm3 : float, optional
        Asks for the length of line and the energy in it too. [mm^3]
    sheet : str or Path, optional
        A batch folder whose sheet gives all constants.
    settings : sequence of str, optional
        Keys of a sheet as TOML, such as ``strength.baseline_mpa = 50``; they come last.

    Returns
    -------
    Estimate
        With uncertainty and interval.

    Raises
    ------
    UsageError
        If what is given does not fit together, or makes no method.
    BatchRefused
        If the sheet cannot be read.
    """
    numbers = {"density": density_per_m2, "stress": stress_mpa, "hardness": hardness}
    kind, value = _one_of(numbers)
    given = _Given(kind, value, 0.0 if u is None else u, scale, force_n, ball_mm)
    _refuse_odd(given, volume_mm3)
    method = method_of_options(material, kind, sheet, settings)
    inputs, spreads = inputs_of(method)
    if kind == "density":
        figures, state = _from_density(method, inputs, spreads, given)
    else:
        figures, state = _from_strength(method, inputs, spreads, given)
    remark = remarks(method, state, from_density=kind == "density")
    return _finished(method, inputs, figures, remark, volume_mm3)


@dataclass(frozen=True)
class _Given:
    """The one number that is known, with what goes with it.

    Attributes
    ----------
    kind : str
        ``density``, ``stress`` or ``hardness``.
    value, u : float
        The number and its standard uncertainty. [1/m^2, MPa or kgf/mm^2]
    scale : str
        Of a hardness.
    force_n, ball_mm : float or None
        Of a hardness. [N], [mm]
    """

    kind: str
    value: float
    u: float
    scale: str
    force_n: float | None
    ball_mm: float | None


def _one_of(numbers: Mapping[str, float | None]) -> tuple[str, float]:
    said = [(kind, number) for kind, number in numbers.items() if number is not None]
    if len(said) != 1:
        found = " and ".join(kind for kind, _ in said) if said else "none of them"
        message = f"give exactly one of density, stress and hardness; {found} was given"
        raise UsageError(message)
    return said[0]


def _refuse_odd(given: _Given, volume_mm3: float | None) -> None:
    numbers = {
        given.kind: given.value,
        "u": given.u,
        "force": given.force_n,
        "ball": given.ball_mm,
        "volume": volume_mm3,
    }
    for name, number in numbers.items():
        low = 0.0 if name == "u" else np.nextafter(0.0, 1.0)
        if number is not None and not low <= number < np.inf:
            message = f"{name} must be a positive number, not {number:g}"
            raise UsageError(message)
    _refuse_idle(given)
    if given.scale not in SCALES:
        message = f"no hardness scale is called {given.scale!r}; there are {', '.join(SCALES)}"
        raise UsageError(message)
    unsized = given.force_n is None or given.ball_mm is None
    if given.kind == "hardness" and given.scale == "HBW" and unsized:
        message = "a Brinell hardness needs its force and its ball diameter"
        raise UsageError(message)


def _refuse_size_effect(method: Method, given: _Given) -> None:
    """Refuse a size effect of one number alone or without a force, and a force without one."""
    if given.scale == "HBW":
        return
    if given.scale != "HV" or method.laws.size_effect == "none":
        if given.force_n is not None:
            message = (
                f"force belongs to HBW or to a size effect, and neither is here: {given.scale}"
            )
            raise UsageError(message)
        return
    if method.laws.size_effect == "fitted":
        message = "a size effect cannot be fitted to one number: say its length or strength"
        raise UsageError(message)
    if given.force_n is None:
        message = "a size effect goes by the depth of the indent: give the force"
        raise UsageError(message)


def _refuse_idle(given: _Given) -> None:
    """Refuse what cannot act on the number that is given."""
    sized = given.force_n is not None or given.ball_mm is not None
    if given.kind != "hardness" and (sized or given.scale != SCALES[0]):
        message = f"scale, force and ball belong to a hardness, and a {given.kind} was given"
        raise UsageError(message)
    if given.ball_mm is not None and given.scale in SCALES and given.scale != "HBW":
        message = f"ball belongs to HBW, and a hardness {given.scale} was given"
        raise UsageError(message)


def _from_strength(
    method: Method, inputs: Mapping[str, Value], spreads: Mapping[str, Spread], given: _Given
) -> tuple[dict[str, Known], State]:
    unit, code = "MPa", -1
    if given.kind == "hardness":
        unit, code = "kgf/mm2", SCALES.index(given.scale)
        factor = f"{SECTIONS[code]}.constraint_factor"
        if factor not in method.inputs:
            message = f"nothing turns {given.scale} into a flow stress: say --set '{factor} = ...'"
            raise UsageError(message)
        _refuse_size_effect(method, given)
    mean, u = float(units.to_si(given.value, unit)), float(units.to_si(given.u, unit))
    start = Start(
        Measured(np.array([mean]), {REPEATABILITY: np.asarray(1.0)}),
        np.array([code], dtype=np.int8),
        NOTHING if given.force_n is None else np.array([given.force_n]),
        NOTHING if given.ball_mm is None else units.to_si(np.array([given.ball_mm]), "mm"),
        NOTHING,
        NOTHING,
        method.plastic_strain,
        method.test_temperature,
        method.reference_temperature,
    )
    own = Spread(u, shared=False, degrees_of_freedom=np.inf)
    found = evaluate(method, inputs, {**spreads, REPEATABILITY: own}, start)
    figures = {
        name: Known(
            float(found.results[name].value[0]),
            float(found.combined[name].u[0]),
            float(found.ends[name].lower[0]),
            float(found.ends[name].upper[0]),
        )
        for name in (*_STRESSES, *LATE)
    }
    saturation = method.inputs.get("indentation.saturation_stress_mpa")
    state = replace(
        UNJUDGED,
        route=method.laws.route,
        stress=found.stress.value,
        u_stress=found.reach.u_stress.u,
        upper_stress_end=found.ends["dislocation_stress_mpa"].upper,
        unwinding=method.laws.unwinding,
        unwound=found.strength.unwound,
        indented_stress=value_of(found.strength.tested_stress),
        saturation_stress=np.nan if saturation is None else saturation.value,
        density=found.results["dislocation_density_per_m2"].value,
        radius_ratio=found.reach.radius_ratio,
        densest=found.reach.densest,
    )
    return figures, state


def _from_density(
    method: Method, inputs: Mapping[str, Value], spreads: Mapping[str, Spread], given: _Given
) -> tuple[dict[str, Known], State]:
    """From a density there is no stress to take ends in: y exp(-+ k u / y) is the interval."""
    if method.laws.structure == "cells" and method.laws.taylor.startswith("logarithmic"):
        message = (
            "a density cannot be parted between walls and interiors by a ratio of stresses with a "
            "logarithmic law: give a stress, or law = 'constant'"
        )
        raise UsageError(message)
    nowhere = np.array([-1], dtype=np.int8)
    start = Start(NOTHING, nowhere, NOTHING, NOTHING, NOTHING, NOTHING, method.plastic_strain)
    known = {**spreads, _DENSITY: Spread(given.u, shared=False, degrees_of_freedom=np.inf)}
    rho = Measured(np.array([given.value]), {_DENSITY: np.asarray(1.0)})
    figures = dict.fromkeys(_STRESSES, Known(float("nan")))
    k = float(student_quantile((1.0 + method.coverage) / 2.0, np.array([np.inf]))[0])
    found = line(method.laws, inputs, rho, start)
    for name, x in found.items():
        if name not in LATE or not isinstance(x, Measured):
            continue
        size = float(combine(x, known).u[0])
        y = float(x.value[0])
        with np.errstate(invalid="ignore"):
            factor = float(np.exp(k * size / y))
        figures[name] = Known(y, size, y / factor, y * factor)
    state = replace(
        UNJUDGED,
        density=rho.value,
        densest=value_of(found.get("wall_density_per_m2", rho)),
        radius_ratio=value_of(found["radius_ratio"]),
    )
    return figures, state


def _finished(
    method: Method,
    inputs: Mapping[str, Value],
    figures: Mapping[str, Known],
    remark: str,
    volume_mm3: float | None,
) -> Estimate:
    told = {name: _published(name, known) for name, known in figures.items()}
    thumb = float(
        line_energy_rule_of_thumb(
            value_of(inputs["material.shear_modulus_gpa"]),
            value_of(inputs["material.burgers_vector_nm"]),
        )
    )
    volume = float("nan") if volume_mm3 is None else volume_mm3 * 1e-9  # [m^3]
    return Estimate(
        **{name: told[name] for name in (*_STRESSES, *LATE) if name != "stored_fraction_of_work"},
        coverage=method.coverage,
        rule_of_thumb_line_energy_j_per_m=thumb,
        rule_of_thumb_over_line_energy=thumb / figures["line_energy_j_per_m"].value,
        total_line_length_m=_times(figures["dislocation_density_per_m2"], volume),
        total_stored_energy_j=_times(figures["stored_energy_j_per_m3"], volume),
        core=core_words(method.inputs, core_alone(method.laws, inputs)),
        remark=remark,
    )


def _times(known: Known, factor: float) -> Known:
    return Known(*(x * factor for x in (known.value, known.u, known.lower, known.upper)))


def _published(name: str, known: Known) -> Known:
    unit = unit_of(name)
    numbers = (known.value, known.u, known.lower, known.upper)
    return Known(*(float(units.from_si(x, unit)) for x in numbers))


def _told(known: Known, unit: str, coverage: float) -> str:
    value = with_uncertainty(known.value, known.u, unit) if isfinite(known.value) else "no value"
    low, high = (end or "none" for end in interval_ends(known.lower, known.upper, None))
    nothing = not isfinite(known.lower) and not isfinite(known.upper)
    if nothing or known.lower == known.upper:
        return value
    return f"{value:28s} {100 * coverage:g} % interval {low} to {high}"


def _plain(x: object) -> object:
    if isinstance(x, Known):
        return {f.name: _plain(getattr(x, f.name)) for f in fields(x)}
    return None if isinstance(x, float) and not isfinite(x) else x
