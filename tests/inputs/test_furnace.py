"""The furnace file: what it says, and what is refused by name and line."""

from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from coldwork.contracts import document
from coldwork.errors import BatchRefused
from coldwork.inputs.furnace import _WINDOWS, Furnace, read_furnace

FURNACE = """\
[boundary]
energy_j_per_m2 = { value = 0.625, u = 0.1 }
[particles]
fraction = 0.005
radius_nm = { value = 100.0, factor = 1.1 }
[recrystallisation]
exponent = 1.2
prefactor_per_s = 1e7
activation_energy_kj_per_mol = 120.0
[recovery]
activation_energy_kj_per_mol = 240.0
activation_volume_nm3 = 0.5
youngs_modulus_gpa = 110.0
"""


def furnace(folder: Path, text: str) -> Furnace:
    path = folder / "furnace.toml"
    path.write_text(text, encoding="utf-8")
    return read_furnace(path)


def test_numbers_are_si_and_defaults_are_marked(tmp_path: Path) -> None:
    found = furnace(tmp_path, FURNACE)
    numbers = {name: given.input for name, given in found.numbers.items()}
    assert_allclose(numbers["particles.radius_nm"].value, 1e-7, rtol=1e-15)
    assert_allclose(numbers["recovery.activation_volume_nm3"].value, 0.5e-27, rtol=1e-15)
    assert_allclose(numbers["recrystallisation.activation_energy_kj_per_mol"].value, 120e3)
    assert numbers["recovery.attempt_frequency_per_s"].origin == "default"
    assert numbers["particles.fraction"].origin == "sheet"
    assert (found.hold_temperature, found.hold_time, found.correlation) == (None, 3600.0, 0.0)
    assert found.fractions == (0.05, 0.5, 0.95)
    assert found.file[0][0] == "furnace.toml"


def test_an_empty_file_gives_nothing(tmp_path: Path) -> None:
    found = furnace(tmp_path, "")
    assert not found.numbers
    assert not found.has("recovery")


def test_every_number_has_a_window_and_a_unit() -> None:
    numbers = {
        (section, key)
        for section, table in document("furnace")["properties"].items()
        for key, inner in table["properties"].items()
        if "$ref" in inner
    }
    assert numbers == set(_WINDOWS)


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ("fraction = 0.005", "fraction = 5.0", "line 4, key [particles] fraction: 5"),
        ("radius_nm = { value = 100.0, factor = 1.1 }\n", "", "[particles] radius_nm: this key"),
        ("[boundary]", "[boundry]", "The nearest known name is 'boundary'"),
        ("exponent = 1.2", "exponent = '1.2'", "[recrystallisation] exponent: '1.2' is not a num"),
        ("= 240.0", "= 240000.0", "must lie between 1 and 2000 kJ/mol"),
        ("[recovery]", "correlation = 1.5\n[recovery]", "correlation: 1.5 is out of range"),
        ("[boundary]", "[holding]\nfractions = [1.0]\n[boundary]", "less than 1"),
        ("exponent = 1.2", "exponent = nan", "nan is not a number that can be computed with"),
        ("exponent = 1.2\n", "exponent = 1.2\nexponent = 1.3\n", "TOML 1.0"),
    ],
)
def test_what_does_not_fit_is_refused_where_it_stands(
    tmp_path: Path, old: str, new: str, told: str
) -> None:
    assert FURNACE.count(old) >= 1
    with pytest.raises(BatchRefused) as refused:
        furnace(tmp_path, FURNACE.replace(old, new, 1))
    assert told in str(refused.value)
    assert "furnace.toml" in str(refused.value)
