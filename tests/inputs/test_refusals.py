"""What a sheet may not say: each is refused where it stands, with the way out."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]


@pytest.mark.parametrize(
    ("old", "new", "where", "words"),
    [
        # unknown keys and sections, with the nearest name
        ("[material]", "[materail]", "line 4, key [materail]", "nearest known name is 'material'"),
        (
            "baseline_mpa",
            "baseline_mp",
            "[strength] baseline_mp",
            "nearest known name is 'baseline_mpa'",
        ),
        (
            'id = "CS',
            'operater = "x"\nid = "CS',
            "[batch] operater",
            "nearest known name is 'operator'",
        ),
        ("[character]", "[zzz]\n[character]", "key [zzz]", "unknown section 'zzz'. Unknown"),
        # missing keys and sections
        ('route = "indent"', "", "line 12, key [strength] route", "this key is missing"),
        (
            "[character]\nscrew = 0.5\nedge = 0.5\n",
            "",
            "key [character]",
            "this section is missing",
        ),
        ('id = "CS-2026-31"', "", "line 1, key [batch] id", "this key is missing"),
        ('indents = "indents.csv"', "", "[files] indents", "this key is missing"),
        ('coupons = "coupons.csv"', "", "[files] coupons", "this key is missing"),
        (
            "baseline_mpa = { value = 50.0, u = 15.0 }",
            "",
            "line 12, key [strength]",
            "Give baseline_mpa, or",
        ),
        # wrong types
        ('name = "copper"', "name = 29", "[material] name", "29 is not text in quotes"),
        ("[character]\nscrew = 0.5\nedge = 0.5", "character = 1", "character", "unknown key"),
        ("screw = 0.5", 'screw = "half"', "[character] screw", "'half' is not a number"),
        ("screw = 0.5", "screw = true", "[character] screw", "true is not a number"),
        # names that are not known
        ('name = "copper"', 'name = "Coper"', "[material] name", "nearest known name is 'copper'"),
        ('"indent"', '"indnt"', "[strength] route", "nearest known name is 'indent'"),
        ('id = "CS', 'timezone = "Europe/Viena"\nid = "CS', "[batch] timezone", "'Europe/Vienna'"),
        ('id = "CS', 'timezone = "../UTC"\nid = "CS', "[batch] timezone", "not a time zone"),
        ('id = "CS', 'timezone = "America"\nid = "CS', "[batch] timezone", "not a time zone"),
        ('id = "CS', 'timezone = ""\nid = "CS', "[batch] timezone", "not a time zone"),
        # character
        ("edge = 0.5", "edge = 0.4", "line 16, key [character]", "the fractions sum to 0.9"),
        ("edge = 0.5", "edge = 0.500000002", "[character]", "sum to 1.000000002"),
        ("edge = 0.5", "edge = -0.5", "[character] edge", "must be at least 0"),
        ("edge = 0.5", 'edge = 0.5\nmix = "uniform"', "[character] screw", "it cannot stand here"),
        ("screw = 0.5\nedge = 0.5", "", "[character] screw", "none of screw, edge is given"),
        ("screw = 0.5\nedge = 0.5", 'mix = "unifrm"', "[character] mix", "does not fit"),
        ("screw = 0.5\nedge = 0.5", "mix = []", "[character] mix", "does not fit"),
        (
            "screw = 0.5\nedge = 0.5",
            "mix = [{ angle_deg = 0, fraction = 0.5 }]",
            "[character] mix",
            "the fractions sum to 0.5",
        ),
        (
            "screw = 0.5\nedge = 0.5",
            "mix = [{ angle_deg = 100, fraction = 1 }]",
            "[character] mix no. 1.angle_deg",
            "must be at most 90",
        ),
        # batch id
        *[
            ('"CS-2026-31"', f'"{bad}"', "line 2, key [batch] id", words)
            for bad, words in {
                "": "is empty",
                "a/b": "has a slash",
                "a\\\\b": "has a slash",
                "..": "begins with a dot",
                ".": "begins with a dot",
                ".hidden": "begins with a dot",
                "a\\u0000b": "cannot be printed",
                "a\\nb": "cannot be printed",
                "replaced": "is where replaced results go",
                "Replaced": "is where replaced results go",
                " a": "begins or ends with a space",
                "x" * 121: "is too long",
                "ä" * 101: "is too long",
            }.items()
        ],
    ],
)
def test_refuses_with_place_and_way_out(
    refusals: Refusals, sheet: str, old: str, new: str, where: str, words: str
) -> None:
    assert old in sheet
    causes = refusals(sheet.replace(old, new, 1))
    assert any(where in cause and words in cause for cause in causes), causes


@pytest.mark.parametrize(
    ("more", "where", "words"),
    [
        # contradictions
        (
            "[hardening]\nslope_n_per_m = 18\ncoefficient = 0.3",
            "coefficient",
            "cannot stand beside",
        ),
        (
            "[hardening]\nslope_n_per_m = 18\ntaylor_factor = 3",
            "taylor_factor",
            "cannot stand beside",
        ),
        ("[indentation]\ninitial_hardening_mpa = 9", "saturation_stress_mpa", "both or neither"),
        ("[indentation]\nsaturation_stress_mpa = 9", "initial_hardening_mpa", "both or neither"),
        ("[indentation.HK]\narea = 'contact'", "[indentation.HK] area", "by definition"),
        ("[indentation.HK]\nconstraint_factor = 3", "representative_strain", "this key is missing"),
        (
            "[indentation.HBW]\nrepresentative_strain = 0.1\nstrain_ratio = 0.2",
            "[indentation.HBW] strain_ratio",
            "keep one of them",
        ),
        ("[indentation]\narea = 'surface'", "[indentation] area", "one of contact, projected"),
        ("[line_energy]\nouter_radius = 'fixed'", "outer_radius_nm", "this key is missing"),
        ("[line_energy]\nouter_radius_nm = 9", "outer_radius_nm", "it cannot stand here"),
        ("[line_energy]\nouter_radius = 'grains'", "outer_radius", "nearest known name is 'grain'"),
        ("[uncertainty]\ncoverage = 0.5", "coverage", "must be greater than 0.5"),
        ("[uncertainty]\ncoverage = 1", "coverage", "must be less than 1"),
        ("[uncertainty]\ncoverage = 95", "coverage", "must be less than 1"),
        ("[flow]\nplastic_strain = -0.1", "plastic_strain", "must be at least 0"),
        ("[flow]\nplastic_strain = { value = 0.1 }", "plastic_strain", "is not a number"),
        ("[output]\ntables = []", "tables", "does not fit"),
        ("[output]\ntables = ['xlsx']", "tables no. 1", "one of csv, parquet"),
        ("[output]\ntables = ['csv', 'csv']", "tables", "an entry stands twice"),
        ("[output]\ndetail = 'ful'", "detail", "nearest known name is 'full'"),
        ("[temperature]\ntest_c = -300\nreference_c = -300", "test_c", "greater than -273.15"),
        # testers
        ("testers = 3", "testers", "unknown key"),
        ("[testers]\nid = 'T1'", "[testers]", "is not a list"),
        ("[[testers]]\nid = 'T1'\nbias_rel = 0.1", "[[testers]] no. 1, u_rel", "is missing"),
        ("[[testers]]\nid = 'T1'\nbias_rel = -0.9\nu_rel = 0", "bias_rel", "between -0.5 and 0.5"),
        ("[[testers]]\nid = 'T1'\nbias_rel = 0\nu_rel = -1", "u_rel", "must be at least 0"),
        ("[[testers]]\nid = ' '\nbias_rel = 0\nu_rel = 0", "id", "is not a name"),
        (
            "[[testers]]\nid = 'T1'\nbias_rel = 0\nu_rel = 0\nvalid_until = '2027-02-30'",
            "valid_until",
            "is not a day",
        ),
        (
            "[[testers]]\nid = 'T1'\nbias_rel = 0\nu_rel = 0\nvalid_until = 2027-02-03 01:00:00",
            "valid_until",
            "is not text in quotes",
        ),
        (
            "[[testers]]\nid = 'T'\nbias_rel = 0\nu_rel = 0\n" * 2,
            "line 25, key [[testers]] no. 2, id",
            "also the id of no. 1",
        ),
        # limits
        ("[[limits]]\nid = 'a'\nquantity = 'hardness'", "[[limits]] no. 1", "none of lower, upper"),
        (
            "[[limits]]\nid = 'a'\nquantity = 'stored_energy_j_per_gram'\nupper = 1",
            "line 22, key [[limits]] no. 1, quantity",
            "nearest known name is 'stored_energy_j_per_g'",
        ),
        ("[[limits]]\nid = 'a'\nupper = 1", "[[limits]] no. 1, quantity", "this key is missing"),
        ("[[limits]]\nquantity = 'hardness'\nupper = 1", "no. 1, id", "this key is missing"),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nlower = 2\nupper = 2.0",
            "lower",
            "lower 2 is not below upper 2",
        ),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nupper = 2\nat_least = 0.9",
            "at_least",
            "it cannot stand here",
        ),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nupper = 2\n"
            "rule = 'probability'\nat_least = 0.5",
            "at_least",
            "must be greater than 0.5",
        ),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nupper = 2\nrule = 'simple'",
            "max_relative_u",
            "this key is missing",
        ),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nupper = 2\nmax_relative_u = 0.1",
            "max_relative_u",
            "it cannot stand here",
        ),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nupper = 2\nrule = 'guard'",
            "rule",
            "nearest known name is 'guarded'",
        ),
        (
            "[[limits]]\nid = 'a'\nquantity = 'hardness'\nupper = 2\n" * 2,
            "no. 2, id",
            "also the id",
        ),
    ],
)
def test_refuses_contradictions_and_ranges(
    refusals: Refusals, sheet: str, more: str, where: str, words: str
) -> None:
    causes = refusals(f"{sheet}\n{more}\n")
    assert any(where in cause and words in cause for cause in causes), causes


@pytest.mark.parametrize(
    "part", ["friction_mpa = 25", "hall_petch_mpa_m05 = 0.11", "terms_mpa = { a = 1 }"]
)
def test_a_whole_baseline_has_no_parts(refusals: Refusals, sheet: str, part: str) -> None:
    causes = refusals(sheet.replace("baseline_mpa", f"{part}\nbaseline_mpa"))
    assert len(causes) == 1
    assert "cannot stand beside its parts" in causes[0]


def test_a_term_has_a_plain_name(refusals: Refusals, sheet: str) -> None:
    text = sheet.replace("baseline_mpa = { value = 50.0, u = 15.0 }", 'terms_mpa = { "a b" = 1 }')
    (cause,) = refusals(text)
    assert "[strength] terms_mpa.a b" in cause
    assert "letters, digits" in cause


def test_a_new_metal_needs_its_constants(refusals: Refusals, sheet: str) -> None:
    (cause,) = refusals(sheet.replace('"copper"', '"palladium"'))
    assert "does not give poisson_ratio, burgers_vector_nm, mass_density_kg_per_m3" in cause


def test_a_mistyped_name_is_told_once_and_not_as_a_missing_one(
    refusals: Refusals, sheet: str
) -> None:
    (cause,) = refusals(sheet.replace("baseline_mpa", "baselin_mpa"))
    assert "unknown key 'baselin_mpa'" in cause
    assert "nearest known name is 'baseline_mpa'" in cause
    (cause,) = refusals(sheet.replace("id = ", "idd = "))
    assert "unknown key 'idd'" in cause
    unknown, missing = refusals(sheet.replace("baseline_mpa", "xyz"))  # like nothing known
    assert "unknown key 'xyz'" in unknown + missing
    assert "none of friction_mpa" in unknown + missing


def test_says_everything_at_once_and_once_each(refusals: Refusals, sheet: str) -> None:
    text = sheet.replace("edge = 0.5", "edge = 0.4").replace('"copper"', '"coper"')
    text = text.replace("[strength]", "[strength]\nsuperposition_exponent = 3").replace(
        "CS-2026-31", "a/b"
    )
    causes = refusals(text)
    assert [cause.split(",")[1] for cause in causes] == [
        " line 2",
        " line 5",
        " line 13",
        " line 17",
    ]


def test_a_sheet_is_missing(tmp_path: Path) -> None:
    (tmp_path / "bacth.toml").touch()
    with pytest.raises(BatchRefused, match=r"nearest name there is 'bacth\.toml'"):
        read_method(tmp_path)
    with pytest.raises(BatchRefused, match="there is no such folder"):
        read_method(tmp_path / "nothing")
    (tmp_path / "batch.toml").mkdir()
    with pytest.raises(BatchRefused, match="it is not a file"):
        read_method(tmp_path)


@pytest.mark.parametrize(
    ("data", "where", "words"),
    [
        (b"", "batch.toml, key [batch]", "this section is missing"),
        (b"[batch]\nid = 'a'\nname = \xff", "batch.toml, line 3", "byte 24 is not UTF-8"),
        (b"[batch]\nid = \n", "batch.toml, line 2, column 6", "TOML 1.0"),
        (b"[batch]\nid = 'a'\nid = 'b'\n", "batch.toml, line 3", "Cannot overwrite a value"),
        (b"a = \x00", "batch.toml, line 1", "TOML 1.0"),
        (b"\xff\xfe[\x00", "batch.toml, line 1", "not UTF-8"),
        (b"a = " + b"[" * 5000, "batch.toml", "nested too deeply"),
        (b"a = " + b"9" * 5000, "batch.toml", "a number is too long"),
        (b"#" * 4_000_001, "batch.toml", "more than 4 MB"),
        (b"a = 2027-13-45", "batch.toml", "TOML 1.0"),
    ],
)
def test_refuses_what_is_no_sheet(refusals: Refusals, data: bytes, where: str, words: str) -> None:
    causes = refusals(data)
    assert any(where in cause and words in cause for cause in causes), causes
