"""One value from options: a density, a stress or a hardness to stored energy."""

import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from math import isfinite
from pathlib import Path
from typing import Any, Final

import numpy as np

from coldwork import units
from coldwork.chain import Start, line
from coldwork.errors import BatchRefused, Cause, UsageError
from coldwork.formulas.line_energy import line_energy_rule_of_thumb
from coldwork.inputs.method import Method
from coldwork.inputs.sheet import method_of
from coldwork.inputs.source import Sheet, SheetFile, read_sheet
from coldwork.interval.combine import Spread, combine
from coldwork.interval.reach import LATE
from coldwork.jobs.evaluate import REPEATABILITY, evaluate, inputs_of
from coldwork.jobs.tables import unit_of
from coldwork.measured import Measured, Value, value_of
from coldwork.rules.forces import SCALES
from coldwork.statistics.rounding import with_uncertainty
from coldwork.statistics.student import student_quantile

__all__ = ["Estimate", "Known", "estimate"]

DENSITY: Final = "dislocation density"
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
    remark : str
        What a person must know about it, empty where there is nothing.
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
        lines += ["", f"  {'rule of thumb G b^2 / 2':32s} {with_uncertainty(thumb, None, 'J/m')}{far}"]
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
    given = {"density": density_per_m2, "stress": stress_mpa, "hardness": hardness}
    kind = _one_of(given)
    value = given[kind]
    _refuse_odd(kind, value, u, scale, force_n, ball_mm, volume_mm3)
    method = _method(material, kind, sheet, settings)
    inputs, spreads = inputs_of(method)
    u_given = 0.0 if u is None else u
    if kind == "density":
        figures = _from_density(method, inputs, spreads, float(value or 0.0), u_given)
    else:
        unit = "MPa" if kind == "stress" else "kgf/mm2"
        if kind == "hardness" and _prefix(scale) + "constraint_factor" not in method.inputs:
            message = (
                f"nothing turns {scale} into a flow stress: say --set "
                f"'{_prefix(scale)}constraint_factor = ...'"
            )
            raise UsageError(message)
        start = _start(method, kind, float(units.to_si(value or 0.0, unit)), scale, force_n, ball_mm)
        own = Spread(float(units.to_si(u_given, unit)), shared=False, degrees_of_freedom=np.inf)
        figures = _from_strength(method, inputs, {**spreads, REPEATABILITY: own}, start)
    return _finished(method, inputs, figures, kind, volume_mm3)


def _prefix(scale: str) -> str:
    return "indentation." if scale == "HV" else f"indentation.{scale}."


def _one_of(given: Mapping[str, float | None]) -> str:
    said = [name for name, value in given.items() if value is not None]
    if len(said) != 1:
        found = " and ".join(said) if said else "none of them"
        message = f"give exactly one of density, stress and hardness; {found} was given"
        raise UsageError(message)
    return said[0]


def _refuse_odd(kind: str, value: float | None, u: float | None, scale: str, *sizes: float | None) -> None:
    force, ball, volume = sizes
    numbers = {kind: value, "u": u, "force": force, "ball": ball, "volume": volume}
    for name, number in numbers.items():
        low = 0.0 if name == "u" else np.nextafter(0.0, 1.0)
        if number is not None and not low <= number < np.inf:
            message = f"{name} must be a positive number, not {number:g}"
            raise UsageError(message)
    if scale not in SCALES:
        message = f"no hardness scale is called {scale!r}; there are {', '.join(SCALES)}"
        raise UsageError(message)
    if kind == "hardness" and scale == "HBW" and (force is None or ball is None):
        message = "a Brinell hardness needs its force and its ball diameter"
        raise UsageError(message)


def _method(
    material: str | None, kind: str, sheet: str | Path | None, settings: Sequence[str]
) -> Method:
    """Lay the options over the sheet, and both over the defaults."""
    base: dict[str, Any] = {"character": {"screw": 0.5, "edge": 0.5}}
    if sheet is not None:
        base = dict(read_sheet(Path(sheet)).tables)
    elif material is None:
        message = "name a metal of the library, or a batch folder with --sheet"
        raise UsageError(message)
    base["batch"] = {"id": "estimate"}
    base["files"] = {"coupons": "none.csv", "indents": "none.csv", "flow_stress": "none.csv"}
    base.pop("limits", None)
    base.pop("testers", None)
    if material is not None:
        base["material"] = {"name": material}
    strength_ = dict(base.get("strength", {}))
    strength_["route"] = "indent" if kind == "hardness" else "flow"
    base["strength"] = strength_
    for setting in settings:
        _lay_over(base, _parsed(setting))
    if kind == "density" and set(base["strength"]) <= {"route"}:
        base["strength"]["baseline_mpa"] = 0.0  # nothing hangs on it
    base["files"].pop("flow_stress" if kind == "hardness" else "indents")
    options = Sheet(base, (SheetFile("the options", "0" * 64, base, {}),))
    try:
        return method_of(options, Path(), with_files=False)
    except BatchRefused as refused:
        message = "\n".join(["these options make no method:", *map(_hinted, refused.causes)])
        raise UsageError(message) from refused


