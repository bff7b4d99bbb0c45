"""Which columns of out/coupons hang on which: what an error upstream empties.

The chain runs hardness -> flow stress -> dislocation stress -> density -> line
energy -> stored energy; a tuple here is everything from one link on.
"""

from typing import Final

__all__ = ["BASELINE_ON", "DENSITY_ON", "ENERGY_ON", "EVERYTHING", "FRACTION_ON", "STRENGTH_ON"]

FRACTION_ON: Final = (
    "stored_energy_j_per_m3",
    "stored_energy_j_per_mol",
    "stored_energy_j_per_g",
    "temperature_rise_k",
    "stored_fraction_of_work",
)
"""The stored energies and what is made of them."""

ENERGY_ON: Final = ("line_energy_j_per_m", *FRACTION_ON)
"""Everything from the line energy on."""

DENSITY_ON: Final = ("dislocation_density_per_m2", "mean_spacing_nm", *ENERGY_ON)
"""Everything from the density on."""

BASELINE_ON: Final = ("baseline_stress_mpa", "dislocation_stress_mpa", *DENSITY_ON)
"""Everything from the baseline on; the flow stress stays."""

STRENGTH_ON: Final = ("test_strain", "flow_stress_mpa", "dislocation_stress_mpa", *DENSITY_ON)
"""Everything from the strength on; the baseline does not hang on the reading."""

EVERYTHING: Final = ("hardness", "hardness_scale", *STRENGTH_ON, "baseline_stress_mpa")
"""All that a coupon without a usable reading cannot have."""
