"""Planted faults, second batch: indents that were made badly, and testers out of order."""

from typing import Final

from scenario.planting import HBW, HK1, HV5, HV10, HV_LIGHT, Batch, Kind, five

__all__ = ["batch"]

_FILE: Final = "indents.csv"
_CONDITION: Final = "rolled 30 %"
_NUMBER: Final = 100.0

_SHEET: Final = """\
# Planted faults 2 (see ../FAULTS.csv): indents too near to an edge, to another one or to the
# back of the coupon, indents of mixed scales and forces, readings that stand out, testers
# that nobody knows any more. Each coupon has one fault, the first one has none.

[batch]
id = "PF-2"
builds_on = "../house.toml"

[files]
coupons = "coupons.csv"
indents = "indents.csv"

[strength]
route = "indent"
baseline_mpa = { value = 50.0, u = 15.0 }

[indentation]                        # for HV; there is no [indentation.HK] on purpose
initial_hardening_mpa = 1700.0
saturation_stress_mpa = 320.0
resolution_um = 0.1

[[testers]]
id = "T1"
bias_rel = 0.004
u_rel = 0.008
valid_until = 2027-03-31

[[testers]]
id = "T0"
bias_rel = -0.006
u_rel = 0.010
valid_until = 2026-06-30
"""


def batch() -> Batch:
    """Make the batch."""
    made = Batch("indents", _SHEET, (_FILE,))
    _plain(made, "PF2-01")
    _places(made)
    _conditions_of_test(made)
    _readings(made)
    _mixtures(made)
    _counts(made)
    _testers(made)
    return made


def _plain(
    made: Batch,
    name: str,
    changes: dict[int, dict[str, str]] | None = None,
    cells: dict[str, str] | None = None,
) -> None:
    """Add a coupon of five HV10 indents with changed cells."""
    made.coupon(name, _CONDITION, cells)
    made.indents(name, HV10, five(_NUMBER, turn=int(name[-2:])), changes)


def _places(made: Batch) -> None:
    _plain(made, "PF2-02", {2: {"edge_mm": "0.60"}})
    made.fault("edge-distance", "PF2-02", 2, "0.60 mm from the edge, 1.4 diagonals")
    _plain(made, "PF2-03", {4: {"x_mm": "13.90"}})
    made.fault("centre-distance", "PF2-03", 3, "0.90 mm from indent 4, 2.1 diagonals")
    made.fault("centre-distance", "PF2-03", 4, "0.90 mm from indent 3, 2.1 diagonals")
    _plain(made, "PF2-04", cells={"thickness_mm": "0.50"})
    made.fault("thin-coupon", "PF2-04", None, "0.50 mm thick, 1.2 diagonals")


def _conditions_of_test(made: Batch) -> None:
    worn = Kind("HV", "96.90")
    _plain(made, "PF2-05", {1: worn.cells(_NUMBER)})
    made.fault("force-not-nominal", "PF2-05", 1, "96.90 N where HV10 has 98.07 N")
    _plain(made, "PF2-06", {5: {"temperature_c": "41.0"}, 4: {"dwell_s": "30"}})
    made.fault("test-temperature", "PF2-06", 5, "41 degrees")
    made.fault("dwell-time", "PF2-06", 4, "held for 30 s")


def _readings(made: Batch) -> None:
    _plain(made, "PF2-07", {3: HV10.cells(_NUMBER, askew=0.04)})
    made.fault("unequal-diagonals", "PF2-07", 3, "diagonals 8 % apart")
    _plain(made, "PF2-08", {2: HV10.cells(_NUMBER) | {"hardness": "110"}})
    made.fault("hardness-contradicts-diagonals", "PF2-08", 2, "110 written, 100 by the diagonals")
    made.coupon("PF2-09", _CONDITION)
    made.indents("PF2-09", HV10, [*five(_NUMBER, spread=0.3), _NUMBER * 1.003, _NUMBER * 1.03])
    made.fault("outlying-reading", "PF2-09", 7, "six readings within 0.7 %, the seventh 3 % above")
    made.coupon("PF2-10", _CONDITION)
    made.indents("PF2-10", HV10, five(_NUMBER, spread=5.0))
    made.fault("scatter", "PF2-10", None, "scatters five times as much as its neighbours")
    made.coupon("PF2-11", _CONDITION)
    made.indents("PF2-11", HV_LIGHT, five(_NUMBER))
    for no in range(1, 6):
        made.fault("small-diagonal", "PF2-11", no, "HV0.01, diagonals of 13.6 um")


def _mixtures(made: Batch) -> None:
    numbers = five(_NUMBER)
    made.coupon("PF2-12", _CONDITION)
    made.indents("PF2-12", HV10, numbers[:3])
    made.indents("PF2-12", HV5, numbers[3:])
    made.fault("mixed-forces", "PF2-12", None, "three indents HV10, two HV5")
    made.coupon("PF2-13", _CONDITION)
    made.indents("PF2-13", HV10, numbers[:3])
    made.indents("PF2-13", HBW, numbers[2:])
    made.fault("mixed-scales", "PF2-13", None, "three indents HV10, three HBW 2.5/62.5")
    made.coupon("PF2-14", _CONDITION)
    made.indents("PF2-14", HK1, five(_NUMBER, turn=1))
    made.fault("scale-without-constants", "PF2-14", None, "HK1, and no [indentation.HK]")


def _counts(made: Batch) -> None:
    made.coupon("PF2-15", _CONDITION)
    made.fault("no-readings", "PF2-15", None, "listed, and never indented")
    made.coupon("PF2-16", _CONDITION)
    made.indents("PF2-16", HV10, [_NUMBER * 0.994, _NUMBER * 1.006])
    made.fault("few-readings", "PF2-16", None, "two readings")


def _testers(made: Batch) -> None:
    _plain(made, "PF2-17", {3: {"tester": "T9"}})
    made.fault("tester-unknown", "PF2-17", 3, "made on T9, which the sheet does not list")
    _plain(made, "PF2-18", {4: {"tester": "T0"}})
    made.fault("tester-out-of-date", "PF2-18", 4, "made a month after T0's calibration ran out")
