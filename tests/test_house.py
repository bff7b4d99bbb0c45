"""The house: imports run one way, names are exported, nothing stands where it should not."""

import ast
import importlib
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Final

import pytest

import coldwork

PACKAGE: Final = Path(coldwork.__file__).parent
ROOMS: Final = (  # from the ground up: a room imports those before it, never those after it
    "errors",
    "guards",
    "units",
    "contracts",
    "formulas",
    "statistics",
    "measured",
    "materials",
    "inputs",
    "rules",
    "intake",
    "reduce",
    "scatter",
    "chain",
    "interval",
    "sampling",
    "judge",
    "results",
    "plots",
    "jobs",
    "cli",
)
MODULES: Final = sorted(PACKAGE.rglob("*.py"))


def names(paths: list[Path]) -> list[str]:
    return [str(path.relative_to(PACKAGE)) for path in paths]


def room_of(path: Path) -> str:
    first = path.relative_to(PACKAGE).parts[0]
    return first.removesuffix(".py")


def imported(path: Path) -> Iterator[tuple[int, str]]:
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"relative import in {path}"
            yield node.lineno, f"{node.module}"
            if node.module == "coldwork":
                yield from ((node.lineno, f"coldwork.{alias.name}") for alias in node.names)


def test_every_room_is_in_the_list() -> None:
    rooms = {room_of(path) for path in MODULES} - {"__init__", "__main__"}
    assert rooms == set(ROOMS)


@pytest.mark.parametrize("path", MODULES, ids=names(MODULES))
def test_imports_run_one_way(path: Path) -> None:
    room = room_of(path)
    if room in {"__init__", "__main__"}:
        return
    for line, module in imported(path):
        parts = module.split(".")
        if parts[0] == "coldwork" and len(parts) > 1:
            assert ROOMS.index(parts[1]) <= ROOMS.index(room), f"{path}:{line} imports {module}"


@pytest.mark.parametrize("path", MODULES, ids=names(MODULES))
def test_exported_names_exist(path: Path) -> None:
    parts = ("coldwork", *path.relative_to(PACKAGE).with_suffix("").parts)
    module = importlib.import_module(".".join(p for p in parts if p != "__init__"))
    for name in getattr(module, "__all__", ()):
        assert hasattr(module, name), name


def test_importing_the_package_leaves_the_scientific_stack_alone() -> None:
    code = (
        "import sys, coldwork, coldwork.cli; "
        "print(sorted({'numpy', 'pandas', 'pandera', 'pyarrow', 'scipy', 'matplotlib'}"
        " & set(sys.modules)))"
    )
    path = str(PACKAGE.parent)
    found = subprocess.run(
        [sys.executable, "-c", code],
        env={"PYTHONPATH": path, "PATH": ""},
        capture_output=True,
        text=True,
        check=True,
    )
    assert found.stdout.strip() == "[]"
