"""The energy factor of a crystal's character mix, as a formula of its elastic constants."""

from functools import lru_cache, partial
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.formulas.anisotropic_line import UNIFORM_ANGLES, mean_energy_factor
from coldwork.formulas.crystals import cubic_stiffness, hexagonal_stiffness
from coldwork.formulas.formula import Formula
from coldwork.formulas.slip_systems import SlipSystem

__all__ = ["CUBIC_CONSTANTS", "HEXAGONAL_CONSTANTS", "crystal_energy_factor"]

_Floats = NDArray[np.float64]

CUBIC_CONSTANTS: Final = ("c11", "c12", "c44")
HEXAGONAL_CONSTANTS: Final = ("c11", "c12", "c13", "c33", "c44")


@lru_cache(maxsize=64)
def crystal_energy_factor(
    slip: SlipSystem,
    angles: tuple[float, ...],
    fractions: tuple[float, ...],
    *,
    hexagonal: bool,
) -> Formula:
    """Make the formula that gives the mean K of a mix from elastic constants.

    Its arguments are `CUBIC_CONSTANTS` or `HEXAGONAL_CONSTANTS`, as keywords. [Pa] What it
    found for scalars is kept: a batch asks for the same constants over and over.

    Parameters
    ----------
    slip : SlipSystem
        Whose lines they are.
    angles : tuple of float
        Between line and Burgers vector, each for both senses of turn; empty for a mix
        of all angles alike. [rad]
    fractions : tuple of float
        Their shares of line length. [1]
    hexagonal : bool
        Which crystal.

    Returns
    -------
    Formula
        Mean of K. [Pa]
    """
    mix = (angles, fractions)
    if not angles:
        n = UNIFORM_ANGLES.size
        mix = (tuple(UNIFORM_ANGLES), (1.0 / n,) * n)
    names = HEXAGONAL_CONSTANTS if hexagonal else CUBIC_CONSTANTS
    kept = lru_cache(maxsize=64)(partial(_computed, slip, mix, hexagonal))

    def found(constants: dict[str, ArrayLike]) -> tuple[_Floats, _Floats]:
        given = [np.asarray(constants[name], dtype=np.float64) for name in names]
        if all(x.ndim == 0 for x in given):
            return kept(*(float(x) for x in given))
        return _computed(slip, mix, hexagonal, *given)

    def anisotropic_energy_factor(**constants: ArrayLike) -> _Floats:
        return found(constants)[0]

    def sensitivities(**constants: ArrayLike) -> dict[str, _Floats]:
        slopes = found(constants)[1]
        return {name: np.asarray(slopes[..., i]) for i, name in enumerate(names)}

    return Formula(anisotropic_energy_factor, sensitivities)


_Mix = tuple[tuple[float, ...], tuple[float, ...]]


def _computed(
    slip: SlipSystem, mix: _Mix, hexagonal: bool, *constants: ArrayLike
) -> tuple[_Floats, _Floats]:
    build = hexagonal_stiffness if hexagonal else cubic_stiffness
    return mean_energy_factor(
        build(*constants), slip.burgers, slip.normal, *mix, _changes(hexagonal=hexagonal)
    )


@lru_cache(maxsize=2)
def _changes(*, hexagonal: bool) -> _Floats:
    """Differentiate the stiffness by each constant: it is linear in them."""
    if hexagonal:
        base = np.array([4.0, 1.0, 1.0, 4.0, 1.0])
        whole = hexagonal_stiffness(*base)
        steps = [hexagonal_stiffness(*(base + step)) for step in np.eye(5)]
    else:
        base = np.array([4.0, 1.0, 1.0])
        whole = cubic_stiffness(*base)
        steps = [cubic_stiffness(*(base + step)) for step in np.eye(3)]
    return np.array(steps) - whole
