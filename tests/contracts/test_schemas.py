"""The schemas themselves: complete, in the agreed order, and read strictly."""

import json
from copy import deepcopy
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from coldwork import contracts, units
from coldwork.contracts.checks import CHECKS
from coldwork.contracts.loader import contract_of
from coldwork.errors import ColdworkError, UsageError

ROOT = Path(__file__).parents[2]
NAMED = [
    "hardness",
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "line_energy_j_per_m",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_mol",
    "stored_energy_j_per_g",
]
OF_A_CURVE = [
    "slope_gpa",
    "toe_strain",
    "proof_stress_0_2_mpa",
    "upper_yield_mpa",
    "lower_yield_mpa",
    "yield_elongation",
    "tensile_strength_mpa",
    "uniform_elongation",
    "elongation_at_maximum_force",
    "uniform_plastic_strain",
    "work_to_uniform_strain_j_per_m3",
    "initial_hardening_mpa",
    "saturation_stress_mpa",
    "hardening_at_zero_stress_mpa",
    "stress_at_zero_hardening_mpa",
    "voce_yield_stress_mpa",
    "voce_saturation_stress_mpa",
    "voce_initial_hardening_mpa",
    "hollomon_coefficient_mpa",
    "hollomon_exponent",
    "neck_stress_mpa",
]
ALONG_THE_STRAIN = [
    "flow_stress_mpa",
    "dislocation_stress_mpa",
    "dislocation_density_per_m2",
    "stored_energy_j_per_m3",
    "stored_energy_j_per_g",
    "plastic_work_j_per_m3",
    "stored_fraction_of_work",
]
# Written out from the design of the tables, not read from the schemas.
COLUMNS = {
    "in/coupons": "coupon_id lot_id condition prior_true_strain prior_plastic_work_j_per_m3 "
    "thickness_mm grain_size_um u_grain_size_um sampled_at gauge_length_mm initial_diameter_mm "
    "width_mm final_diameter_mm neck_radius_mm rolled_from_mm rolled_to_mm drawn_from_mm "
    "drawn_to_mm upset_from_mm upset_to_mm",
    "in/indents": "coupon_id indent_no scale force_n d1_um d2_um hardness ball_mm x_mm y_mm "
    "edge_mm dwell_s temperature_c measured_at operator tester",
    "in/flow_stress": "coupon_id reading_no plastic_strain flow_stress_mpa strain_rate_per_s "
    "temperature_c measured_at operator tester",
    "in/curves": "coupon_id point_no time_s force_n extension_mm crosshead_mm stress_mpa strain",
    "in/exclusions": "coupon_id reading_no excluded_by excluded_at reason",
    "in/schedule": "time_s temperature_c",
    "in/verification": "tester block_id certified_hardness u_certified_hardness hardness "
    "measured_at operator",
    "in/pairs": "coupon_id flow_stress_mpa u_flow_stress_mpa dislocation_density_per_m2 "
    "u_dislocation_density_per_m2 hardness u_hardness force_n ball_mm grain_size_um "
    "u_grain_size_um stored_energy_j_per_g u_stored_energy_j_per_g heat_j_per_g u_heat_j_per_g "
    "correlation",
    "out/coupons": "batch_id coupon_id lot_id condition material route test_strain readings_used "
    "readings_set_aside hardness hardness_scale flow_stress_mpa baseline_stress_mpa "
    "dislocation_stress_mpa dislocation_density_per_m2 mean_spacing_nm line_energy_j_per_m "
    "stored_energy_j_per_m3 stored_energy_j_per_mol stored_energy_j_per_g temperature_rise_k "
    "stored_fraction_of_work decision deciding_limit conformance_probability flags record_sha256 "
    + " ".join(f"u_own_{name} u_shared_{name} u_{name} lower_{name} upper_{name}" for name in NAMED)
    + " p_below_baseline "
    + " ".join(f"sd_{name}" for name in NAMED),
    "out/quantities": "coupon_id quantity value unit u_own u_shared u lower upper coverage "
    "degrees_of_freedom",
    "out/budget": "coupon_id quantity input value unit u sensitivity contribution "
    "contribution_unit own_or_shared degrees_of_freedom share_of_u2",
    "out/lots": "lot_id condition coupons coupons_averaged conforming non_conforming undecided "
    "decision "
    + " ".join(
        f"mean_{name} u_own_{name} u_shared_{name} u_{name} lower_{name} upper_{name}"
        for name in NAMED
    ),
    "out/readings": "coupon_id reading_no route scale force_n mean_diagonal_um hardness "
    "flow_stress_mpa plastic_strain weight x_mm y_mm measured_at operator tester flags file line",
    "out/set_aside": "table file line column raw rule statement hint also coupon_id reading_no "
    "excluded_by excluded_at reason",
    "out/flags": "level coupon_id lot_id reading_no rule statement value limit unit empties source "
    "file line detail",
    "out/decisions": "coupon_id limit_id quantity value u lower_limit upper_limit bound rule basis "
    "coverage probability decision reason to_settle",
    "out/tensile": "coupon_id lot_id condition mode strain_from file first_line last_line "
    "points_used "
    "points_set_aside slope_gpa toe_strain proof_stress_0_2_mpa upper_yield_mpa lower_yield_mpa "
    "yield_elongation tensile_strength_mpa tensile_strength_bias_mpa uniform_elongation "
    "elongation_at_maximum_force uniform_plastic_strain work_to_uniform_strain_j_per_m3 "
    "initial_hardening_mpa saturation_stress_mpa correlation_hardening_saturation "
    "hardening_at_zero_stress_mpa stress_at_zero_hardening_mpa voce_yield_stress_mpa "
    "voce_saturation_stress_mpa voce_initial_hardening_mpa hollomon_coefficient_mpa "
    "hollomon_exponent neck_stress_mpa neck_strain line_misfit voce_misfit hollomon_misfit "
    "strain_rate_per_s rate_changes flags "
    + " ".join(f"u_own_{name} u_shared_{name} u_{name}" for name in OF_A_CURVE),
    "out/evolution": "coupon_id lot_id condition test_strain prior_true_strain "
    "prior_plastic_work_j_per_m3 "
    + " ".join(ALONG_THE_STRAIN)
    + " reason flags "
    + " ".join(
        f"u_own_{name} u_shared_{name} u_{name} lower_{name} upper_{name}"
        for name in ALONG_THE_STRAIN
    ),
    "out/expected_heat": "coupon_id stored_energy_j_per_g expected_heat_j_per_g "
    "u_own_expected_heat_j_per_g u_shared_expected_heat_j_per_g u_expected_heat_j_per_g "
    "lower_expected_heat_j_per_g upper_expected_heat_j_per_g",
    "out/routes": "coupon_id test_strain_indent dislocation_stress_indent_mpa "
    "u_dislocation_stress_indent_mpa test_strain_flow dislocation_stress_flow_mpa "
    "u_dislocation_stress_flow_mpa difference_mpa u_difference_mpa degrees_of_freedom coverage "
    "normalised_error weight_indent taken",
    "out/curve_points": "coupon_id point_no time_s engineering_stress_mpa engineering_strain "
    "true_stress_mpa true_plastic_strain file line",
    "out/anneal": "coupon_id state quantity fraction at_temperature_c at_time_s value unit u_own "
    "u_shared u lower upper coverage degrees_of_freedom verdict reason",
    "out/compare": "coupon_id choice_no dislocation_density_per_m2 u_dislocation_density_per_m2 "
    "ratio_dislocation_density_per_m2 stored_energy_j_per_g u_stored_energy_j_per_g "
    "ratio_stored_energy_j_per_g",
    "out/plan": "quantity force_n indents_per_coupon coupons relative_u half_width risk "
    "cost cheapest",
    "out/compare_choices": "choice_no choice quantity coupons median_ratio least_ratio "
    "greatest_ratio relative_u relative_u_of_choice beyond_u",
}
REQUIRED = {
    "in/coupons": "coupon_id",
    "in/indents": "coupon_id indent_no force_n",
    "in/flow_stress": "coupon_id reading_no plastic_strain flow_stress_mpa",
    "in/curves": "coupon_id",
    "in/exclusions": "coupon_id reading_no excluded_by excluded_at reason",
    "in/schedule": "time_s temperature_c",
    "in/verification": "tester block_id certified_hardness u_certified_hardness hardness "
    "measured_at",
    "in/pairs": "coupon_id",
}
UNITS = {  # what the suffix of a column's name promises
    "_mpa": "MPa",
    "_mm": "mm",
    "_um": "um",
    "_nm": "nm",
    "_n": "N",
    "_s": "s",
    "_c": "Cel",
    "_k": "K",
    "_per_s": "/s",
    "_per_m2": "m-2",
    "_j_per_m": "J/m",
    "_j_per_m3": "J/m3",
    "_j_per_mol": "J/mol",
    "_j_per_g": "J/g",
}


