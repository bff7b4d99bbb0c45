"""A file that many batches share, over which a sheet lays its own keys."""

from collections.abc import Callable
from hashlib import sha256
from pathlib import Path

import pytest

from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]

HOUSE = """\
[batch]
laboratory = "test laboratory 2"
timezone = "Europe/Vienna"
[material]
name = "copper"
shear_modulus_gpa = { value = 44.0, u = 2.5, source = "house" }
[indentation]
constraint_factor = { value = 2.9, u = 0.1 }
[indentation.HBW]
constraint_factor = 2.7
[uncertainty]
coverage = 0.9
[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
"""

OWN = """\
[batch]
id = "B-1"
builds_on = "../house.toml"
timezone = "UTC"
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = 50
[material]
shear_modulus_gpa = 45.0
[indentation.HBW]
intercept_mpa = 10
[character]
screw = 1
"""


def test_own_keys_come_first_key_by_key(write: Write) -> None:
    method = read_method(write(OWN, **{"house.toml": HOUSE}))
    assert (method.laboratory, method.timezone, method.coverage) == (
        "test laboratory 2",
        "UTC",
        0.9,
    )
    shear = method.inputs["material.shear_modulus_gpa"]
    # The value of a key is replaced whole: the house's u and source do not stay behind.
    assert (shear.value, shear.u, shear.source, shear.origin) == (45e9, 0.0, "", "sheet")
    assert method.inputs["indentation.constraint_factor"].value == 2.9
    assert method.inputs["indentation.constraint_factor"].origin == "builds_on"
    assert method.inputs["indentation.HBW.constraint_factor"].value == 2.7
    assert method.inputs["indentation.HBW.intercept_mpa"].value == 10e6
    assert method.inputs["strength.baseline_mpa"].origin == "sheet"
    assert method.inputs["tester:T1"].origin == "builds_on"


def test_lists_of_tables_are_replaced_whole(write: Write) -> None:
    own = OWN + '[[testers]]\nid = "T9"\nbias_rel = 0\nu_rel = 0.01\n'
    method = read_method(write(own, **{"house.toml": HOUSE}))
    assert [tester.id for tester in method.testers] == ["T9"]
    assert method.inputs["tester:T9"].origin == "sheet"


def test_both_digests_are_kept(write: Write) -> None:
    method = read_method(write(OWN, **{"house.toml": HOUSE}))
    assert method.sheets == (
        ("batch.toml", sha256(OWN.encode()).hexdigest()),
        ("../house.toml", sha256(HOUSE.encode()).hexdigest()),
    )


def test_it_may_lie_in_the_folder_itself(write: Write) -> None:
    folder = write(OWN.replace("../house.toml", "house.toml"))
    (folder / "house.toml").write_text(HOUSE, encoding="utf-8")
    assert read_method(folder).coverage == 0.9


def test_a_cause_names_the_file_that_it_stands_in(write: Write) -> None:
    house = HOUSE.replace("coverage = 0.9", "coverage = 9")
    own = OWN.replace("screw = 1", "screw = 0.7")
    with pytest.raises(BatchRefused) as refusal:
        read_method(write(own, **{"house.toml": house}))
    own_cause, house_cause = refusal.value.causes
    assert own_cause.where == "batch.toml, line 15, key [character]"
    assert house_cause.where == "../house.toml, line 12, key [uncertainty] coverage"


def test_keys_that_contradict_across_files_are_refused(write: Write) -> None:
    house = HOUSE + "[hardening]\nslope_n_per_m = 18\n"
    with pytest.raises(BatchRefused) as refusal:
        read_method(write(OWN + "[hardening]\ncoefficient = 0.3\n", **{"house.toml": house}))
    (cause,) = refusal.value.causes
    assert cause.where == "batch.toml, line 18, key [hardening] coefficient"


@pytest.mark.parametrize(
    ("named", "house", "words"),
    [
        ("../hose.toml", HOUSE, "nearest name there is 'house.toml'"),
        ("../house.csv", HOUSE, "is not the path of a .toml file"),
        ("/srv/house.toml", HOUSE, "is an absolute path"),
        ("batch.toml", HOUSE, "is the sheet itself"),
        ("./batch.toml", HOUSE, "is the sheet itself"),
        ("", HOUSE, "is not the path of a .toml file"),
        ("a\\u0000.toml", HOUSE, "is not the path of a .toml file"),
        ("../house.toml", "[batch]\nbuilds_on = 'x.toml'", "one step deep"),
        ("../house.toml", "[batch]\nid = 'x'", "An id belongs to one batch alone"),
        ("../house.toml", "[batch\n", "../house.toml, line 1"),
    ],
)
def test_refuses_what_cannot_be_built_on(write: Write, named: str, house: str, words: str) -> None:
    folder = write(OWN.replace("../house.toml", named), **{"house.toml": house})
    with pytest.raises(BatchRefused) as refusal:
        read_method(folder)
    assert words in str(refusal.value)


def test_its_type_is_checked_like_any(write: Write) -> None:
    with pytest.raises(BatchRefused, match="7 is not text in quotes"):
        read_method(write(OWN.replace('"../house.toml"', "7")))
