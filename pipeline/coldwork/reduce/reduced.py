"""What the readings of each coupon come to: the table that all later stages work on."""

from collections.abc import Sequence
from dataclasses import dataclass, field, fields, replace
from typing import Self

import numpy as np
from numpy.typing import NDArray

__all__ = ["ForceCells", "ReadingResults", "Reduced"]


@dataclass(frozen=True)
class ForceCells:
    """What coupons read at one force each, m cells; a coupon has one for every force.

    Attributes
    ----------
    coupon : ndarray of int64, shape (m,)
        Row of ``coupons.csv``.
    force : ndarray, shape (m,)
        Nominal force. [N]
    count : ndarray of int64, shape (m,)
        Indents.
    hardness, depth : ndarray, shape (m,)
        Mean hardness, corrected for the tester, and the depth that goes with it. [Pa], [m]
    squares : ndarray, shape (m,)
        Sum of the squared relative deviations from the mean. [1]
    """

    coupon: NDArray[np.int64]
    force: NDArray[np.float64]
    count: NDArray[np.int64]
    hardness: NDArray[np.float64]
    depth: NDArray[np.float64]
    squares: NDArray[np.float64]

    @classmethod
    def joined(cls, parts: "Sequence[ForceCells]") -> Self:
        """Put the cells of several stretches together."""
        return cls(*(np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(cls)))

    def take(self, rows: NDArray[np.intp]) -> Self:
        """Pick cells."""
        return replace(self, **{f.name: getattr(self, f.name)[rows] for f in fields(self)})


@dataclass
class Reduced:
    """One row per coupon of ``coupons.csv``, in its order, filled as readings stream by.

    Attributes
    ----------
    used : ndarray of int64, shape (n,)
        Readings used.
    mean : ndarray, shape (n,)
        Mean hardness or flow stress, corrected for the tester's bias. [Pa]
    sd : ndarray, shape (n,)
        Standard deviation of the repeats, NaN below two. [Pa]
    repeats : ndarray of int64, shape (n,)
        Readings that are repeats of one another: the degrees of freedom of `sd` plus 1.
    effective : ndarray, shape (n,)
        The number n that divides the variance of one reading in that of the
        mean: the repeats, or less between two points of a flow curve. [1]
    scale : ndarray of int8, shape (n,)
        Hardness scale, -1 where there is none.
    force, ball, mean_diagonal : ndarray, shape (n,)
        Nominal force, ball diameter, mean diagonal or diameter. [N], [m], [m]
    applied_force : ndarray, shape (n,)
        Mean of the forces as applied. [N]
    temperature : ndarray, shape (n,)
        Mean temperature of the tests. [K]
    shares : dict of str to ndarray, shape (n,)
        Share of the mean that was read on each tester with a calibration. [1]
    own_u : ndarray, shape (n,), or None
        Standard uncertainty of the mean where a curve gave it, NaN elsewhere; None
        where no curve did. [Pa]
    machine : dict of str to ndarray, shape (n,)
        Derivative of such a mean by the machine's inputs. [Pa per SI of the input]
    cells : list of ForceCells
        Readings by coupon and force, where a size effect is taken out. There `mean` of a
        coupon with several forces is the hardness at `mean_diagonal`, and `applied_force`
        the force that goes with both.
    line : ndarray of int64, shape (n,)
        Which fitted size effect is the coupon's, -1 where there is none.
    """

    used: NDArray[np.int64]
    mean: NDArray[np.float64]
    sd: NDArray[np.float64]
    repeats: NDArray[np.int64]
    effective: NDArray[np.float64]
    scale: NDArray[np.int8]
    force: NDArray[np.float64]
    ball: NDArray[np.float64]
    mean_diagonal: NDArray[np.float64]
    applied_force: NDArray[np.float64]
    temperature: NDArray[np.float64]
    shares: dict[str, NDArray[np.float64]]
    own_u: NDArray[np.float64] | None = None
    machine: dict[str, NDArray[np.float64]] = field(default_factory=dict)
    cells: list[ForceCells] = field(default_factory=list)
    line: NDArray[np.int64] = field(default_factory=lambda: np.zeros(0, dtype=np.int64))

    @classmethod
    def empty(cls, coupons: int, testers: tuple[str, ...]) -> Self:
        """Make the table of coupons that have no reading yet."""

        def blank() -> NDArray[np.float64]:
            return np.full(coupons, np.nan)

        return cls(
            used=np.zeros(coupons, dtype=np.int64),
            mean=blank(),
            sd=blank(),
            repeats=np.zeros(coupons, dtype=np.int64),
            effective=blank(),
            scale=np.full(coupons, -1, dtype=np.int8),
            force=blank(),
            ball=blank(),
            mean_diagonal=blank(),
            applied_force=blank(),
            temperature=blank(),
            shares={name: np.zeros(coupons) for name in testers},
            line=np.full(coupons, -1, dtype=np.int64),
        )

    def __len__(self) -> int:
        return int(self.used.shape[0])


@dataclass(frozen=True)
class ReadingResults:
    """What each reading of a stretch came to; shape (n,), NaN where it does not apply.

    Attributes
    ----------
    scale : ndarray of int8
        Hardness scale, -1 by the flow route.
    force, mean_diagonal : ndarray
        Test force as applied, mean diagonal. [N], [m]
    strength : ndarray
        Hardness or flow stress, corrected for the tester's bias. [Pa]
    plastic_strain : ndarray
        Of a point of a flow curve. [1]
    weight : ndarray
        Share of the reading in its coupon's mean. [1]
    marks : ndarray of uint64, shape (n, words)
        Which rules fired on it: bit i stands for ``RULES[i]``.
    """

    scale: NDArray[np.int8]
    force: NDArray[np.float64]
    mean_diagonal: NDArray[np.float64]
    strength: NDArray[np.float64]
    plastic_strain: NDArray[np.float64]
    weight: NDArray[np.float64]
    marks: NDArray[np.uint64]