def _schema(name: str) -> dict[str, Any]:
    text = (ROOT / "schemas" / f"{name}.json").read_text(encoding="utf-8")
    schema: dict[str, Any] = json.loads(text)
    return schema


def test_there_is_a_contract_for_each_table_and_no_other() -> None:
    files = {
        path.relative_to(ROOT / "schemas").with_suffix("").as_posix()
        for path in (ROOT / "schemas").rglob("*.*")
        if path.is_file()
    }
    documents = {f"documents/{name}" for name in contracts.documents()}
    assert files == set(COLUMNS) | documents
    assert set(contracts.names()) == set(COLUMNS)


@pytest.mark.parametrize("name", COLUMNS)
def test_columns_stand_in_the_agreed_order(name: str) -> None:
    assert list(contracts.load(name).columns) == COLUMNS[name].split()


@pytest.mark.parametrize("name", REQUIRED)
def test_what_comes_in_requires_what_the_design_marks(name: str) -> None:
    assert list(contracts.load(name).required_columns) == REQUIRED[name].split()


def test_what_goes_out_always_has_every_column() -> None:
    contract = contracts.load("out/lots")
    assert contract.required_columns == contract.columns


@pytest.mark.parametrize("name", contracts.names())
def test_each_column_says_what_a_person_needs(name: str) -> None:
    for field in contracts.load(name).fields:
        assert field.title, field.name
        assert field.description.endswith("."), field.name
        assert field.source, field.name
        assert (field.unit is not None) == (field.type in ("number", "integer")), field.name


