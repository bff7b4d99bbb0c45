"""Constants of physics, exact since 2019.

References
----------
.. [1] BIPM, The International System of Units, 9th edition 2019, table 1 (k and N_A).
"""

from typing import Final

__all__ = ["AVOGADRO_CONSTANT", "BOLTZMANN_CONSTANT", "GAS_CONSTANT"]

BOLTZMANN_CONSTANT: Final = 1.380649e-23  # [J/K]
AVOGADRO_CONSTANT: Final = 6.02214076e23  # [1/mol]
GAS_CONSTANT: Final = BOLTZMANN_CONSTANT * AVOGADRO_CONSTANT  # 8.314462618 [J/(mol.K)]
