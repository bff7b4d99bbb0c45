"""The files that a sheet names: paths, patterns and lists, inside the batch folder."""

from collections.abc import Callable
from pathlib import Path

import pytest

from coldwork.errors import BatchRefused
from coldwork.inputs.sheet import read_method

Write = Callable[..., Path]
Refusals = Callable[..., list[str]]

INDENTS = 'indents = "indents.csv"'


def names(paths: tuple[Path, ...], folder: Path) -> list[str]:
    return [path.relative_to(folder.resolve()).as_posix() for path in paths]


@pytest.mark.parametrize(
    ("entry", "expected"),
    [
        ('"indents.csv"', ["indents.csv"]),
        ('"./indents.csv"', ["indents.csv"]),
        ('"indents*.csv"', ["indents-2.csv", "indents.csv"]),
        ('"indents[-]?.csv"', ["indents-2.csv"]),
        ('["indents.csv", "indents-2.csv"]', ["indents.csv", "indents-2.csv"]),
        ('["indents.csv", "sub/*.csv"]', ["indents.csv", "sub/a.csv", "sub/b.csv"]),
        ('"sub/../indents.csv"', ["indents.csv"]),
        ('"**/a.csv"', ["sub/a.csv"]),
        ('"odd[1].csv"', ["odd[1].csv"]),
    ],
)
def test_finds_paths_patterns_and_lists(
    write: Write, sheet: str, entry: str, expected: list[str]
) -> None:
    folder = write(sheet.replace(INDENTS, f"indents = {entry}"))
    (folder / "sub").mkdir()
    for name in ("sub/b.csv", "sub/a.csv", "odd[1].csv"):
        (folder / name).touch()
    method = read_method(folder)
    assert names(method.indents, folder) == expected


@pytest.mark.parametrize(
    ("entry", "words"),
    [
        ('"indent.csv"', "nearest name there is 'indents.csv'"),
        ('"zzzzzz"', "There are coupons.csv, exclusions.csv"),
        ('"no/where.csv"', "The folder that it names is not there either"),
        ('"sub"', "sub is not a file"),
        ('"z*.csv"', "nothing matches the pattern 'z*.csv'"),
        ('"indents[.csv"', "nothing matches the pattern"),
        ('"**x/a.csv"', "cannot be looked up"),
        ('"../outside.csv"', "leaves the batch folder"),
        ('"../*.csv"', "leaves the batch folder"),
        ('"/etc/hostname"', "leaves the batch folder"),
        ('"/etc/host*"', "leaves the batch folder"),
        ("'C:\\indents.csv'", "leaves the batch folder"),
        ('"link.csv"', "leaves the batch folder"),
        ('"link*.csv"', "leaves the batch folder"),
        ('"away/outside.csv"', "leaves the batch folder"),
        ('"loop.csv"', "loop.csv"),
        ('""', "does not fit"),
        ('"."', "is not a path"),
        ('"a\\u0000b"', "is not a path"),
        ('"a\\nb"', "is not a path"),
        (f'"{"x" * 300}"', "cannot be looked up"),
        ('["indents.csv", "indents.csv"]', "an entry stands twice"),
        ('["indents.csv", "./indents.csv"]', "names indents.csv a second time"),
        ('["indents.csv", "ind*.csv"]', "names indents.csv a second time"),
        ("[]", "does not fit"),
        ("7", "7 is not text in quotes or a list"),
        ("[7]", "7 is not text in quotes"),
    ],
)
def test_refuses_what_is_not_there_or_outside(
    write: Write, sheet: str, entry: str, words: str
) -> None:
    folder = write(sheet.replace(INDENTS, f"indents = {entry}"), **{"outside.csv": ""})
    (folder / "sub").mkdir()
    (folder / "link.csv").symlink_to(folder.parent / "outside.csv")
    (folder / "away").symlink_to(folder.parent)
    (folder / "loop.csv").symlink_to(folder / "loop.csv")
    with pytest.raises(BatchRefused) as refusal:
        read_method(folder)
    (cause,) = refusal.value.causes
    assert cause.where.startswith("batch.toml, line 10, key [files] indents")
    assert words in str(cause)


def test_a_link_inside_the_folder_keeps_its_name(write: Write, sheet: str) -> None:
    folder = write(sheet.replace(INDENTS, 'indents = "again.csv"'))
    (folder / "again.csv").symlink_to(folder / "indents.csv")
    assert names(read_method(folder).indents, folder) == ["again.csv"]


def test_the_batch_folder_may_be_a_link(write: Write, sheet: str) -> None:
    folder = write(sheet)
    link = folder.parent / "link"
    link.symlink_to(folder)
    method = read_method(link)
    assert method.folder == folder.resolve()
    assert names(method.indents, folder) == ["indents.csv"]


@pytest.mark.parametrize(("route", "idle"), [("indent", "flow_stress"), ("flow", "indents")])
def test_a_table_that_the_route_does_not_read_is_refused(
    refusals: Refusals, sheet: str, route: str, idle: str
) -> None:
    text = sheet.replace(INDENTS, f'{INDENTS}\nflow_stress = "flow_stress.csv"')
    (cause,) = refusals(text.replace('route = "indent"', f'route = "{route}"'))
    assert f"the route '{route}' does not read {idle}" in cause


def test_exclusions_are_one_file(refusals: Refusals, sheet: str) -> None:
    (cause,) = refusals(sheet.replace(INDENTS, f'{INDENTS}\nexclusions = ["exclusions.csv"]'))
    assert "is not text in quotes" in cause
    (cause,) = refusals(sheet.replace(INDENTS, f'{INDENTS}\nexclusions = "exclusion.csv"'))
    assert "nearest name there is 'exclusions.csv'" in cause