@pytest.mark.parametrize("name", contracts.names())
def test_each_unit_is_known_or_named_by_a_column(name: str) -> None:
    contract = contracts.load(name)
    for unit in {field.unit for field in contract.fields if field.unit is not None}:
        if "{" in unit:
            told = unit.replace("{", "").replace("}", "").split("/")
            assert set(told) <= set(contract.columns)
        else:
            assert np.isfinite(units.to_si(1.0, unit))


@pytest.mark.parametrize("name", contracts.names())
def test_each_suffix_keeps_its_promise(name: str) -> None:
    for field in contracts.load(name).fields:
        ends = [end for end in UNITS if field.name.endswith(end)]
        if ends and field.type == "number" and not field.name.startswith("ratio_"):
            assert field.unit == UNITS[max(ends, key=len)], field.name


@pytest.mark.parametrize("name", contracts.names())
def test_checks_exist_and_each_says_what_it_is(name: str) -> None:
    contract = contracts.load(name)
    assert set(contract.checks) <= set(CHECKS)
    assert all(CHECKS[each].statement.endswith(".") for each in contract.checks)


def test_every_check_is_asked_for_by_some_table() -> None:
    asked = {each for name in contracts.names() for each in contracts.load(name).checks}
    assert asked == set(CHECKS)


