"""A new batch folder: its sheet fits as it is, and its comments tell the truth."""

import re
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest

from coldwork import contracts
from coldwork.errors import ResultsNotWritten, UsageError
from coldwork.inputs.keys import schema_of
from coldwork.inputs.sheet import read_method
from coldwork.jobs.new import new

SECTION = re.compile(r"#?\[+([A-Za-z_.]+)\]+$")
KEY = re.compile(r"#?([a-z0-9_]+) = (.*)$")


def keys_of(schema: Mapping[str, Any], path: tuple[str, ...] = ()) -> dict[tuple[str, ...], Any]:
    found: dict[tuple[str, ...], Any] = {}
    for name, inner in schema.get("properties", {}).items():
        if inner.get("type") == "object" and "properties" in inner:
            found |= keys_of(inner, (*path, name))
        elif inner.get("type") == "array" and "properties" in inner.get("items", {}):
            found |= keys_of(inner["items"], (*path, name))
        else:
            found[(*path, name)] = inner.get("default")
    return found


def written_keys(text: str) -> dict[tuple[str, ...], tuple[Any, str]]:
    """Give every key of the template, said or not, with its value and the comment above it."""
    found: dict[tuple[str, ...], tuple[Any, str]] = {}
    section: tuple[str, ...] = ()
    comment = ""
    for line in text.splitlines():
        if line.startswith("# ") or not line:
            comment = comment + line[1:] if line else ""
        elif head := SECTION.match(line):
            section = tuple(head[1].split("."))
        elif key := KEY.match(line):
            found[(*section, key[1])] = (tomllib.loads(f"k = {key[2]}")["k"], comment)
            comment = ""
    return found


@pytest.fixture
def template(tmp_path: Path) -> str:
    new(tmp_path / "B-7")
    return (tmp_path / "B-7" / "batch.toml").read_text(encoding="utf-8")


def test_every_key_of_the_schema_is_there_and_no_other(template: str) -> None:
    assert set(written_keys(template)) == set(keys_of(schema_of(())))


def test_every_default_is_the_schemas(template: str) -> None:
    defaults = keys_of(schema_of(()))
    for key, (value, _) in written_keys(template).items():
        if defaults[key] is not None:
            assert value == defaults[key], key


def test_taking_the_mark_away_from_the_defaults_changes_nothing(
    tmp_path: Path, template: str
) -> None:
    plain = read_method(tmp_path / "B-7")
    defaults = keys_of(schema_of(()))
    lines = []
    section: tuple[str, ...] = ()
    for line in template.splitlines():
        head, key = SECTION.match(line), KEY.match(line)
        section = tuple(head[1].split(".")) if head else section
        uncommented = key is not None and section not in {
            ("testers",),
            ("limits",),
            ("indentation", "HK"),
        }
        if uncommented and key and defaults[(*section, key[1])] is not None:
            line = line.removeprefix("#")
        lines.append(line)
    (tmp_path / "B-7" / "batch.toml").write_text("\n".join(lines), encoding="utf-8")
    said = read_method(tmp_path / "B-7")
    assert said.laws == plain.laws
    assert {n: (i.value, i.u, i.factor) for n, i in said.inputs.items()} == {
        n: (i.value, i.u, i.factor) for n, i in plain.inputs.items()
    }
    assert {i.origin for n, i in said.inputs.items() if n.startswith("hardening")} == {"sheet"}


@pytest.mark.parametrize("section", ["[[testers]]", "[[limits]]", "[indentation.HK]"])
def test_an_example_section_fits(tmp_path: Path, template: str, section: str) -> None:
    start = template.index(f"#{section}")
    end = template.find("\n\n", start)
    example = template[start : end if end > 0 else None]
    drop = ("#at_least", "#max_relative_u", "#bias_from")  # they go with other choices
    said = [
        line.removeprefix("#")
        for line in example.splitlines()
        if not line.startswith(("# ", *drop))
    ]
    text = template + "\n" + "\n".join(said) + "\n"
    (tmp_path / "B-7" / "batch.toml").write_text(text, encoding="utf-8")
    method = read_method(tmp_path / "B-7")
    assert method.testers or method.limits or "indentation.HK.constraint_factor" in method.inputs


def test_lines_are_short_enough_to_read(template: str) -> None:
    assert max(map(len, template.splitlines())) <= 96


def test_the_tables_have_the_columns_of_their_contracts(tmp_path: Path) -> None:
    written = new(tmp_path / "B-7")
    assert [path.name for path in written] == [
        "batch.toml",
        "coupons.csv",
        "indents.csv",
        "flow_stress.csv",
        "exclusions.csv",
    ]
    for path in written[1:]:
        text = path.read_text(encoding="utf-8")
        assert text == ",".join(contracts.load(f"in/{path.stem}").columns) + "\n"


@pytest.mark.parametrize(
    ("name", "expected"),
    [("B-7", "B-7"), ('a"b ü', 'a"b ü'), ("replaced", "batch-1"), (".x", "batch-1")],
)
def test_the_folders_name_becomes_the_id_where_it_can(
    tmp_path: Path, name: str, expected: str
) -> None:
    new(tmp_path / name)
    assert read_method(tmp_path / name).batch_id == expected


def test_makes_the_folders_on_the_way_and_takes_an_empty_one(tmp_path: Path) -> None:
    assert new(tmp_path / "2026" / "B-7")[0].is_file()
    (tmp_path / "empty").mkdir()
    assert new(tmp_path / "empty")[0].is_file()


def test_touches_nothing_that_is_there(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("keep", encoding="utf-8")
    with pytest.raises(UsageError, match="holds something already"):
        new(tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["notes.txt"]
    with pytest.raises(UsageError, match="is a file"):
        new(tmp_path / "notes.txt")
    with pytest.raises(ResultsNotWritten, match="could not be written"):
        new(tmp_path / "notes.txt" / "deeper")
