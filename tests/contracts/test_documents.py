"""The JSON Schemas: well formed, strict, and saying what the sheet may hold."""

import tomllib
from collections.abc import Iterator
from copy import deepcopy
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from coldwork import contracts

KEYWORDS = {
    *("$schema", "$defs", "$ref", "type", "properties", "required", "additionalProperties"),
    *("propertyNames", "minProperties", "items", "minItems", "uniqueItems", "enum", "const"),
    *("pattern", "format", "minLength", "maxLength", "minimum", "maximum", "exclusiveMinimum"),
    *("exclusiveMaximum", "allOf", "anyOf", "not", "if", "then", "else", "dependentRequired"),
}
OURS = {"title", "description", "version", "unit", "source", "default"}
# The sheet of the design with every key that is built; the alternatives stand in tests below.
SHEET = """
[batch]
id = "CS-2026-31"
builds_on = "house.toml"
laboratory = "..."
operator = "operator-1"
timezone = "UTC"
[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5 }
[files]
coupons = "coupons.csv"
indents = ["indents-*.csv", "late.csv"]
exclusions = "exclusions.csv"
[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0, shape = "uniform", shared = false, source = "own" }
superposition_exponent = 1.0
[indentation]
area = "contact"
constraint_factor = { value = 3.0, u = 0.15 }
intercept_mpa = 0.0
representative_strain = { value = 0.08, u = 0.005, degrees_of_freedom = 8 }
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
size_effect = "none"
resolution_um = 0.1
[indentation.HBW]
constraint_factor = 2.8
strain_ratio = { value = 0.2, u = 0.01 }
[indentation.HK]
constraint_factor = 3.0
representative_strain = 0.08
[flow]
plastic_strain = 0.002
repeatability_rel = 0.01
[hardening]
law = "constant"
taylor_factor = { value = 3.06, u = 0.15 }
coefficient = { value = 0.30, factor = 1.2 }
[line_energy]
elasticity = "isotropic"
outer_radius = "spacing"
outer_radius_factor = { value = 1.0, factor = 1.5 }
core_radius_b = { value = 1.0, factor = 1.6, shape = "lognormal" }
core_energy = 0.0
[character]
screw = 0.5
edge = 0.5
[temperature]
test_c = 23.0
reference_c = 23
[uncertainty]
method = "first-order"
coverage = 0.95
repeatability = "pooled"
[output]
tables = ["csv", "parquet"]
detail = "full"
[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
valid_until = "2027-03-31"
[[limits]]
id = "anneal-window"
quantity = "stored_energy_j_per_g"
lower = 0.10
upper = 0.30
rule = "guarded"
basis = "total"
"""
# Written out from the design, not read from the schema.
DEFAULTS = {
    "batch.timezone": "UTC",
    "strength.superposition_exponent": 1.0,
    "indentation.area": "contact",
    "indentation.constraint_factor": {"value": 3.0, "u": 0.15},
    "indentation.intercept_mpa": 0.0,
    "indentation.representative_strain": {"value": 0.08, "u": 0.005},
    "indentation.size_effect": "none",
    "prior_work.from": "stated",
    "prior_work.initial_stress_mpa": 0.0,
    "indentation.HBW.area": "projected",
    "indentation.HBW.constraint_factor": {"value": 2.8, "u": 0.15},
    "indentation.HBW.intercept_mpa": 0.0,
    "indentation.HBW.strain_ratio": {"value": 0.2, "u": 0.01},
    "indentation.HK.area": "projected",
    "indentation.HK.intercept_mpa": 0.0,
    "flow.plastic_strain": 0.002,
    "tensile.slope_between": [0.1, 0.4],
    "tensile.offsets": [0.002],
    "tensile.reported_strains": [0.002, 0.01, 0.02, 0.05, 0.1, 0.15, 0.2],
    "tensile.fit": ["voce", "hollomon"],
    "tensile.force_u_rel": 0.0058,  # 1 % over the root of 3
    "tensile.extension_u_rel": 0.0058,
    "tensile.area_u_rel": 0.0058,
    "tensile.bridgman": False,
    "hardening.law": "constant",
    "hardening.taylor_factor": {"value": 3.06, "u": 0.15},
    "hardening.coefficient": {"value": 0.30, "factor": 1.2},
    "structure.kind": "uniform",
    "line_energy.elasticity": "isotropic",
    "line_energy.outer_radius": "spacing",
    "line_energy.outer_radius_factor": {"value": 1.0, "factor": 1.5},
    "line_energy.core_radius_b": {"value": 1.0, "factor": 1.6},
    "line_energy.core_energy": 0.0,
    "line_energy.core_energy_from": "sheet",
    "temperature.test_c": 23.0,
    "temperature.correction": "none",
    "temperature.reference_c": 23.0,
    "uncertainty.method": "first-order",
    "uncertainty.coverage": 0.95,
    "uncertainty.repeatability": "pooled",
    "output.tables": ["csv"],
    "output.detail": "full",
    "output.curve_points": False,
    "testers.max_bias_rel": 0.03,
    "testers.max_repeatability_rel": 0.05,
    "testers.max_age_days": 7,
    "limits.rule": "guarded",
    "limits.basis": "total",
    "limits.at_least": 0.95,
}


