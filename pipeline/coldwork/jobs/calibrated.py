"""What a calibration was asked for and what it came to, for a file, a person and a program."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from coldwork.statistics.goodness import Goodness
from coldwork.statistics.rounding import with_uncertainty

__all__ = ["Calibrated", "Found", "Options", "Points"]

FloatArray = NDArray[np.float64]

_SHOWN: Final = 60  # points that a person is told of


@dataclass(frozen=True)
class Options:
    """What a calibration must know beside its table.

    Attributes
    ----------
    id, kind : str
        Its name, and what is held against what.
    relative_u : mapping of str to float
        By column: standard uncertainty over value, where no cell says it. [1]
    material : str or None
        The metal that it holds for.
    scale, area : str
        Of a hardness.
    strain : float or None
        Plastic strain at which the flow stresses of ``hardness`` were taken. [1]
    sheet : Path or None
        Batch folder that gives the constants for ``core-radius``.
    """

    id: str
    kind: str
    relative_u: Mapping[str, float] = field(default_factory=dict)
    material: str | None = None
    scale: str = "HV"
    area: str = "contact"
    strain: float | None = None
    sheet: Path | None = None


@dataclass(frozen=True)
class Found:
    """One constant; value and u in `unit`."""

    key: str
    value: float
    u: float
    unit: str
    factor: float | None = None


@dataclass(frozen=True)
class Points:
    """The n points as the line sees them, for the plot and the account.

    Attributes
    ----------
    ids : tuple of str, n
        The coupons.
    x, y, u_x, u_y : ndarray of float64, shape (n,)
        Places and standard uncertainties; x is the place in the table where there is no line.
        [units of the labels]
    residual, leverage : ndarray of float64, shape (n,)
        As the fit has them. [1]
    labels : tuple of str
        Of x and y.
    line : tuple of float
        Intercept and slope; a level where there is no line. [units of the labels]
    line_covariance : ndarray of float64, shape (2, 2)
        Of those two.
    """

    ids: tuple[str, ...]
    x: FloatArray
    y: FloatArray
    u_x: FloatArray
    u_y: FloatArray
    residual: FloatArray
    leverage: FloatArray
    labels: tuple[str, str]
    line: tuple[float, float]
    line_covariance: FloatArray


@dataclass(frozen=True)
class Calibrated:
    """What a calibration came to.

    Attributes
    ----------
    id, kind : str
        As the options have them.
    constants : tuple of Found
        One or two.
    covariance : ndarray of float64
        Of them, enlarged where the fit is too bad. [products of their units]
    fit : Goodness
        Chi-squared and its verdict.
    bad : str or None
        The one coupon that lies too far from the fit.
    quantity : str
        Column of the range.
    low, high : float
        The range. [its unit]
    points : Points
        The points.
    document : mapping
        Content of the file.
    """

    id: str
    kind: str
    constants: tuple[Found, ...]
    covariance: FloatArray
    fit: Goodness
    bad: str | None
    quantity: str
    low: float
    high: float
    points: Points
    document: Mapping[str, Any]

    @property
    def correlation(self) -> float | None:
        """Of the two constants, None where there is one."""
        if len(self.constants) == 1:
            return None
        c = self.covariance
        return float(c[0, 1] / np.sqrt(c[0, 0] * c[1, 1]))

    def as_json(self) -> dict[str, Any]:
        """Give it for a program to read: the file's content, and every point."""
        points = self.points
        each = zip(points.ids, points.residual, points.leverage, strict=True)
        return {
            **self.document,
            "correlation": self.correlation,
            "points": [
                {"coupon_id": name, "residual": float(e), "leverage": float(h)}
                for name, e, h in each
            ],
        }

    def text(self) -> str:
        """Tell it to a person."""
        fit = self.fit
        lines = [f"Calibration {self.id} ({self.kind}), {len(self.points.ids)} points", ""]
        for found in self.constants:
            told = with_uncertainty(found.value, found.u, found.unit)
            times = f", times or over {found.factor:.3g}" if found.factor else ""
            lines.append(f"  {found.key} = {told}{times}")
        if self.correlation is not None:
            lines.append(f"  correlation of the two: {self.correlation:.3f}")
        lines += [
            f"  holds for {self.quantity} from {self.low:.6g} to {self.high:.6g}",
            "",
            f"  chi-squared {fit.chi_squared:.4g} over {fit.degrees_of_freedom} degrees of freedom,"
            f" probability {fit.probability:.3g}: {fit.verdict}",
            *self._advice(),
            "",
            f"  {'residual':>9}  {'leverage':>8}  coupon",
        ]
        each = zip(self.points.residual, self.points.leverage, self.points.ids, strict=True)
        rows = [f"  {e:9.2f}  {h:8.3f}  {name}" for e, h, name in each]
        more = [f"  and {len(rows) - _SHOWN} more"] if len(rows) > _SHOWN else []
        return "\n".join([*lines, *rows[:_SHOWN], *more])

    def _advice(self) -> list[str]:
        lines = []
        if self.fit.verdict == "too bad":
            lines.append(
                f"  the points scatter more than stated: u was multiplied by"
                f" {self.fit.enlargement:.3g}; look for an error that was left out, or a law that"
                " does not hold"
            )
        elif self.fit.verdict == "too good":
            lines.append(
                "  the points scatter less than stated: an uncertainty is too large, or the points"
                " share an error that should not be counted in each"
            )
        if self.bad is not None:
            lines.append(
                f"  coupon {self.bad} lies too far off, and the others agree without it; it was not"
                " left out: look at it"
            )
        return lines
