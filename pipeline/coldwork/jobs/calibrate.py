"""Constants with their covariance from paired measurements: a table in, a sealed file out."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import log
from os.path import relpath
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

import coldwork
from coldwork import contracts, units
from coldwork.errors import BatchRefused, Cause, InvalidArgument, UsageError
from coldwork.inputs.keys import spec_of
from coldwork.intake.pairs import Pairs, read_pairs
from coldwork.jobs.calibrated import Calibrated, Found, Options, Points
from coldwork.jobs.calibration_kinds import KINDS, Kind, Side, hardness_kind, unit_of_column
from coldwork.jobs.core_radius import CORE_RADIUS_KEY, conditions_of, fit_core_radius
from coldwork.results.calibrations import calibration_text, write_new
from coldwork.statistics.goodness import Goodness, bad_point, goodness
from coldwork.statistics.rounding import with_uncertainty
from coldwork.statistics.york import LEAST_POINTS, fit_york

__all__ = ["ALL_KINDS", "calibrate"]

FloatArray = NDArray[np.float64]

ALL_KINDS: Final = ("taylor", "hardness", "hall-petch", "heat", "core-radius")
_CORE: Final = ("dislocation_density_per_m2", "heat_j_per_g")
_NAME: Final = re.compile(r"[A-Za-z0-9][A-Za-z0-9._-]{0,59}")


def calibrate(data: Path, options: Options, into: Path) -> Calibrated:
    """Find constants from paired measurements and write them down.

    Parameters
    ----------
    data : Path
        The table, after the contract ``in/pairs``.
    options : Options
        What it holds, and for what.
    into : Path
        The file that is written; it must not be there yet.

    Returns
    -------
    Calibrated
        What was found.

    Raises
    ------
    UsageError
        If the options do not fit together.
    BatchRefused
        If the table cannot be used: too few points, a point without scatter, no line.
    ResultsNotWritten
        If the file is there already or cannot be written.
    """
    _refuse_odd(options, into)
    pairs = read_pairs(Path(data))
    if len(pairs.ids) < LEAST_POINTS:
        what = f"there are {len(pairs.ids)} points"
        why = f"A calibration needs {LEAST_POINTS}, so that something is left to judge it by."
        raise BatchRefused(str(data), [Cause(pairs.name, what, why, "Measure more coupons.")])
    try:
        found = (
            _by_radius(pairs, options)
            if options.kind == "core-radius"
            else _by_line(pairs, options)
        )
    except InvalidArgument as error:
        cause = Cause(pairs.name, str(error), "A line goes through the points.", "Look at them.")
        raise BatchRefused(str(data), [cause]) from error
    calibrated = _finished(pairs, options, found, relpath(str(data), str(into.parent)))
    write_new(into, calibration_text(calibrated.document).encode())
    return calibrated


@dataclass(frozen=True)
class _Raw:
    """A fit before it is written down: as `Calibrated`, with the stated covariance."""

    constants: tuple[Found, ...]
    covariance: FloatArray
    fit: Goodness
    quantity: str
    points: Points
    conditions: Mapping[str, object]


def _refuse_odd(options: Options, into: Path) -> None:
    message = ""
    if not _NAME.fullmatch(options.id):
        message = f"{options.id!r} is no name: letters, digits, _, - and points, at most 60"
    elif options.kind not in ALL_KINDS:
        message = f"no calibration is called {options.kind!r}; there are {', '.join(ALL_KINDS)}"
    elif options.kind == "core-radius" and options.sheet is None:
        message = "core-radius takes its constants from a batch folder: say --sheet"
    elif options.kind == "hardness" and not (options.strain and 0.0 < options.strain < 2.0):
        message = (
            "hardness goes with flow stresses at one plastic strain: say --strain, such as 0.08"
        )
    elif into.suffix != ".toml":
        message = f"a calibration is a .toml file, and {into.name!r} is not named like one"
    for column, u in options.relative_u.items():
        if not 0.0 <= u < 1.0:
            message = f"a relative uncertainty is from 0 to below 1, not {u:g} ({column})"
    if message:
        raise UsageError(message)


def _uncertainty(pairs: Pairs, options: Options, column: str) -> tuple[FloatArray, list[Cause]]:
    """Give the standard uncertainties of a column: per point, or relative where no cell says."""
    given = pairs.columns.get(f"u_{column}", np.full(len(pairs.ids), np.nan))
    relative = options.relative_u.get(column)
    if relative is not None:
        given = np.where(np.isnan(given), relative * np.abs(pairs.columns[column]), given)
    bare = np.flatnonzero(np.isnan(given))
    if not bare.size:
        return given, []
    names = ", ".join(pairs.ids[i] for i in bare[:5]) + (" and more" if bare.size > 5 else "")
    cause = Cause(
        f"{pairs.name}, column u_{column}",
        f"no scatter is given for {column} of {names}",
        "A point counts by its uncertainty; 0 says that it is exact.",
        f"Fill u_{column}, or say --relative-u {column}=0.02.",
    )
    return given, [cause]


def _read_sides(
    pairs: Pairs, options: Options, columns: Sequence[str], beside: Sequence[str] = ()
) -> dict[str, FloatArray]:
    """Give the uncertainties of the columns that are needed, or refuse the table."""
    unknown = sorted(set(options.relative_u) - set(columns))
    if unknown:
        message = f"--relative-u names {unknown[0]}; this kind holds {' against '.join(columns)}"
        raise UsageError(message)
    causes = [cause for column in (*columns, *beside) for cause in pairs.lacking(column)]
    if causes:
        raise BatchRefused(pairs.name, causes)
    found = {column: _uncertainty(pairs, options, column) for column in columns}
    causes = [cause for _, some in found.values() for cause in some]
    if causes:
        raise BatchRefused(pairs.name, causes)
    return {column: u for column, (u, _) in found.items()}


def _correlation(pairs: Pairs) -> FloatArray:
    return np.nan_to_num(pairs.columns.get("correlation", np.zeros(len(pairs.ids))))


def _by_line(pairs: Pairs, options: Options) -> _Raw:
    kind = KINDS.get(options.kind) or hardness_kind(options.scale, options.area)
    projected = kind.name == "hardness" and (options.scale, options.area) == ("HBW", "projected")
    beside = ("force_n", "ball_mm") if projected else ()
    u = _read_sides(pairs, options, (kind.x.column, kind.y.column), beside)
    x, u_x, turn_x = _side(kind.x, pairs, u)
    y, u_y, turn_y = _side(kind.y, pairs, u)
    r = _correlation(pairs) * turn_x * turn_y
    fitted = fit_york(x, y, u_x, u_y, r)
    line = fitted.line
    fit = goodness(line.weighted_sum, line.degrees_of_freedom)
    sizes = np.array([float(units.to_si(1.0, unit)) for unit in kind.units])
    covariance = line.cofactor * fit.enlargement**2
    scale = [float(units.to_si(1.0, side.unit)) for side in (kind.x, kind.y)]
    on_axes = np.array([scale[1], scale[1] / scale[0]])
    points = Points(
        pairs.ids,
        x / scale[0],
        y / scale[1],
        u_x / scale[0],
        u_y / scale[1],
        fitted.residual,
        fitted.leverage,
        (kind.x.label, kind.y.label),
        (line.intercept / on_axes[0], line.slope / on_axes[1]),
        covariance / np.outer(on_axes, on_axes),
    )
    covariance = covariance / np.outer(sizes, sizes)
    keys = (kind.intercept, kind.slope)
    constants = tuple(
        Found(key, float(value), float(np.sqrt(variance)), unit)
        for key, value, variance, unit in zip(
            keys, line.value / sizes, np.diagonal(covariance), kind.units, strict=True
        )
    )
    return _Raw(constants, covariance, fit, kind.quantity, points, _conditions(options, kind))


def _side(
    side: Side, pairs: Pairs, u: Mapping[str, FloatArray]
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give what the line takes, its uncertainty, and whether it rises (1) or falls (-1). [SI]."""
    unit = unit_of_column(side.column)
    values, slope = side.turn(units.to_si(pairs.columns[side.column], unit), pairs)
    return values, np.abs(slope) * units.to_si(u[side.column], unit), np.sign(slope)