@pytest.mark.parametrize("name", [*COLUMNS, *(f"documents/{d}" for d in contracts.documents())])
def test_the_file_is_laid_out_to_be_read(name: str) -> None:
    text = (ROOT / "schemas" / f"{name}.json").read_text(encoding="utf-8")
    again = json.dumps(json.loads(text), indent=2, ensure_ascii=False) + "\n"
    escaped = again.replace("\u2028", "\\u2028").replace("\u2029", "\\u2029")
    assert text == escaped


@pytest.mark.parametrize("name", COLUMNS)
def test_what_is_loaded_is_what_the_checkout_holds(name: str) -> None:
    # Against a built wheel this tells a stale copy from the source.
    assert contracts.load(name) == contract_of(_schema(name), name)


def test_documents_are_those_of_the_checkout() -> None:
    for name in contracts.documents():
        assert contracts.document(name) == _schema(f"documents/{name}")


def test_no_second_copy_lies_in_the_package() -> None:
    package = ROOT / "pipeline"
    assert not list(package.rglob("*.json"))
    assert not [path for path in package.rglob("schemas") if path.is_dir()]


def test_an_unknown_name_is_refused_with_the_nearest() -> None:
    with pytest.raises(UsageError, match="in/indents"):
        contracts.load("in/indent")
    with pytest.raises(UsageError, match="batch_sheet"):
        contracts.document("batch_shet")


def test_a_document_is_a_fresh_copy() -> None:
    contracts.document("manifest")["required"].clear()
    assert contracts.document("manifest")["required"]


def _spoilt(**changes: Any) -> dict[str, Any]:  # noqa: ANN401 - whatever JSON holds
    schema = deepcopy(_schema("in/coupons"))
    field = next(each for each in schema["fields"] if each["name"] == "grain_size_um")
    for path, value in changes.items():
        target = {"table": schema, "field": field, "limits": field["constraints"]}[
            path.partition("_")[0]
        ]
        key = path.partition("_")[2]
        if value is None:
            del target[key]
        else:
            target[key] = value
    return schema


@pytest.mark.parametrize(
    ("changes", "match"),
    [
        ({"table_foreignKeys": []}, "unknown key foreignKeys"),
        ({"field_format": "any"}, "grain_size_um: unknown key format"),
        ({"limits_maximun": 3}, "grain_size_um: unknown key maximun"),
        ({"field_type": "float"}, "unknown type 'float'"),
        ({"field_unit": None}, "a number has a unit"),
        ({"field_type": "string"}, "a number has a unit"),
        ({"limits_pattern": "[0-9]"}, "for text"),
        ({"table_missingValues": ["", "NA"]}, "only an empty cell is absent"),
        ({"table_direction": "sideways"}, "direction"),
        ({"table_primaryKey": ["coupon"]}, "not there: coupon"),
        ({"table_checks": []}, "not there: uncertainty-has-its-value"),
        ({"field_name": "coupon_id"}, "stands twice"),
    ],
)
def test_a_schema_that_is_not_understood_is_refused(changes: dict[str, Any], match: str) -> None:
    with pytest.raises(ColdworkError, match=match):
        contract_of(_spoilt(**changes), "spoilt")


def test_the_unspoilt_schema_is_taken() -> None:
    assert contract_of(_spoilt(), "fine").name == "in/coupons"


@pytest.mark.parametrize(
    ("name", "column"),
    [("out/decisions", "probability"), ("out/coupons", "conformance_probability")],
)
def test_probability_promises_no_more_than_it_can_keep(name: str, column: str) -> None:
    # JCGM 106:2012 takes the prior into account; this number has none, so it must say so.
    words = contracts.load(name).field(column).description
    assert "just outside a limit is called conforming in at most 5 % of batches" in words
    assert "only if, before the test, every value" in words


def test_every_stored_energy_says_that_calorimetry_finds_more() -> None:
    contract = contracts.load("out/coupons")
    for name in NAMED[-3:]:
        assert "in dislocations" in contract.field(name).title
        assert "calorimetry finds more" in contract.field(name).description
