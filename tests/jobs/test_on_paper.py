"""One coupon of the copper strip, worked on paper from its diagonals to joules per gram.

The arithmetic below is what a person with a slide rule writes down, line by line; it
borrows nothing from the package. The constants are those of the strip's batch.toml.
"""

import csv
from math import exp, log, pi, radians, sin, sqrt
from pathlib import Path
from typing import Final

import pytest

import coldwork

STRIP: Final = Path(__file__).parents[2] / "sample_data" / "copper-strip"
COUPON: Final = "CS20-1"


@pytest.fixture(scope="module")
def published() -> dict[str, float]:
    """The coupon's row of ``coupons.csv``, numbers only."""
    frame = coldwork.process(STRIP).frames["coupons"].set_index("coupon_id")
    row = frame.select_dtypes("number").loc[COUPON]
    return {str(name): float(x) for name, x in zip(row.index, row.to_numpy(), strict=True)}


def test_the_pairs_are_those_of_the_table() -> None:
    with (STRIP / "indents.csv").open(encoding="utf-8", newline="") as file:
        rows = [row for row in csv.DictReader(file) if row["coupon_id"] == COUPON]
    assert [(float(row["d1_um"]), float(row["d2_um"])) for row in rows] == PAIRS
    assert {row["force_n"] for row in rows} == {"98.07"}
    assert {row["tester"] for row in rows} == {"T1"}


PAIRS: Final = [
    (438.9, 437.4),
    (432.7, 434.6),
    (437.8, 436.6),
    (434.5, 437.1),
    (437.1, 433.6),
    (437.6, 437.2),
    (436.5, 435.0),
]  # um


def test_one_coupon_on_paper(published: dict[str, float]) -> None:
    # 1. Each pair to its mean [mm], the mean to a hardness number (ISO 6507-1 in kgf).
    means = [(d1 + d2) / 2.0 / 1000.0 for d1, d2 in PAIRS]
    numbers = [2.0 * sin(radians(136.0 / 2.0)) * 98.07 / 9.80665 / d**2 for d in means]
    # The tester reads 0.4 % too high on its reference block.
    numbers = [hv / 1.004 for hv in numbers]
    hv = sum(numbers) / 7.0
    # 2. Over the contact area, in MPa; a third of it is the flow stress (Tabor 1951).
    pressure = hv * 9.80665
    indented = pressure / 3.0
    # 4. Less the baseline.
    excess = indented - 50.0
    # 6. Without what the indent's own 8 % added (Voce 1948).
    x = 1700.0 * 0.08 / 320.0
    dislocation = 320.0 - (320.0 - excess) * exp(x)
    flow = dislocation + 50.0
    # 5. Taylor 1934: M alpha G b = 3.06 x 0.30 x 44 GPa x 0.2556 nm.
    slope = 3.06 * 0.30 * 44.0e9 * 0.2556e-9
    density = (dislocation * 1.0e6 / slope) ** 2
    spacing = 1.0e9 / sqrt(density)
    # 7. Half screws (K = G), half edges (K = G / (1 - nu)), from r0 = b to R = 1 / sqrt(rho).
    factor = 0.5 * 44.0e9 + 0.5 * 44.0e9 / (1.0 - 0.343)
    line = factor * 0.2556e-9**2 / (4.0 * pi) * log(spacing / 0.2556)
    # 8. Per volume, per mole (63.546 g), per gram (8960 kg/m3), as a temperature (385 J/(kg K)).
    volume = density * line
    mole = volume * 0.063546 / 8960.0
    gram = volume / 8960.0 / 1000.0
    kelvin = volume / (8960.0 * 385.0)
    # 9. Over the work of rolling by 20 %, 51.87 MJ/m3.
    fraction = volume / 51.87e6

    paper = {
        "hardness": hv,
        "flow_stress_mpa": flow,
        "baseline_stress_mpa": 50.0,
        "dislocation_stress_mpa": dislocation,
        "dislocation_density_per_m2": density,
        "mean_spacing_nm": spacing,
        "line_energy_j_per_m": line,
        "stored_energy_j_per_m3": volume,
        "stored_energy_j_per_mol": mole,
        "stored_energy_j_per_g": gram,
        "temperature_rise_k": kelvin,
        "stored_fraction_of_work": fraction,
    }
    for name, value in paper.items():
        assert published[name] == pytest.approx(value, rel=1e-12, abs=0.0), name
        assert f"{published[name]:.10g}" == f"{value:.10g}", name
    assert published["test_strain"] == 0.0
    assert published["readings_used"] == 7
    # and the order of size that a metallurgist expects of copper rolled by 20 %
    assert 4e14 < density < 7e14
    assert 0.05 < gram < 0.15


def test_its_uncertainty_on_paper(published: dict[str, float]) -> None:
    """JCGM 100, 5.1.2, with slopes from calculus and the pooled scatter of five coupons."""
    with (STRIP / "coupons.csv").open(encoding="utf-8", newline="") as file:
        mates = [r["coupon_id"] for r in csv.DictReader(file) if r["condition"] == "rolled 20 %"]
    with (STRIP / "indents.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    squares = []
    for mate in mates:
        pairs = [(float(r["d1_um"]), float(r["d2_um"])) for r in rows if r["coupon_id"] == mate]
        per_square = [1.0 / (d1 + d2) ** 2 for d1, d2 in pairs]  # hardness but for a factor
        middle = sum(per_square) / 7.0
        squares.append(sum((h / middle - 1.0) ** 2 for h in per_square) / 6.0)
    pooled = sqrt(sum(squares) / len(squares))  # equal n, so the plain mean of variances

    hv = published["hardness"]
    u_own = pooled * hv / sqrt(7.0)
    u_tester = hv * 0.008 / 1.004
    assert published["u_own_hardness"] == pytest.approx(u_own, rel=1e-11)
    assert published["u_hardness"] == pytest.approx(sqrt(u_own**2 + u_tester**2), rel=1e-11)

    grow = exp(1700.0 * 0.08 / 320.0)
    per_number = grow * 9.80665 / 3.0  # MPa of dislocation stress per unit of HV
    excess = hv * 9.80665 / 3.0 - 50.0
    parts = {
        "tester": per_number * u_tester,
        "baseline": grow * 15.0,
        "constraint": grow * hv * 9.80665 / 3.0**2 * 0.15,
        "strain": grow * 1700.0 * (1.0 - excess / 320.0) * 0.005,
    }
    shared = sqrt(sum(part**2 for part in parts.values()))
    s = published["dislocation_stress_mpa"]
    assert published["u_own_dislocation_stress_mpa"] == pytest.approx(per_number * u_own, rel=1e-11)
    assert published["u_shared_dislocation_stress_mpa"] == pytest.approx(shared, rel=1e-11)

    # Logarithmic slopes of the energy: 2 - 1/L for the stress, and so on (closed forms).
    log_ratio = log(published["mean_spacing_nm"] / 0.2556)
    steep = 2.0 - 1.0 / log_ratio
    nu = 0.343
    relative = [
        steep * shared / s,
        steep * 0.15 / 3.06,
        steep * log(1.2),
        (1.0 - 1.0 / log_ratio) * 2.5 / 44.0,
        log(1.5) / log_ratio,
        log(1.6) / log_ratio,
        (1.0 / (1.0 - nu) - 1.0 / (2.0 - nu)) * 0.01,
        20.0 / 8960.0,
    ]
    u = published["stored_energy_j_per_g"] * sqrt(sum(part**2 for part in relative))
    assert published["u_shared_stored_energy_j_per_g"] == pytest.approx(u, rel=1e-11)
