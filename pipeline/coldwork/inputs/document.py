"""The content of ``method.json``: everything besides the readings that results depend on."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import asdict
from importlib.metadata import version
from math import isfinite, nan
from pathlib import Path
from typing import Any, Final, cast

import coldwork
from coldwork.contracts import document
from coldwork.formulas.unwinding import hardening_constants
from coldwork.inputs.calibration import Calibration
from coldwork.inputs.core import core_words
from coldwork.inputs.keys import number_specs, schema_of
from coldwork.inputs.laws import choice
from coldwork.inputs.layout import Layout
from coldwork.inputs.method import Draws, Method, Tester
from coldwork.inputs.numbers import Given
from coldwork.inputs.tensile import tensile_document

__all__ = ["method_document", "number_document", "with_testers"]

_COMPUTING: Final = ("numpy", "scipy", "pyarrow")
_SECTIONS: Final = {
    "uncertainty": ("method", "coverage", "repeatability"),
    "temperature": ("test_c", "reference_c", "correction"),
    "flow": ("plastic_strain", "repeatability_rel"),
    "indentation": ("size_effect", "resolution_um"),
    "output": ("tables", "detail", "curve_points"),
}


def method_document(
    method: Method, tables: Mapping[str, Any], numbers: Mapping[str, Given]
) -> dict[str, object]:
    """Give the content of ``method.json``.

    Parameters
    ----------
    method : Method
        The method, complete but for its document.
    tables : mapping
        The sheet's content, which fits.
    numbers : mapping of str to Given
        The inputs with their values as written.

    Returns
    -------
    dict
        As the schema of the document has it: text, finite numbers, truth
        values, None, lists and dicts. Values stand in the units of their keys.
    """
    sections = {
        name: {key: choice(tables, name, key) for key in keys} for name, keys in _SECTIONS.items()
    }
    inputs = {name: number_document(given) for name, given in numbers.items()}
    inputs |= {tester.bias.name: _bias(tester) for tester in method.testers}
    if method.tensile is not None:
        sections["tensile"] = tensile_document(method.tensile)
    if method.draws is not None:
        sections["uncertainty"] |= _draws(method.draws)
    return {
        "schema_version": document("method")["version"],
        "batch_id": method.batch_id,
        "laboratory": method.laboratory,
        "operator": method.operator,
        "timezone": method.timezone,
        "material": {
            "name": method.material,
            "lattice": method.lattice,
            "edge_distance_d": method.edge_distance_d,
            "centre_distance_d": method.centre_distance_d,
        },
        "sheets": [{"path": path, "sha256": digest} for path, digest in method.sheets],
        "laws": _laws(method),
        "inputs": inputs,
        "testers": [_tester(tester) for tester in method.testers],
        "limits": [asdict(limit) for limit in method.limits],
        **sections,
        "files": _files(method),
        "layouts": [_layout(method, layout) for layout in method.used_layouts],
        "calibrations": [_calibration(found) for found in method.calibrations],
        "defaults": list(dict.fromkeys(_defaults(method, tables, numbers))),
        "derived": _derived(method),
        "versions": {"coldwork": coldwork.__version__}
        | {name: version(name) for name in _COMPUTING},
    }


def with_testers(document: Mapping[str, object], testers: Sequence[Tester]) -> dict[str, object]:
    """Give the content of ``method.json`` with other testers, once their checks were read."""
    inputs = cast("Mapping[str, object]", document["inputs"])
    biases = {tester.bias.name: _bias(tester) for tester in testers}
    return {
        **document,
        "inputs": {**inputs, **biases},
        "testers": [_tester(tester) for tester in testers],
    }


def _laws(method: Method) -> dict[str, object]:
    laws = method.laws
    return asdict(laws) | {
        "route": method.route,
        "slip": None if laws.slip is None else laws.slip.text,
        "area": dict(laws.area),
        "angles_deg": list(laws.angles_deg),
        "fractions": list(laws.fractions),
    }


def number_document(given: Given) -> dict[str, object]:
    """Give what ``method.json`` tells of a number, in the unit of its key."""
    found = given.input
    freedom = found.degrees_of_freedom
    return {
        "value": given.value,
        "u": given.u,
        "unit": found.unit,
        "shape": found.shape,
        "factor": found.factor,
        "shared": found.shared,
        "degrees_of_freedom": freedom if isfinite(freedom) else None,
        "source": found.source or None,
        "origin": found.origin,
    }


def _bias(tester: Tester) -> dict[str, object]:
    return number_document(Given(tester.bias, tester.bias.value, tester.bias.u))


def _draws(draws: Draws) -> dict[str, object]:
    return {
        "draws": "adaptive" if draws.adaptive else draws.number,
        "most_draws": draws.number,
        "digits": draws.digits,
        "seed": draws.seed,
        "from_draws": "lower_, upper_, sd_, bounds and probabilities of coupons",
        "first_order": "u_, u_own_, u_shared_, budget.csv, lots.csv",
    }


def _tester(tester: Tester) -> dict[str, object]:
    return {
        "id": tester.id,
        "bias_rel": tester.bias.value,
        "u_rel": tester.bias.u,
        "valid_until": tester.valid_until.isoformat() if tester.valid_until else None,
    }


def _calibration(found: Calibration) -> dict[str, object]:
    return {
        "id": found.id,
        "kind": found.kind,
        "path": found.path,
        "sha256": found.digest,
        "data_sha256": found.data_digest,
        "gives": [parameter.key for parameter in found.parameters],
        "range": {"quantity": found.quantity, "low": found.low, "high": found.high},
        "verdict": found.verdict,
    }


def _files(method: Method) -> dict[str, object]:
    def names(paths: tuple[Path, ...]) -> list[str]:
        return [path.relative_to(method.folder).as_posix() for path in paths]

    taken_out = method.exclusions
    return {
        "coupons": names(method.coupons),
        "indents": names(method.indents),
        "flow_stress": names(method.flow_stress),
        "curves": names(method.curves),
        "exclusions": names(taken_out),
        "verification": names(method.verification),
    }


def _layout(method: Method, layout: Layout) -> dict[str, object]:
    paths = getattr(method, layout.fills)
    read = zip(paths, method.layouts[layout.fills], strict=True)
    return {
        "path": layout.path,
        "sha256": layout.digest,
        "id": layout.id,
        "fills": layout.fills,
        "files": [
            path.relative_to(method.folder).as_posix() for path, used in read if used == layout
        ],
        "columns": {
            filled.name: {"from": layout.raw_columns[filled.name], "unit": filled.unit}
            for filled in layout.filled
        },
    }


def _defaults(
    method: Method, tables: Mapping[str, Any], numbers: Mapping[str, Given]
) -> Iterator[str]:
    for name, given in numbers.items():
        if given.input.origin == "default":
            yield name
    unread = {{"indent": "flow", "flow": "indentation", "both": ""}[method.route]}
    if method.tensile is None:
        unread.add("tensile")
    for key in _choices((), schema_of(())):
        if key[0] not in unread and not _is_said(tables, key):
            yield ".".join(key)
    for limit in tables.get("limits", []):
        for name, inner in schema_of(("limits", 0)).get("properties", {}).items():
            of_its_rule = name != "at_least" or limit.get("rule") == "probability"
            if "default" in inner and name not in limit and of_its_rule:
                yield f"limits.{limit['id']}.{name}"


def _choices(path: tuple[str, ...], schema: Mapping[str, Any]) -> Iterator[tuple[str, ...]]:
    for name, inner in schema.get("properties", {}).items():
        key = (*path, name)
        if "default" in inner and key not in number_specs():
            yield key
        elif inner.get("type") == "object":
            yield from _choices(key, inner)


def _is_said(tables: Mapping[str, Any], key: tuple[str, ...]) -> bool:
    at: Any = tables
    for name in key:
        at = at.get(name) if isinstance(at, Mapping) else None
    return at is not None


def _derived(method: Method) -> dict[str, object]:
    values = {name: found.value for name, found in method.inputs.items()}
    core: dict[str, object] = {"core": core_words(method.inputs, nan)}
    if not method.laws.unwinding or method.laws.taylor.startswith("logarithmic"):
        return core | {"k1_per_m": None, "k2": None}  # they belong to a constant coefficient
    slope = values.get("hardening.slope_n_per_m") or (
        values["hardening.taylor_factor"]
        * values["hardening.coefficient"]
        * values["material.shear_modulus_gpa"]
        * values["material.burgers_vector_nm"]
    )
    k1, k2 = hardening_constants(
        values["indentation.initial_hardening_mpa"],
        values["indentation.saturation_stress_mpa"],
        slope,
    )
    return core | {"k1_per_m": k1, "k2": k2}
