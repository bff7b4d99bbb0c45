"""README and DEVELOPERS say what is so: commands, codes, tables, links, and real output.

Every console block of the README is run again, in order, and must print what stands there;
``...`` stands for what was left out. A folder of its own keeps the repository clean.
"""

import doctest
import re
import shlex
import subprocess
import tomllib
from pathlib import Path
from typing import Final

import pytest
import typer.main
from typer.testing import CliRunner

import coldwork
from coldwork import contracts
from coldwork.cli import app
from coldwork.errors import Exit, UsageError

ROOT: Final = Path(__file__).parents[1]
PACKAGE: Final = Path(coldwork.__file__).parent
README: Final = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS: Final = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
BLOCKS: Final = re.findall(r"^```(\w*)\n(.*?)^```$", README, re.DOTALL | re.MULTILINE)
COMMANDS: Final = sorted(typer.main.get_command(app).commands)  # type: ignore[attr-defined]
PROGRESS: Final = re.compile(r"^[\w-]+: (reading|computing.*|drawing|writing)\n", re.MULTILINE)
LARGEST_PICTURE: Final = 150_000  # bytes


def links(text: str) -> list[str]:
    found = re.findall(r"\]\(([^)\s]+)\)", text)
    return [link for link in found if not link.startswith(("https:", "http:"))]


def anchors(text: str) -> set[str]:
    """Give the anchors of the headings, as they are commonly made from them."""
    outside = re.sub(r"^```.*?^```$", "", text, flags=re.DOTALL | re.MULTILINE)
    headings = re.findall(r"^#+ (.+)$", outside, re.MULTILINE)
    return {re.sub(r"[^\w\- ]", "", h.lower()).replace(" ", "-") for h in headings}


def test_the_first_two_blocks_are_one_line_of_shell_each() -> None:
    assert [kind for kind, _ in BLOCKS[:2]] == ["sh", "sh"]
    assert [len(body.splitlines()) for _, body in BLOCKS[:2]] == [1, 1]
    assert "sh" not in {kind for kind, _ in BLOCKS[2:]}


def test_the_first_block_does_the_job_and_the_second_the_tests() -> None:
    job, tests = (body for _, body in BLOCKS[:2])
    batches = re.findall(r"sample_data/[\w-]+", job)
    assert batches
    assert all((ROOT / batch / "batch.toml").is_file() for batch in batches)
    assert "--into results" in job
    assert "--group test" in tests
    assert "pytest" in tests
    for line in (job, tests):  # an old pip knows no groups, and neither line may lean on one
        assert line.index("install -q --upgrade pip") < line.index("install -q .")


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_is_in_the_readme_and_has_help(name: str) -> None:
    assert f"coldwork {name}" in README
    found = CliRunner().invoke(app, [name, "--help"])
    assert found.exit_code == Exit.DONE
    command = typer.main.get_command(app).commands[name]  # type: ignore[attr-defined]
    assert command.help
    assert all(p.help for p in command.params if p.name != "help"), name


def test_no_command_of_the_documents_is_unknown() -> None:
    named = re.findall(r"(?:^\$ |`)coldwork ([a-z]+)", README + DEVELOPERS, re.MULTILINE)
    assert set(named) <= set(COMMANDS)


def test_every_exit_code_is_in_the_readme() -> None:
    section = README.split("\n## Exit codes\n")[1].split("\n## ")[0]
    told = {int(code) for code in re.findall(r"^\| (\d+) \|", section, re.MULTILINE)}
    assert told == {int(code) for code in Exit}


@pytest.mark.parametrize("name", contracts.names())
def test_every_table_is_in_the_readme(name: str) -> None:
    section = README.split("\n## The tables\n")[1].split("\n## ")[0]
    comes_in, goes_out = section.split("\n| goes out |")
    direction, _, table = name.partition("/")
    here = comes_in if direction == "in" else goes_out
    assert re.search(rf"^\| `{table}\.(csv|parquet)` \|", here, re.MULTILINE)


