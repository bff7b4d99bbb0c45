"""The furnace of the strip mill: what it holds for *copper-strip*, and one of its schedules.

Constants and schedule are invented like everything else here. They have the size that
such constants of copper have, and come from no measurement.
"""

from typing import Final

__all__ = ["files"]

FOLDER: Final = "copper-strip"

_FURNACE: Final = """\
# The strip furnace, for copper of coils 417 and 418. Invented, like the strip.

[boundary]
energy_j_per_m2 = { value = 0.625, u = 0.1, source = "Murr 1975, from memory" }
curvature_radius_um = { value = 5.0, u = 1.0, source = "spacing of the widest subgrains" }

[particles]                          # oxides
fraction = { value = 0.005, u = 0.001 }
radius_nm = { value = 100.0, u = 10.0 }

[recovery]                           # from softening below 300 C
activation_energy_kj_per_mol = { value = 240.0, u = 5.0 }
activation_volume_nm3 = { value = 0.5, factor = 1.2 }
youngs_modulus_gpa = 110.0

[recrystallisation]                  # of strip rolled by 40 %
exponent = { value = 1.2, u = 0.1 }
prefactor_per_s = { value = 1e7, factor = 20.0 }
activation_energy_kj_per_mol = { value = 120.0, u = 14.0 }
correlation = 0.98                   # both come from one line

[holding]
temperature_c = 350.0
"""

_SCHEDULE: Final = """\
time_s,temperature_c
0,20
5400,320
12600,320
27000,40
"""


def files() -> dict[str, str]:
    """Make the furnace file and the schedule: path and content."""
    return {f"{FOLDER}/furnace.toml": _FURNACE, f"{FOLDER}/schedule.csv": _SCHEDULE}
