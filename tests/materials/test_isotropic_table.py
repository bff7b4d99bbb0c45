"""The table of what the isotropic simplification costs, against ratios printed elsewhere."""

import importlib.util
import sys
from pathlib import Path
from types import ModuleType
from typing import Final

import pytest

from coldwork.materials import load, names

SCRIPT: Final = Path(__file__).parents[1] / "benchmarks" / "isotropic_simplification.py"
# Mean of screw and edge over the isotropic one with Hill's G and nu, recomputed from constants
# of Hirth and Lothe 1982 by an integral (Barnett and Lothe 1973); only metals for which the
# library holds those constants. Iron: K of 63.71 and 119.57, G of 81.83 and nu of 0.2893.
PRINTED: Final = {
    "aluminium": 0.993,
    "copper": 0.971,
    "silver": 0.975,
    "nickel": 0.970,
    "tungsten": 0.999,
    "tantalum": 0.965,
    "niobium": 1.048,
    "chromium": 1.031,
    "alpha-iron": 0.931,
}


@pytest.fixture(scope="module")
def script() -> ModuleType:
    spec = importlib.util.spec_from_file_location("isotropic_simplification", SCRIPT)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # its dataclass looks itself up there
    spec.loader.exec_module(module)
    return module


@pytest.mark.parametrize(("name", "printed"), PRINTED.items())
def test_ratios_are_the_printed_ones(name: str, printed: float, script: ModuleType) -> None:
    row = script.row(name)
    assert row.half / row.hill == pytest.approx(printed, abs=0.00051)


def test_titanium_on_prisms(script: ModuleType) -> None:
    # K of 40.55 (screw) and 55.14 (edge, prismatic), G of 43.36 and nu of 0.3219, recomputed
    # from the same constants.
    row = script.row("titanium")
    assert row.half / 1e9 == pytest.approx((40.55 + 55.14) / 2, abs=0.012)
    assert row.hill / 1e9 == pytest.approx(43.36 * (1 + 1 / (1 - 0.3219)) / 2, abs=0.012)


def test_energy_moves_with_the_factor(script: ModuleType) -> None:
    row = script.row("copper")
    crystal, isotropic = row.energies
    assert isotropic / crystal == pytest.approx(row.library / row.half, rel=1e-12)
    # 1e14 per m2 of copper line: K b^2 / 4 pi ln(100 nm / b), by hand
    assert crystal == pytest.approx(1e14 * 58.06e9 * 0.2556e-9**2 / 12.566 * 5.969, rel=1e-3)


def test_the_table_has_a_row_for_every_crystal(script: ModuleType) -> None:
    lines = script.table().splitlines()
    listed = [line.split("|")[1].strip() for line in lines[2:]]
    assert listed == [name for name in names() if "c11_gpa" in load(name).values]
    assert len({line.count("|") for line in lines}) == 1
