"""The table *copper-calibration*: densities of the strip by another route, and flow stresses.

Twelve strips of the coils were pulled at room temperature, and the line density of each was
counted in thin foils. Counting is the coarser of the two by far.
"""

from math import sqrt
from typing import Final

import numpy as np

from scenario.copper_strip import COPPER
from scenario.tables import Table, normals

__all__ = ["files"]

FOLDER: Final = "copper-calibration"
SEED: Final = 2026_08_03
DENSITIES: Final = (
    *(1.2e13, 2.5e13, 4.5e13, 8e13, 1.2e14, 1.9e14),
    *(2.7e14, 3.6e14, 4.8e14, 6.2e14, 7.7e14, 9.5e14),
)  # truth [1/m^2]
COUNTING: Final = 0.10  # relative standard deviation of a count
PULLING: Final = 0.012  # and of a flow stress


def files() -> dict[str, str]:
    """Make the table: path and content."""
    draws = normals(np.random.PCG64(SEED), 2 * len(DENSITIES)).reshape(2, -1)
    table = Table(
        (
            "coupon_id",
            "dislocation_density_per_m2",
            "u_dislocation_density_per_m2",
            "flow_stress_mpa",
            "u_flow_stress_mpa",
        )
    )
    for i, density in enumerate(DENSITIES):
        stress = (COPPER.baseline + COPPER.stress(density)) / 1e6
        counted = density * (1.0 + COUNTING * float(draws[0, i]))
        pulled = stress * (1.0 + PULLING * float(draws[1, i]))
        table.add(
            {
                "coupon_id": f"TF{i + 1:02d}",
                "dislocation_density_per_m2": f"{counted:.3g}",
                "u_dislocation_density_per_m2": f"{COUNTING * sqrt(counted * density):.2g}",
                "flow_stress_mpa": f"{pulled:.1f}",
                "u_flow_stress_mpa": f"{PULLING * stress:.1f}",
            }
        )
    return {f"{FOLDER}/pairs.csv": table.text()}