def _conditions(options: Options, kind: Kind) -> dict[str, object]:
    found: dict[str, object] = {}
    if options.material is not None:
        found["material.name"] = options.material
    if kind.name == "hardness":
        section = kind.slope.rpartition(".")[0]
        found[f"{section}.area"] = options.area
        found[f"{section}.representative_strain"] = options.strain
    return found


def _by_radius(pairs: Pairs, options: Options) -> _Raw:
    u = _read_sides(pairs, options, _CORE)
    sheet = options.sheet or Path()
    found, method = fit_core_radius(pairs, sheet, u, _correlation(pairs))
    fit = goodness(found.chi_squared, len(pairs.ids) - 1)
    u_log = found.u_log * fit.enlargement
    constant = Found(CORE_RADIUS_KEY, found.value, found.value * u_log, "1", float(np.exp(u_log)))
    log_value = log(found.value)
    points = Points(
        pairs.ids,
        np.arange(1.0, len(pairs.ids) + 1.0),
        np.log(found.radius),
        np.zeros(len(pairs.ids)),
        found.u_log_each,
        found.residual,
        found.leverage,
        ("point", "ln of the core radius over b [1]"),
        (log_value, 0.0),
        np.diag([u_log**2, 0.0]),
    )
    covariance = np.array([[constant.u**2]])
    conditions = conditions_of(method)
    return _Raw((constant,), covariance, fit, "dislocation_density_per_m2", points, conditions)


