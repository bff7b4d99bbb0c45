"""What the isotropic line energy costs: each metal of the library against its crystal.

Prints the Markdown table of the README's page on physics. The energy factor K of the crystal's
sextic problem, averaged over the mix and both senses of turn, is set beside the isotropic one,
G (1 - nu <cos^2>) / (1 - nu), with G and nu of two kinds: Hill's means of the same elastic
constants, and those that the library holds for the polycrystal. At a given density the stored
energy, rho K b^2 / (4 pi) ln(R / r0) with R = 1 / sqrt(rho) and r0 = b, moves by the same per cent.

    python tests/benchmarks/isotropic_simplification.py
"""

from dataclasses import dataclass
from math import pi, sqrt
from typing import Final

import numpy as np
from numpy.typing import NDArray

from coldwork import materials
from coldwork.formulas.anisotropic_line import UNIFORM_ANGLES, mean_energy_factor
from coldwork.formulas.crystals import cubic_stiffness, hexagonal_stiffness, hill_shear_modulus
from coldwork.formulas.line_energy import energy_factor, line_energy
from coldwork.formulas.slip_systems import slip_system
from coldwork.formulas.stored_energy import stored_energy
from coldwork.materials import Material
from coldwork.materials.entry import CRYSTAL

DENSITY: Final = 1e14  # m^-2
HALF: Final = ((0.0, pi / 2), (0.5, 0.5))  # screw and edge, half and half
UNIFORM: Final = (tuple(UNIFORM_ANGLES), (1.0 / len(UNIFORM_ANGLES),) * len(UNIFORM_ANGLES))
MEAN_COS2: Final = 0.5  # of either mix
HEAD: Final = (
    "| metal | slip system | screw and edge: K, GPa | Hill, % | library, % "
    "| uniform: K, GPa | Hill, % | library, % | stored, kJ/m³ | isotropic, kJ/m³ |\n"
    "|---|---|---|---|---|---|---|---|---|---|"
)


@dataclass(frozen=True)
class Row:
    """A metal: K of crystal, Hill's isotropic metal and the library's, and energies.

    `half` and `uniform` are means of the crystal's K over the two mixes. [Pa]; `energies`
    are of the crystal (screw and edge) and of the library's isotropic metal. [J/m3]
    """

    name: str
    slip: str
    half: float
    uniform: float
    hill: float
    library: float
    energies: tuple[float, float]

    def shift(self, isotropic: float, crystal: float) -> float:
        """Say by how many per cent the isotropic factor lies above the crystal's."""
        return 100.0 * (isotropic / crystal - 1.0)


def stiffness_of(metal: Material) -> NDArray[np.float64] | None:
    """Give the crystal's stiffness [Pa], None where the library has no elastic constants."""
    keys = CRYSTAL[metal.lattice]
    if not all(key in metal.values for key in keys):
        return None
    constants = [metal.values[key].value * 1e9 for key in keys]
    return (hexagonal_stiffness if metal.lattice == "hcp" else cubic_stiffness)(*constants)


def hill_poisson_ratio(stiffness: NDArray[np.float64]) -> float:
    """Poisson's ratio from Hill's shear and bulk moduli; bulk: Hill 1952, as for shear."""
    shear = float(hill_shear_modulus(stiffness))
    voigt = float(stiffness[:3, :3].sum()) / 9.0
    reuss = 1.0 / float(np.linalg.inv(stiffness)[:3, :3].sum())
    bulk = (voigt + reuss) / 2.0
    return (3.0 * bulk - 2.0 * shear) / (6.0 * bulk + 2.0 * shear)


def row(name: str) -> Row | None:
    """Work out a metal's row, None where the library has no elastic constants."""
    metal = materials.load(name)
    stiffness = stiffness_of(metal)
    if stiffness is None:
        return None
    axes = metal.values.get("c_over_a")
    slip = slip_system(
        metal.slip_system,
        hexagonal=metal.lattice == "hcp",
        c_over_a=axes.value if axes is not None else None,
    )
    half, uniform = (
        float(mean_energy_factor(stiffness, slip.burgers, slip.normal, *mix)[0])
        for mix in (HALF, UNIFORM)
    )
    shear, ratio = (metal.values[key].value for key in ("shear_modulus_gpa", "poisson_ratio"))
    library = float(energy_factor(shear * 1e9, ratio, MEAN_COS2))
    hill = float(
        energy_factor(hill_shear_modulus(stiffness), hill_poisson_ratio(stiffness), MEAN_COS2)
    )
    burgers = metal.values["burgers_vector_nm"].value * 1e-9
    energies = tuple(
        float(stored_energy(DENSITY, line_energy(k, burgers, 1 / sqrt(DENSITY), burgers, 1.0, 0.0)))
        for k in (half, library)
    )
    return Row(name, metal.slip_system, half, uniform, hill, library, (energies[0], energies[1]))


def rows() -> list[Row]:
    """Work out the rows of all metals with elastic constants."""
    return [found for found in map(row, materials.names()) if found is not None]


def table() -> str:
    """Write the table in Markdown."""
    lines = [HEAD]
    for each in rows():
        cells = [
            each.name,
            f"`{each.slip}`",
            f"{each.half / 1e9:.1f}",
            f"{each.shift(each.hill, each.half):+.1f}",
            f"{each.shift(each.library, each.half):+.1f}",
            f"{each.uniform / 1e9:.1f}",
            f"{each.shift(each.hill, each.uniform):+.1f}",
            f"{each.shift(each.library, each.uniform):+.1f}",
            *(f"{energy / 1e3:.1f}" for energy in each.energies),
        ]
        lines.append(f"| {' | '.join(cells)} |")
    return "\n".join(lines)


if __name__ == "__main__":
    print(table())
