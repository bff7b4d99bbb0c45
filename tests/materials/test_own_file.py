"""A metal's file of one's own: read like those of the library, refused with line and key."""

from pathlib import Path
from typing import Final

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import coldwork.materials
from coldwork.errors import UsageError
from coldwork.materials import Material, faults_of_file, load, load_file, names

LIBRARY: Final = Path(coldwork.materials.__file__).parent
TITANIUM: Final = (LIBRARY / "titanium.toml").read_text(encoding="utf-8")
COPPER: Final = (LIBRARY / "copper.toml").read_text(encoding="utf-8")


def written(folder: Path, text: str | bytes, name: str = "mine.toml") -> Path:
    path = folder / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def refusal(path: Path) -> str:
    with pytest.raises(UsageError) as caught:
        load_file(path)
    assert str(caught.value) == "\n".join(str(fault) for fault in faults_of_file(path))
    return str(caught.value)


def line_of(text: str, words: str) -> int:
    return text[: text.index(words)].count("\n") + 1


@pytest.mark.parametrize("name", names())
def test_a_file_of_the_library_is_read_alike_from_anywhere(name: str, tmp_path: Path) -> None:
    path = written(tmp_path, (LIBRARY / f"{name}.toml").read_bytes(), "x.toml")
    assert load_file(path) == load(name)
    assert faults_of_file(path) == ()


def test_a_metal_of_ones_own(tmp_path: Path) -> None:
    text = COPPER.replace('name = "copper"', 'name = "cu-0.1-ag"').replace(
        'slip_system = "{111}<110>"\n', ""
    )
    metal = load_file(written(tmp_path, text))
    assert isinstance(metal, Material)
    assert (metal.name, metal.slip_system) == ("cu-0.1-ag", "{111}<110>")  # the lattice's own
    assert metal.values == load("copper").values
    assert (metal.edge_distance_d, metal.centre_distance_d) == (2.5, 3.0)


def test_whole_numbers_byte_order_marks_and_line_ends_do_no_harm(tmp_path: Path) -> None:
    text = COPPER.replace("value = 385.0", "value = 385").replace("\n", "\r\n")
    metal = load_file(written(tmp_path, b"\xef\xbb\xbf" + text.encode()))
    assert metal.values == load("copper").values
    assert isinstance(metal.values["heat_capacity_j_per_kg_k"].value, float)


@pytest.mark.parametrize(
    ("old", "new", "key", "says"),
    [
        ('lattice = "hcp"', 'lattice = "hex"', "lattice", "'hex' is no lattice"),
        ('lattice = "hcp"', "lattice = 3", "lattice", "not a line of text"),
        (
            'title = "',
            'titel = "',
            "titel",
            "unknown key. Unknown keys are errors. The nearest known name is 'title'",
        ),
        ('name = "titanium"', 'name = ""', "name", "not a line of text"),
        ("{10-10}<11-20>", "{111}<110>", "slip_system", "Miller-Bravais indices, four"),
        ("[values.c11_gpa]", "[values.c11_mpa]", "[values.c11_mpa]", "nearest known name"),
        ("value = 43.8\n", "value = true\n", "[values.shear_modulus_gpa] value", "true is not a"),
        ("value = 43.8\n", "value = nan\n", "[values.shear_modulus_gpa] value", "nan is not a"),
        ("value = 43.8\n", "value = '43,8'\n", "[values.shear_modulus_gpa] value", "not a number"),
        ("value = 43.8\n", "value = 43800\n", "[values.shear_modulus_gpa] value", "0.1 and 2000"),
        ("value = 43.8\n", f"value = 1{400 * '0'}\n", "[values.shear_modulus_gpa] value", "number"),
        ("u = 0.8\n", "u = -0.8\n", "[values.shear_modulus_gpa] u", "between 0 and"),
        ("u = 0.8\n", "u = 0.8\nfactor = 2\n", "[values.shear_modulus_gpa] factor", "unknown key"),
        ('unit = "kg/m3"', 'unit = "g/cm3"', "[values.mass_density_kg_per_m3] unit", "'kg/m3'"),
        ("value = 0.321\n", "value = 0.5\n", "[values.poisson_ratio] value", "0.5 is out of"),
        ("value = 162.4\n", "value = 80.0\n", "[values.c11_gpa]", "not stable: c11 > |c12|"),
        ("value = 1.5873\n", "value = -1\n", "[values.c_over_a] value", "between 0.5 and 5"),
    ],
)
def test_a_fault_is_named_with_its_line_and_key(
    old: str, new: str, key: str, says: str, tmp_path: Path
) -> None:
    assert old in TITANIUM
    text = TITANIUM.replace(old, new, 1)
    said = refusal(written(tmp_path, text))
    lines = [line for line in said.splitlines() if f", key {key}: " in line]
    assert len(lines) == 1, said
    assert says in lines[0]
    if key != "[values.c11_gpa]":  # that one is named by its table
        assert f"mine.toml, line {line_of(text, new.splitlines()[-1])}, key {key}: " in lines[0]


