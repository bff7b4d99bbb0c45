"""Probabilities of several comparisons at once, corrected for their number."""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coldwork.errors import InvalidArgument
from coldwork.guards import finite

__all__ = ["CORRECTIONS", "corrected"]

CORRECTIONS: Final = ("holm", "bonferroni", "none")


def corrected(probabilities: ArrayLike, correction: str) -> NDArray[np.float64]:
    r"""Correct the probabilities of several comparisons for how many they are.

    .. math::
        p'_i = \min(1, m p_i) \text{ (Bonferroni)}, \qquad
        p'_{(i)} = \max_{j \le i} \min(1, (m - j + 1)\, p_{(j)}) \text{ (Holm)}

    Parameters
    ----------
    probabilities : array_like, shape (m,)
        Of each comparison where there is no difference. [1]
    correction : str
        ``holm``, ``bonferroni`` or ``none``.

    Returns
    -------
    ndarray of float64, shape (m,)
        In the order given. [1]

    Raises
    ------
    InvalidArgument
        If a probability is not between 0 and 1, or there is no such correction.

    References
    ----------
    Holm, Scand. J. Statist. 6 (1979) 65; both keep the chance of a single false finding among
    all below the level, Holm's with fewer true ones missed.
    """
    if correction not in CORRECTIONS:
        message = f"no correction is called {correction!r}; there are {', '.join(CORRECTIONS)}"
        raise InvalidArgument(message)
    p = finite("probabilities", probabilities)
    if not ((p >= 0.0) & (p <= 1.0)).all():
        message = f"probabilities must be from 0 to 1 (found {p[~((p >= 0) & (p <= 1))][0]:g})"
        raise InvalidArgument(message)
    m = p.size
    if correction == "none":
        return p
    if correction == "bonferroni":
        return np.asarray(np.minimum(1.0, m * p))
    order = np.argsort(p, kind="stable")
    stepped = np.minimum(1.0, np.maximum.accumulate((m - np.arange(m)) * p[order]))
    found = np.empty(m)
    found[order] = stepped
    return found