def _sheet(**sections: Any) -> dict[str, Any]:  # noqa: ANN401 - whatever TOML holds
    return deepcopy(tomllib.loads(SHEET)) | sections


def _faults(name: str, instance: object) -> list[str]:
    errors = Draft202012Validator(contracts.document(name)).iter_errors(instance)
    return sorted(".".join(str(part) for part in error.absolute_path) for error in errors)


def _properties(schema: dict[str, Any], path: str = "") -> Iterator[tuple[str, dict[str, Any]]]:
    for key, inner in schema.get("properties", {}).items():
        yield f"{path}{key}", inner
        yield from _properties(inner, f"{path}{key}.")
        yield from _properties(inner.get("items", {}), f"{path}{key}.")


def _nodes(schema: object) -> Iterator[dict[str, Any]]:
    if isinstance(schema, list):
        for each in schema:
            yield from _nodes(each)
    if isinstance(schema, dict):
        yield schema
        for key, inner in schema.items():
            if key in ("properties", "$defs"):
                for each in inner.values():
                    yield from _nodes(each)
            elif key not in ("default", "enum", "const", "dependentRequired"):
                yield from _nodes(inner)


@pytest.mark.parametrize("name", contracts.documents())
def test_it_is_a_json_schema_without_unknown_keywords(name: str) -> None:
    schema = contracts.document(name)
    Draft202012Validator.check_schema(schema)
    assert {key for node in _nodes(schema) for key in node} <= KEYWORDS | OURS


@pytest.mark.parametrize("name", contracts.documents())
def test_every_property_says_what_it_is(name: str) -> None:
    for path, inner in _properties(contracts.document(name)):
        if path.endswith(".value") and "title" not in inner:
            continue  # the bounds of a number, repeated for its table
        assert inner.get("title"), path
        assert inner.get("description", "").endswith("."), path
        kinds = inner.get("type", [])
        if {"number", "integer"} & set([kinds] if isinstance(kinds, str) else kinds):
            assert inner.get("unit") or "string" in kinds, path


def test_the_sheet_of_the_design_is_taken() -> None:
    assert _faults("batch_sheet", _sheet()) == []


def test_the_defaults_are_those_of_the_design() -> None:
    found = {
        path: inner["default"]
        for path, inner in _properties(contracts.document("batch_sheet"))
        if "default" in inner
    }
    assert found == DEFAULTS


def test_the_least_sheet_is_taken() -> None:
    keep = {key: _sheet()[key] for key in ("batch", "material", "files", "strength", "character")}
    assert _faults("batch_sheet", keep) == []
    for key in keep:
        assert _faults("batch_sheet", {other: keep[other] for other in keep if other != key})


