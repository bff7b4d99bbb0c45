"""What a rule is, and what a reason for setting a reading aside is."""

from dataclasses import dataclass
from enum import StrEnum
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

__all__ = ["Fired", "Level", "Reason", "Rule"]

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

Fired: TypeAlias = tuple[BoolArray, FloatArray]
"""Where a rule fires, and the value to report there in the rule's unit."""


class Level(StrEnum):
    """How grave a finding is; an error empties quantities."""

    ERROR = "error"
    WARNING = "warning"
    INFORMATION = "information"


@dataclass(frozen=True)
class Rule:
    """One rule of quality control. It fires where its statement is true.

    Attributes
    ----------
    id : str
        Name of the rule in every table.
    level : Level
        How grave it is.
    statement : str
        What has been found where it fires, as a sentence without a stop.
    limit : float or None
        The limit; the lower one of two where `upper` is given. [`unit`]
    unit : str or None
        UCUM unit of `limit` and of the value that a finding reports; None where no
        number belongs to the rule.
    source : str
        Standard and clause, paper, ``common practice`` or ``from memory``.
    reason : str
        Why it matters, in one sentence.
    empties : tuple of str
        Columns of out/coupons that an error empties. With one of the eight
        quantities that carry uncertainties go its ``u_`` columns too.
    upper : float or None
        The upper limit of a range. [`unit`]
    ends_stay : bool
        Only the values go: ``lower_`` and ``upper_`` of the emptied quantities
        remain what the uncertainty allows, and may still settle a decision.
    """

    id: str
    level: Level
    statement: str
    limit: float | None
    unit: str | None
    source: str
    reason: str
    empties: tuple[str, ...] = ()
    upper: float | None = None
    ends_stay: bool = False

    def above(self, value: FloatArray) -> BoolArray:
        """Say where a value is above the limit; NaN [`unit`] never is."""
        return np.asarray(value > (np.inf if self.limit is None else self.limit))

    def below(self, value: FloatArray) -> BoolArray:
        """Say where a value is below the limit; NaN [`unit`] never is."""
        return np.asarray(value < (-np.inf if self.limit is None else self.limit))

    def outside(self, value: FloatArray) -> BoolArray:
        """Say where a value is below `limit` or above `upper`; NaN [`unit`] never is."""
        above = np.asarray(value > (np.inf if self.upper is None else self.upper))
        return self.below(value) | above


@dataclass(frozen=True)
class Reason:
    """Why a reading could not be used.

    Attributes
    ----------
    id : str
        Name of the reason, the column `rule` of out/set_aside.
    statement : str
        What has been found, as a sentence without a stop.
    hint : str
        What to do about it, where the cell itself suggests nothing better.
    source : str
        Where the rule comes from.
    """

    id: str
    statement: str
    hint: str
    source: str