@pytest.mark.parametrize("key", ["[values.shear_modulus_gpa]", "[values.edge_distance_d]"])
def test_a_constant_that_every_metal_needs(key: str, tmp_path: Path) -> None:
    start = COPPER.index(key)
    end = COPPER.find("\n[values.", start)
    text = COPPER[:start] + COPPER[end + 1 :]
    said = refusal(written(tmp_path, text))
    assert said.endswith(f", key {key}: this key is missing. Every entry has it. Add it.")


@pytest.mark.parametrize("field", ["value", "u", "unit", "source", "seen"])
def test_a_constant_says_all_five(field: str, tmp_path: Path) -> None:
    lines = COPPER.split("\n")
    first = lines.index("[values.poisson_ratio]")
    gone = next(i for i in range(first, len(lines)) if lines[i].startswith(f"{field} ="))
    said = refusal(written(tmp_path, "\n".join(lines[:gone] + lines[gone + 1 :])))
    where = f"mine.toml, line {first + 1}, key [values.poisson_ratio] {field}"
    assert said == f"{tmp_path}/{where}: this key is missing. Every constant has it. Add it."


def test_the_constants_of_a_crystal_come_together_and_fit_its_lattice(tmp_path: Path) -> None:
    cut = COPPER.index("[values.c44_gpa]")
    text = COPPER[:cut] + COPPER[COPPER.index("[values.boundary_energy") :]
    assert "c44_gpa missing" in refusal(written(tmp_path, text))
    cubic = TITANIUM.replace('lattice = "hcp"', 'lattice = "bcc"')
    said = refusal(written(tmp_path, cubic))
    for key in ("c13_gpa", "c33_gpa", "c_over_a"):
        assert f"a cubic metal (bcc) has no {key}" in said
    assert "slip_system" in said


def test_all_faults_come_at_once_in_one_message(tmp_path: Path) -> None:
    text = COPPER.replace("value = 48.3", "value = -1").replace("seen = true", "seen = 1", 1)
    text += '\n[extra]\nx = 1\n[values.melting_point_c]\nvalue = 1085\nunit = "Cel"\n'
    said = refusal(written(tmp_path, text)).splitlines()
    assert len(said) == 4
    assert all(line.startswith(f"{tmp_path}/mine.toml, line ") for line in said)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        (b"name = \xff", "line 1: byte 7 is not UTF-8"),
        (b"name = 'x'\nname = 'y'\n", "TOML 1.0"),
        (b"name = 'x'\n[values\n", "line 2, column 8"),
        (b"x = " + b"[" * 5000, "nested too deeply"),
        (b"x = " + b"9" * 5000, "a number is too long"),
        (b"", "key values: this key is missing"),
        (b"values = 3\n", "line 1, key values: it is not a table"),
        (b"[values]\ncopper = 3\n", "line 2, key [values.copper]: unknown key"),
        (b"[values]\nc11_gpa = 168.4\n", "line 2, key [values.c11_gpa]: it is not a table"),
        (b"#" * 1_000_001, "it holds more than 1 MB"),
    ],
)
def test_what_is_no_entry_at_all(text: bytes, says: str, tmp_path: Path) -> None:
    assert says in refusal(written(tmp_path, text))


def test_what_is_no_file(tmp_path: Path) -> None:
    assert "it cannot be read: No such file" in refusal(tmp_path / "none.toml")
    assert "it cannot be read: it is not a file" in refusal(tmp_path)
    assert "it cannot be read" in refusal(tmp_path / "a\0b.toml")


@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(data=st.data())
def test_whatever_is_cut_or_put_in_ends_in_a_metal_or_a_refusal(
    data: st.DataObject, tmp_path: Path
) -> None:
    start = data.draw(st.integers(0, len(TITANIUM)))
    length = data.draw(st.integers(0, 60))
    put = data.draw(st.text(st.characters(codec="utf-8"), max_size=12) | st.sampled_from("[]{}.='"))
    text = TITANIUM[:start] + put + TITANIUM[start + length :]
    path = written(tmp_path, text)
    if not faults_of_file(path):
        assert load_file(path).values
    else:
        refusal(path)