FLOW = {"route": "flow", "baseline_mpa": 150.0}
GOOD: list[dict[str, Any]] = [
    {"strength": FLOW, "files": {"coupons": "c.csv", "flow_stress": "f.csv"}},
    {
        "strength": FLOW,
        "files": {"coupons": "c.csv", "curves": "c-*.csv"},
        "tensile": {"mode": "tension", "strain_from": "extension"},
    },
    {"tensile": {"mode": "compression", "stress_is": "true"}},
    {"strength": {"route": "indent", "friction_mpa": 25.5, "hall_petch_mpa_m05": 0.11}},
    {"strength": {"route": "indent", "terms_mpa": {"solutes": {"value": 12.0, "u": 1.0}}}},
    {"hardening": {"slope_n_per_m": {"value": 18.0, "u": 1.0}}},
    {"line_energy": {"outer_radius": "fixed", "outer_radius_nm": 100.0}},
    {"character": {"mix": "uniform"}},
    {"character": {"screw": 1.0}},
    {"character": {"mix": [{"angle_deg": 0, "fraction": 0.4}, {"angle_deg": 60, "fraction": 0.6}]}},
    {"indentation": {"HBW": {"representative_strain": 0.08}}},
    {"limits": [{"id": "a", "quantity": "hardness", "upper": 90, "rule": "probability"}]},
    {
        "limits": [
            {
                "id": "a",
                "quantity": "hardness",
                "upper": 90,
                "rule": "simple",
                "max_relative_u": 0.1,
            }
        ]
    },
    {"batch": {"id": "a"}},
    {"batch": {"id": "Charge 7 (ä)"}},
    {"batch": {"id": "replaced-2"}},
]


@pytest.mark.parametrize("sections", GOOD)
def test_what_is_allowed_is_taken(sections: dict[str, Any]) -> None:
    assert _faults("batch_sheet", _sheet(**sections)) == []