@pytest.mark.parametrize(("name", "text"), [("README.md", README), ("DEVELOPERS.md", DEVELOPERS)])
def test_links_lead_somewhere(name: str, text: str) -> None:
    assert links(text), name
    for link in links(text):
        path, _, anchor = link.partition("#")
        if path:
            inside = path.removeprefix("pipeline/coldwork/")  # where the package was installed
            there = ROOT / path if inside == path else PACKAGE / inside
            assert there.exists(), f"{name} links to {link}"
        elif anchor:
            assert anchor in anchors(text), f"{name} links to #{anchor}"


def test_pictures_are_there_and_small() -> None:
    pictures = re.findall(r"!\[[^\]]+\]\(([^)]+\.png)\)", README)
    assert pictures
    for picture in pictures:
        data = (ROOT / picture).read_bytes()
        assert data.startswith(b"\x89PNG\r\n")
        assert len(data) < LARGEST_PICTURE, picture
    there = {f"sample_data/pictures/{p.name}" for p in (ROOT / "sample_data/pictures").iterdir()}
    assert there == set(pictures)


def test_every_room_is_in_developers() -> None:
    rooms = {
        path.stem
        for path in PACKAGE.iterdir()
        if (path.suffix == ".py" and not path.stem.startswith("_"))
        or (path / "__init__.py").is_file()
    }
    assert {room for room in rooms if f"`{room}" not in DEVELOPERS} == set()


def test_the_version_has_an_entry_in_the_changelog() -> None:
    assert f"\n### {coldwork.__version__}\n" in DEVELOPERS.split("\n## CHANGELOG\n")[1]


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    (tmp_path / "sample_data").symlink_to(ROOT / "sample_data")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_consoles_print_what_the_readme_says(folder: Path) -> None:
    code = 0
    checker = doctest.OutputChecker()
    for _, body in (block for block in BLOCKS if block[0] == "console"):
        for part in re.split(r"^\$ ", body, flags=re.MULTILINE)[1:]:
            line, _, wanted = part.partition("\n")
            got, code = ran(line, folder, code)
            told = f"$ {line}\nwanted:\n{wanted}\ngot:\n{got}"
            assert checker.check_output(wanted, got, doctest.ELLIPSIS), told


def ran(line: str, folder: Path, last: int) -> tuple[str, int]:
    """Run a line of a console: ours in this process, others by the shell."""
    words = shlex.split(line)
    if words == ["echo", "$?"]:
        return f"{last}\n", 0
    if words[0] == "coldwork":
        found = CliRunner().invoke(app, words[1:])
        return PROGRESS.sub("", found.output), found.exit_code
    done = subprocess.run(words, cwd=folder, capture_output=True, text=True, check=False)
    return done.stdout, done.returncode


def test_python_prints_what_the_readme_says(folder: Path) -> None:
    (body,) = (body for kind, body in BLOCKS if kind == "python")
    test = doctest.DocTestParser().get_doctest(body, {}, "README", str(folder), 0)
    runner = doctest.DocTestRunner(verbose=False)
    out: list[str] = []
    runner.run(test, out=out.append)
    assert len(test.examples) > 3
    assert not out, "".join(out)


def test_the_sheet_and_the_layout_of_the_readme_are_those_of_the_samples() -> None:
    shown = [tomllib.loads(body) for kind, body in BLOCKS if kind == "toml"]
    samples = (
        "copper-strip/batch.toml",
        "copper-benches/layouts/bench-1.toml",
        "copper-tension/batch.toml",
        "copper-strip/furnace.toml",
    )
    for some, sample in zip(shown, samples, strict=True):
        whole = tomllib.loads((ROOT / "sample_data" / sample).read_text(encoding="utf-8"))
        for section, keys in some.items():
            if isinstance(keys, list):
                assert keys == whole[section], section
            else:
                assert keys.items() <= whole[section].items(), section


def test_what_is_said_not_to_be_built_is_refused_by_name() -> None:
    (told,) = re.findall(r"^- Choices that are not built yet.*?(?=^- |^$)", README, re.M | re.S)
    choices = re.findall(r"`([a-z_.]+ = [^`]+)`", told)
    assert choices
    baseline = "strength.baseline_mpa = 50.0"
    for choice in choices:
        with pytest.raises(UsageError, match="not built yet"):
            coldwork.estimate("copper", stress_mpa=200.0, settings=[baseline, choice])
