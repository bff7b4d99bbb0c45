"""Cross-column checks that contracts name: each a sentence and a function.

A check sees the columns of one table through `Columns`, so that Arrow tables
and pandas frames are held to the very same code. It marks rows that fail;
cells that are absent (NaN, empty text) never fail by themselves.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Final, Protocol

import numpy as np
from numpy.typing import NDArray

__all__ = ["CHECKS", "Check", "Columns"]

_Bools = NDArray[np.bool_]
_ROUNDING: Final = 1e-9  # relative; what sums of squares may lose [1]


class Columns(Protocol):
    """The columns of one table, whatever holds them."""

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the columns that the table has."""
        ...

    @property
    def rows(self) -> int:
        """Number of rows."""
        ...

    def number(self, name: str) -> NDArray[np.float64]:
        """Give a column of numbers, shape (rows,); NaN where absent or no such column."""
        ...

    def text(self, name: str) -> NDArray[Any]:
        """Give a column of text, shape (rows,); "" where absent or no such column."""
        ...


@dataclass(frozen=True)
class Check:
    """One named check.

    Attributes
    ----------
    id : str
        Name by which contracts call it.
    statement : str
        What must hold, in a sentence.
    violations : callable
        From the columns to a mask of the rows that fail, shape (rows,); for a
        check of the whole table to one of shape (1,).
    whole : bool
        Whether it is about the table as a whole.
    """

    id: str
    statement: str
    violations: Callable[[Columns], _Bools]
    whole: bool = False


def _empty(columns: Columns) -> _Bools:
    return np.array([columns.rows == 0])


def _lonely_uncertainty(columns: Columns) -> _Bools:
    pairs = ((name, name.removeprefix("u_")) for name in columns.names if name.startswith("u_"))
    bad = np.zeros(columns.rows, dtype=np.bool_)
    for u, value in pairs:
        bad |= ~np.isnan(columns.number(u)) & np.isnan(columns.number(value))
    return bad


def _nothing_to_compute_from(columns: Columns) -> _Bools:
    first, second = np.isnan(columns.number("d1_um")), np.isnan(columns.number("d2_um"))
    without_diagonals = first | (second & (columns.text("scale") != "HK"))
    return np.asarray(without_diagonals & np.isnan(columns.number("hardness")))


def _half_a_point(columns: Columns) -> _Bools:
    length = np.isnan(columns.number("extension_mm")) & np.isnan(columns.number("crosshead_mm"))
    no_force = np.isnan(columns.number("force_n")) | length
    no_stress = np.isnan(columns.number("stress_mpa")) | np.isnan(columns.number("strain"))
    return np.asarray(no_force & no_stress)


def _brinell_without_ball(columns: Columns) -> _Bools:
    return np.asarray((columns.text("scale") == "HBW") & np.isnan(columns.number("ball_mm")))


def _not_in_squares(columns: Columns) -> _Bools:
    bad = np.zeros(columns.rows, dtype=np.bool_)
    for total in _families(columns, "u_shared"):
        own = columns.number(total.replace("u", "u_own", 1))
        shared = columns.number(total.replace("u", "u_shared", 1))
        squared = columns.number(total) ** 2
        bad |= np.abs(own**2 + shared**2 - squared) > 2.0 * _ROUNDING * squared
    return bad


def _outside_its_interval(columns: Columns) -> _Bools:
    bad = np.zeros(columns.rows, dtype=np.bool_)
    for lower, value, upper in _intervals(columns):
        low, centre, high = (columns.number(name) for name in (lower, value, upper))
        slack = _ROUNDING * np.abs(centre)
        bad |= (low > centre + slack) | (high < centre - slack) | (low > high)
    return bad


def _decisions_lost(columns: Columns) -> _Bools:
    decided = sum(columns.number(name) for name in ("conforming", "non_conforming", "undecided"))
    coupons = columns.number("coupons")
    too_many = columns.number("coupons_averaged") > coupons
    return np.asarray(((decided != 0.0) & (decided != coupons)) | too_many)


def _limits_crossed(columns: Columns) -> _Bools:
    lower, upper = columns.number("lower_limit"), columns.number("upper_limit")
    return np.asarray((np.isnan(lower) & np.isnan(upper)) | (lower >= upper))


def _half_an_exclusion(columns: Columns) -> _Bools:
    said = [columns.text(name) != "" for name in ("excluded_by", "excluded_at", "reason")]
    return np.asarray((said[0] | said[1] | said[2]) & ~(said[0] & said[1] & said[2]))


def _emptied_without_error(columns: Columns) -> _Bools:
    return np.asarray((columns.text("empties") != "") & (columns.text("level") != "error"))


def _route_without_columns(columns: Columns) -> _Bools:
    route = columns.text("route")
    indent = (columns.text("scale") == "") | np.isnan(columns.number("force_n"))
    indent |= np.isnan(columns.number("hardness"))
    flow = np.isnan(columns.number("plastic_strain")) | np.isnan(columns.number("flow_stress_mpa"))
    return np.asarray(((route == "indent") & indent) | ((route == "flow") & flow))


def _families(columns: Columns, prefix: str) -> Iterator[str]:
    for name in columns.names:
        if name == prefix or name.startswith(f"{prefix}_"):
            yield "u" + name.removeprefix(prefix)


def _intervals(columns: Columns) -> Iterator[tuple[str, str, str]]:
    for name in columns.names:
        if name == "lower":
            yield "lower", "value", "upper"
        elif name.startswith("lower_"):
            quantity = name.removeprefix("lower_")
            mean = f"mean_{quantity}"
            yield name, mean if mean in columns.names else quantity, f"upper_{quantity}"


CHECKS: Final[Mapping[str, Check]] = {
    check.id: check
    for check in (
        Check("not-empty", "The table has at least one row.", _empty, whole=True),
        Check(
            "uncertainty-has-its-value",
            "An uncertainty stands only beside its value.",
            _lonely_uncertainty,
        ),
        Check(
            "hardness-or-diagonals",
            "A row has its hardness, or d1_um and (but for HK) d2_um.",
            _nothing_to_compute_from,
        ),
        Check(
            "force-with-length-or-stress-with-strain",
            "A point has force_n with extension_mm or crosshead_mm, or stress_mpa with strain.",
            _half_a_point,
        ),
        Check("ball-for-brinell", "A row of scale HBW has ball_mm.", _brinell_without_ball),
        Check(
            "own-and-shared-add-up",
            "The square of u is that of u_own plus that of u_shared.",
            _not_in_squares,
        ),
        Check(
            "interval-holds-value",
            "A value lies between the ends of its interval.",
            _outside_its_interval,
        ),
        Check(
            "decisions-add-up",
            "Every coupon of a lot is decided, or none is; no more are averaged than there are.",
            _decisions_lost,
        ),
        Check(
            "limits-in-order",
            "At least one limit is given, and the lower is below the upper.",
            _limits_crossed,
        ),
        Check(
            "exclusion-is-whole",
            "excluded_by, excluded_at and reason stand together or not at all.",
            _half_an_exclusion,
        ),
        Check(
            "only-errors-empty",
            "Only a finding of level error empties quantities.",
            _emptied_without_error,
        ),
        Check(
            "route-has-its-columns",
            "An indent has scale, force_n and hardness; a flow-stress point has its strain and "
            "stress.",
            _route_without_columns,
        ),
    )
}