BAD: list[tuple[dict[str, Any], str]] = [
    ({"batch": {"id": "../x"}}, "batch.id"),
    ({"batch": {"id": "a/b"}}, "batch.id"),
    ({"batch": {"id": ".."}}, "batch.id"),
    ({"batch": {"id": ""}}, "batch.id"),
    ({"batch": {"id": "a "}}, "batch.id"),
    ({"batch": {"id": "a\n"}}, "batch.id"),
    ({"batch": {"id": "a\tb"}}, "batch.id"),
    ({"batch": {"id": "x" * 121}}, "batch.id"),
    ({"batch": {"id": "replaced"}}, "batch.id"),
    ({"material": {"name": "copper\n"}}, "material.name"),
    ({"batch": {"id": 31}}, "batch.id"),
    ({"batch": {"id": "a", "colour": "red"}}, "batch"),
    ({"material": {"name": "copper", "shear_modulus_gpa": -44.0}}, "material.shear_modulus_gpa"),
    (
        {"material": {"name": "copper", "shear_modulus_gpa": {"value": -44.0, "u": 1.0}}},
        "material.shear_modulus_gpa.value",
    ),
    ({"material": {"name": "copper", "poisson_ratio": 0.5}}, "material.poisson_ratio"),
    ({"material": {"name": "copper", "burgers_vector_nm": "b"}}, "material.burgers_vector_nm"),
    ({"material": {"name": "copper", "burgers_vector_nm": True}}, "material.burgers_vector_nm"),
    ({"files": {"coupons": "c.csv"}}, "files"),
    ({"files": {"indents": "i.csv"}}, "files"),
    ({"files": {"coupons": "c.csv", "indents": []}}, "files.indents"),
    ({"strength": {"route": "indent"}}, "strength"),
    ({"strength": {"route": "hardness", "baseline_mpa": 1.0}}, "strength.route"),
    ({"strength": FLOW}, "files"),
    ({"strength": FLOW, "files": {"coupons": "c.csv", "curves": "t.csv"}}, ""),
    ({"tensile": {"strain_from": "extension"}}, "tensile"),
    ({"tensile": {"mode": "tension"}}, "tensile"),
    ({"tensile": {"mode": "torsion", "strain_from": "extension"}}, "tensile.mode"),
    (
        {"tensile": {"mode": "compression", "strain_from": "crosshead", "bridgman": True}},
        "tensile.bridgman",
    ),
    (
        {"tensile": {"mode": "tension", "strain_from": "extension", "fit": ["linear"]}},
        "tensile.fit.0",
    ),
    (
        {"strength": {"route": "indent", "baseline_mpa": 50.0, "friction_mpa": 25.0}},
        "strength.friction_mpa",
    ),
    (
        {"strength": {"route": "indent", "baseline_mpa": 50.0, "superposition_exponent": 2.5}},
        "strength.superposition_exponent",
    ),
    ({"indentation": {"initial_hardening_mpa": 1700.0}}, "indentation"),
    ({"indentation": {"size_effect": "guessed"}}, "indentation.size_effect"),
    (
        {
            "indentation": {
                "HK": {"constraint_factor": 3, "representative_strain": 0.08, "area": "contact"}
            }
        },
        "indentation.HK.area",
    ),
    ({"indentation": {"HK": {"constraint_factor": 3}}}, "indentation.HK"),
    (
        {"indentation": {"HBW": {"representative_strain": 0.08, "strain_ratio": 0.2}}},
        "indentation.HBW.strain_ratio",
    ),
    ({"hardening": {"law": "linear"}}, "hardening.law"),
    (
        {"hardening": {"slope_n_per_m": 18.0, "coefficient": 0.3}},
        "hardening.coefficient",
    ),
    (
        {"hardening": {"coefficient": {"value": 0.3, "factor": 1.2, "u": 0.1}}},
        "hardening.coefficient.u",
    ),
    (
        {"hardening": {"coefficient": {"value": 0.3, "factor": 1.2, "shape": "normal"}}},
        "hardening.coefficient.shape",
    ),
    (
        {"hardening": {"coefficient": {"value": 0.3, "u": 0.1, "shape": "lognormal"}}},
        "hardening.coefficient",
    ),
    ({"hardening": {"coefficient": {"value": 0.3, "factor": 0.9}}}, "hardening.coefficient.factor"),
    ({"hardening": {"coefficient": {"u": 0.1}}}, "hardening.coefficient"),
    ({"hardening": {"coefficient": {"value": 0.3, "sigma": 0.1}}}, "hardening.coefficient"),
    ({"line_energy": {"outer_radius": "fixed"}}, "line_energy"),
    ({"line_energy": {"outer_radius_nm": 100.0}}, "line_energy.outer_radius_nm"),
    ({"line_energy": {"elasticity": "viscous"}}, "line_energy.elasticity"),
    ({"character": {}}, "character"),
    ({"character": {"mix": "random"}}, "character.mix"),
    ({"character": {"mix": "uniform", "edge": 1.0}}, "character.edge"),
    ({"character": {"mix": [{"angle_deg": 120, "fraction": 1.0}]}}, "character.mix.0.angle_deg"),
    ({"uncertainty": {"method": "monte-carlo"}}, "uncertainty"),
    ({"uncertainty": {"seed": 1}}, "uncertainty.seed"),
    ({"uncertainty": {"method": "monte-carlo", "seed": 1, "draws": "many"}}, "uncertainty.draws"),
    ({"uncertainty": {"coverage": 1.0}}, "uncertainty.coverage"),
    ({"uncertainty": {"coverage": 95}}, "uncertainty.coverage"),
    ({"output": {"tables": []}}, "output.tables"),
    ({"output": {"tables": ["xlsx"]}}, "output.tables.0"),
    ({"testers": [{"id": "T1", "bias_rel": 0.0}]}, "testers.0"),
    ({"limits": [{"id": "a", "quantity": "hardness"}]}, "limits.0"),
    ({"limits": [{"id": "a", "quantity": "density", "lower": 1}]}, "limits.0.quantity"),
    ({"limits": [{"id": "a", "quantity": "hardness", "lower": 1, "rule": "simple"}]}, "limits.0"),
    (
        {"limits": [{"id": "a", "quantity": "hardness", "lower": 1, "at_least": 0.9}]},
        "limits.0.at_least",
    ),
    ({"monte_carlo": {}}, ""),
]


@pytest.mark.parametrize(("sections", "where"), BAD)
def test_what_is_not_allowed_is_refused_where_it_stands(
    sections: dict[str, Any], where: str
) -> None:
    assert where in _faults("batch_sheet", _sheet(**sections))


def test_what_is_refused_without_plain_words_of_its_own_is_described() -> None:
    # `not`, `anyOf` say nothing to a person: the description has to.
    for node in _nodes(contracts.document("batch_sheet")):
        if "not" in node or "anyOf" in node:
            assert node.get("description", "").endswith(".")