def _finished(pairs: Pairs, options: Options, raw: _Raw, path: str) -> Calibrated:
    _refuse_impossible(pairs, raw)
    place = bad_point(raw.points.residual, raw.points.leverage)
    bad = None if place is None else pairs.ids[place]
    values = pairs.columns[raw.quantity]
    low, high = float(values.min()), float(values.max())
    document: dict[str, Any] = {
        "calibration": {
            "schema_version": contracts.document("calibration")["version"],
            "id": options.id,
            "kind": options.kind,
            "version": coldwork.__version__,
        },
        "data": {
            "path": Path(path).as_posix(),
            "sha256": pairs.digest,
            "points": len(pairs.ids),
        },
        "fit": {
            "chi_squared": raw.fit.chi_squared,
            "degrees_of_freedom": raw.fit.degrees_of_freedom,
            "probability": raw.fit.probability,
            "verdict": raw.fit.verdict,
            "enlargement": raw.fit.enlargement,
        }
        | ({} if bad is None else {"bad_point": bad}),
        "parameters": [
            {"key": found.key, "value": found.value, "u": found.u}
            | ({} if found.factor is None else {"factor": found.factor})
            | {"unit": found.unit, "covariance": row.tolist()}
            for found, row in zip(raw.constants, raw.covariance, strict=True)
        ],
        "range": {"quantity": raw.quantity, "low": low, "high": high},
    }
    if raw.conditions:
        document["conditions"] = dict(raw.conditions)
    return Calibrated(
        options.id,
        options.kind,
        raw.constants,
        raw.covariance,
        raw.fit,
        bad,
        raw.quantity,
        low,
        high,
        raw.points,
        document,
    )


def _refuse_impossible(pairs: Pairs, raw: _Raw) -> None:
    """Refuse a constant that no sheet could take."""
    causes = []
    for found in raw.constants:
        spec = spec_of(tuple(found.key.split(".")))
        fault = spec.fault(found.value) if spec else ""
        if fault:
            what = f"{found.key} comes out as {with_uncertainty(found.value, found.u, found.unit)}"
            causes.append(Cause(pairs.name, what, fault, "Look at the points and their units."))
    if causes:
        raise BatchRefused(pairs.name, causes)
