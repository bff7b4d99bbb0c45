"""A metal of one's own beside the batch: taken in the library's place, or refused by name."""

from hashlib import sha256
from pathlib import Path
from typing import Any, Final

import pytest

import coldwork.materials
from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method

COPPER: Final = (Path(coldwork.materials.__file__).parent / "copper.toml").read_text("utf-8")
OWN: Final = COPPER.replace('name = "copper"', 'name = "cu-0.1-ag"').replace(
    "[values.shear_modulus_gpa]\nvalue = 48.3", "[values.shear_modulus_gpa]\nvalue = 47.0"
)
SHEET: Final = """\
[batch]
id = "M-1"
[material]
name = "cu-0.1-ag"
file = "own.toml"
{more}
[files]
coupons = "coupons.csv"
indents = "indents.csv"
[strength]
route = "indent"
baseline_mpa = 50.0
[hardening]
law = "constant"
[character]
screw = 1.0
"""


def batch(folder: Path, own: str | None = OWN, more: str = "") -> Path:
    (folder / "batch.toml").write_text(SHEET.format(more=more), encoding="utf-8")
    (folder / "coupons.csv").write_text("coupon_id\nA\n", encoding="utf-8")
    (folder / "indents.csv").write_text(
        "coupon_id,indent_no,force_n,hardness\nA,1,98.07,100\n", encoding="utf-8"
    )
    if own is not None:
        (folder / "own.toml").write_text(own, encoding="utf-8")
    return folder


def refusal(folder: Path) -> str:
    with pytest.raises(BatchRefused) as caught:
        read_method(folder)
    return str(caught.value)


def test_its_values_take_the_librarys_place_and_its_digest_is_kept(tmp_path: Path) -> None:
    method = read_method(batch(tmp_path))
    assert method.inputs["material.shear_modulus_gpa"].value == 47.0e9
    inputs: Any = method.document["inputs"]
    assert inputs["material.shear_modulus_gpa"]["origin"] == "metal_file"
    assert (method.material, method.lattice) == ("cu-0.1-ag", "fcc")
    digest = sha256(OWN.encode()).hexdigest()
    assert ("own.toml", digest) in method.sheets


def test_the_sheet_goes_before_the_file(tmp_path: Path) -> None:
    method = read_method(batch(tmp_path, more="shear_modulus_gpa = 45.0"))
    assert method.inputs["material.shear_modulus_gpa"].value == 45.0e9


def test_a_file_may_stand_in_a_folder_above(tmp_path: Path) -> None:
    (tmp_path / "batch").mkdir()
    folder = batch(tmp_path / "batch", own=None, more="")
    sheet = (folder / "batch.toml").read_text("utf-8").replace("own.toml", "../own.toml")
    (folder / "batch.toml").write_text(sheet, encoding="utf-8")
    (tmp_path / "own.toml").write_text(OWN, encoding="utf-8")
    assert read_method(folder).inputs["material.shear_modulus_gpa"].value == 47.0e9


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    assert "own.toml: there is no such file" in refusal(batch(tmp_path, own=None))


def test_what_is_wrong_within_is_named_by_line(tmp_path: Path) -> None:
    wrong = OWN.replace("value = 0.343", "value = -3")
    line = wrong[: wrong.index("value = -3")].count("\n") + 1
    message = refusal(batch(tmp_path, wrong))
    assert f"own.toml, line {line}" in message
    assert str(tmp_path) not in message.split("\n", 1)[1]


def test_another_name_is_refused(tmp_path: Path) -> None:
    message = refusal(batch(tmp_path, COPPER))
    assert "line 5, key [material] file" in message
    assert "'copper'" in message
    assert "'cu-0.1-ag'" in message


@pytest.mark.parametrize("path", ["/tmp/own.toml", "own.txt", "batch.toml"])  # noqa: S108 - refused
def test_a_path_that_cannot_be_is_refused(tmp_path: Path, path: str) -> None:
    folder = batch(tmp_path)
    sheet = (folder / "batch.toml").read_text("utf-8").replace("own.toml", path)
    (folder / "batch.toml").write_text(sheet, encoding="utf-8")
    assert "key [material] file" in refusal(folder)