SHA = "0" * 64
MANIFEST: dict[str, Any] = {
    "schema_version": "1.0.0",
    "batch_id": "CS-2026-31",
    "inputs": [
        {
            "path": "indents.csv",
            "table": "indents",
            "sha256": SHA,
            "bytes": 10,
            "rows_read": 3,
            "rows_used": 2,
            "rows_set_aside": 1,
        }
    ],
    "outputs": [{"path": "coupons.csv", "sha256": SHA, "bytes": 10, "rows": 1}],
    "reconciled": {
        "readings_read": 3,
        "readings_used": 2,
        "readings_set_aside": 1,
        "coupons": 1,
    },
    "replaced": None,
    "run": {
        "started_at": "2026-03-01T10:00:00Z",
        "finished_at": "2026-03-01T10:00:01Z",
        "host": "h",
        "user": "u",
        "python": "3.11",
        "platform": "Linux",
    },
}
METHOD: dict[str, Any] = {
    "schema_version": "1.0.0",
    "batch_id": "CS-2026-31",
    "material": {"name": "copper", "lattice": "fcc"},
    "sheets": [{"path": "batch.toml", "sha256": SHA}],
    "laws": {"route": "indent", "area": {"HV": "contact"}},
    "inputs": {
        "hardening.taylor_factor": {
            "value": 3.06,
            "u": 0.15,
            "unit": "1",
            "shape": "normal",
            "factor": None,
            "shared": True,
            "degrees_of_freedom": None,
            "source": "common practice",
            "origin": "default",
        }
    },
    "testers": [],
    "limits": [],
    "uncertainty": {},
    "temperature": {},
    "flow": {},
    "output": {},
    "derived": {"k1_per_m": None, "k2": None},
    "versions": {"coldwork": "0.1.0"},
}
RECORD: dict[str, Any] = {
    "schema_version": "1.0.0",
    "batch_id": "CS-2026-31",
    "coupon_id": "=7/A ä<b>",
    "lot_id": None,
    "condition": None,
    "coupon": {"file": "coupons.csv", "line": 2, "raw": {"coupon_id": "=7/A ä<b>"}},
    "readings": [{"reading_no": 1, "file": "indents.csv", "line": 2, "raw": {"d1_um": "183.1"}}],
    "set_aside": [{"file": "indents.csv", "line": 3, "rule": "not-a-number", "raw": "1,5"}],
    "repeatability": {},
    "steps": [
        {
            "step": "density",
            "relation": "5",
            "quantity": "dislocation_density_per_m2",
            "value": None,
            "unit": "m-2",
            "from": {},
        }
    ],
    "quantities": {"hardness": {"value": 90.0}},
    "flags": [],
    "decisions": [],
    "decision": None,
    "method_sha256": SHA,
}
DOCUMENTS = {"manifest": MANIFEST, "method": METHOD, "record": RECORD}


@pytest.mark.parametrize("name", DOCUMENTS)
def test_a_whole_document_is_taken_and_each_of_its_keys_is_needed(name: str) -> None:
    whole = DOCUMENTS[name]
    assert _faults(name, whole) == []
    for key in whole:
        assert _faults(name, {other: whole[other] for other in whole if other != key}), key
    assert _faults(name, whole | {"surplus": 1})


@pytest.mark.parametrize(
    ("name", "key", "value"),
    [
        ("manifest", "inputs", []),
        ("manifest", "replaced", {"digest": SHA, "reason": "", "moved_to": "replaced/1"}),
        ("manifest", "reconciled", MANIFEST["reconciled"] | {"coupons": -1}),
        ("manifest", "outputs", [MANIFEST["outputs"][0] | {"sha256": "0" * 63}]),
        ("manifest", "run", MANIFEST["run"] | {"pid": 1}),
        ("method", "inputs", {"a": {"value": 1.0}}),
        ("method", "versions", {}),
        ("record", "decision", "accepted"),
        ("record", "coupon", RECORD["coupon"] | {"line": 0}),
    ],
)
def test_a_wrong_part_of_a_document_is_refused(name: str, key: str, value: object) -> None:
    assert _faults(name, DOCUMENTS[name] | {key: value})


def test_a_replaced_result_names_digest_reason_and_place() -> None:
    replaced = {"digest": SHA, "reason": "wrong baseline", "moved_to": "replaced/CS-2026-31-1"}
    assert _faults("manifest", MANIFEST | {"replaced": replaced}) == []
