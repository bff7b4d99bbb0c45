"""The library as the command shows it."""

import json

import pytest

from coldwork.errors import UsageError
from coldwork.jobs import materials as job
from coldwork.materials import load, names


def test_the_table_has_a_line_for_every_metal() -> None:
    lines = job.table().splitlines()
    assert all(len(line) <= 100 for line in lines)
    assert [line.split()[0] for line in lines[1 : 1 + len(names())]] == list(names())
    copper = next(line for line in lines if line.startswith("copper"))
    assert "fcc" in copper
    assert "48.3 ± 1.5" in copper


@pytest.mark.parametrize("name", names())
def test_the_detail_says_every_constant_and_its_source(name: str) -> None:
    text = job.detail(name)
    assert all(len(line) <= 100 for line in text.splitlines())
    flat = " ".join(text.split())
    for key, entry in load(name).values.items():
        assert f"{key} = " in text
        assert entry.source in flat


def test_the_data_goes_through_json() -> None:
    everything = json.loads(json.dumps(job.as_json()))
    assert list(everything["materials"]) == list(names())
    nickel = json.loads(json.dumps(job.as_json("nickel")))["materials"]["nickel"]
    assert nickel["lattice"] == "fcc"
    assert nickel["values"]["shear_modulus_gpa"]["unit"] == "GPa"
    assert nickel["values"]["shear_modulus_gpa"]["seen"] is True


def test_an_unknown_name_is_refused() -> None:
    for function in (job.detail, job.as_json):
        with pytest.raises(UsageError, match="nearest name is 'copper'"):
            function("coppr")