def _hinted(cause: Cause) -> str:
    if "friction_mpa" in cause.what:
        return "  no baseline stress is given: say --baseline, or --set 'strength.baseline_mpa = ...'"
    return f"  {cause}"


def _parsed(setting: str) -> dict[str, Any]:
    try:
        return tomllib.loads(setting)
    except tomllib.TOMLDecodeError as error:
        message = f"{setting!r} is not TOML: write it like 'hardening.coefficient = 0.3'"
        raise UsageError(message) from error


def _lay_over(base: dict[str, Any], over: Mapping[str, Any]) -> None:
    for key, value in over.items():
        below = base.get(key)
        if isinstance(value, dict) and isinstance(below, dict) and "value" not in value:
            copy = dict(below)
            _lay_over(copy, value)
            base[key] = copy
        else:
            base[key] = value


def _start(
    method: Method,
    kind: str,
    mean: float,
    scale: str,
    force_n: float | None,
    ball_mm: float | None,
) -> Start:
    blank = np.array([np.nan])
    code = SCALES.index(scale) if kind == "hardness" else -1
    return Start(
        Measured(np.array([mean]), {REPEATABILITY: np.asarray(1.0)}),
        np.array([code], dtype=np.int8),
        blank if force_n is None else np.array([force_n]),
        blank if ball_mm is None else units.to_si(np.array([ball_mm]), "mm"),
        blank,
        blank,
        method.plastic_strain,
    )


def _from_strength(
    method: Method, inputs: Mapping[str, Value], spreads: Mapping[str, Spread], start: Start
) -> dict[str, Known]:
    found = evaluate(method, inputs, spreads, start)
    return {
        name: Known(
            float(found.results[name].value[0]),
            float(found.combined[name].u[0]),
            float(found.ends[name].lower[0]),
            float(found.ends[name].upper[0]),
        )
        for name in (*_STRESSES, *LATE)
    }


def _from_density(
    method: Method,
    inputs: Mapping[str, Value],
    spreads: Mapping[str, Spread],
    density: float,
    u: float,
) -> dict[str, Known]:
    """From a density there is no stress to take ends in: y exp(-+ k u / y) is the interval."""
    start = _start(method, "stress", np.nan, "HV", None, None)
    known = {**spreads, DENSITY: Spread(u, shared=False, degrees_of_freedom=np.inf)}
    rho = Measured(np.array([density]), {DENSITY: np.asarray(1.0)})
    figures = dict.fromkeys(_STRESSES, Known(float("nan")))
    k = float(student_quantile((1.0 + method.coverage) / 2.0, np.array([np.inf]))[0])
    for name, x in line(method.laws, inputs, rho, start).items():
        if name not in LATE or not isinstance(x, Measured):
            continue
        size = float(combine(x, known).u[0])
        y = float(x.value[0])
        with np.errstate(invalid="ignore"):
            factor = float(np.exp(k * size / y))
        figures[name] = Known(y, size, y / factor, y * factor)
    return figures


def _finished(
    method: Method,
    inputs: Mapping[str, Value],
    figures: Mapping[str, Known],
    kind: str,
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
        remark=_remark(method, figures, kind),
    )


def _remark(method: Method, figures: Mapping[str, Known], kind: str) -> str:
    stress = figures["dislocation_stress_mpa"].value
    if kind != "density" and not stress > 0.0:
        return (
            "The strength is at or below the baseline: there is no density, and the upper ends are "
            "what the uncertainty allows."
        )
    if kind == "hardness" and not method.laws.unwinding:
        return (
            "The state includes the strain that the indent itself put in. Say "
            "initial_hardening_mpa and saturation_stress_mpa of [indentation] to take it out."
        )
    return ""


def _times(known: Known, factor: float) -> Known:
    return Known(*(x * factor for x in (known.value, known.u, known.lower, known.upper)))


def _published(name: str, known: Known) -> Known:
    unit = unit_of(name)
    numbers = (known.value, known.u, known.lower, known.upper)
    return Known(*(float(units.from_si(x, unit)) for x in numbers))


def _told(known: Known, unit: str, coverage: float) -> str:
    value = with_uncertainty(known.value, known.u, unit) if isfinite(known.value) else "no value"
    low = with_uncertainty(known.lower, None, "1") if isfinite(known.lower) else "none"
    high = with_uncertainty(known.upper, None, "1") if isfinite(known.upper) else "none"
    nothing = not isfinite(known.lower) and not isfinite(known.upper)
    if nothing or known.lower == known.upper:
        return value
    return f"{value:28s} {100 * coverage:g} % interval {low} to {high}"


def _plain(x: object) -> object:
    if isinstance(x, Known):
        return {f.name: _plain(getattr(x, f.name)) for f in fields(x)}
    return None if isinstance(x, float) and not isfinite(x) else x
