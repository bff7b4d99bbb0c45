"""Numbers as people read them: the uncertainty to two digits, the value to match.

Tables keep every digit; this is for reports, plots and accounts.

References
----------
.. [1] JCGM 100:2008, 7.2.6: at most two significant digits of an uncertainty.
"""

from decimal import Decimal, localcontext
from math import isfinite
from typing import Final

__all__ = ["counted", "interval_ends", "rounded", "with_uncertainty"]

_DIGITS_OF_U: Final = 2
_DIGITS_ALONE: Final = 4  # of a value whose uncertainty is not known
_LARGE: Final = 5  # from 1e5 on with an exponent
_SMALL: Final = -3  # and below 1e-3
_ALL_DIGITS: Final = 700  # of the largest double down to the place of the smallest


def counted(n: int, noun: str) -> str:
    """Write a number with its noun, such as ``1 coupon`` or ``5 coupons``."""
    return f"{n} {noun}" if n == 1 else f"{n} {noun}s"


def rounded(value: float, u: float | None) -> tuple[str, str]:
    """Round a value and its uncertainty to the same place.

    Parameters
    ----------
    value : float
        The value. [any unit]
    u : float or None
        Its standard uncertainty; None, NaN or 0 where there is none. [unit of `value`]

    Returns
    -------
    value : str
        To the place of the second digit of `u`, or to four digits without one; empty if it
        is not a finite number.
    u : str
        To two digits, with the exponent of the value; empty where there is none.

    Examples
    --------
    >>> rounded(183.127, 1.23)
    ('183.1', '1.2')
    >>> rounded(7.314e14, 4.2e13)
    ('7.31e14', '0.42e14')
    """
    mantissa, spread, exponent = _parts(value, u)
    tail = f"e{exponent}" if exponent else ""
    return (mantissa + tail if mantissa else "", spread + tail if spread else "")


def interval_ends(lower: float, upper: float, u: float | None) -> tuple[str, str]:
    """Round both ends of an interval and write them with one power of ten.

    Parameters
    ----------
    lower, upper : float
        The ends; one that is not a finite number comes out empty. [any unit]
    u : float or None
        Standard uncertainty of what lies between, as for `rounded`. [unit of `lower`]

    Returns
    -------
    lower, upper : str

    Examples
    --------
    >>> interval_ends(8.22e13, 1.217e14, None)
    ('0.8220e14', '1.217e14')
    """
    with localcontext(prec=_ALL_DIGITS):
        ends = [
            _to_places(Decimal(repr(float(x))), u)[0] if isfinite(x) else None
            for x in (lower, upper)
        ]
        exponent = _exponent(max((abs(x) for x in ends if x is not None), default=Decimal(0)))
        tail = f"e{exponent}" if exponent else ""
        low, high = ("" if x is None else f"{_plain(x.scaleb(-exponent)):f}{tail}" for x in ends)
    return low if lower else "0", high if upper else "0"


def with_uncertainty(value: float, u: float | None, unit: str = "1") -> str:
    """Write a value with its uncertainty and its unit.

    Parameters
    ----------
    value : float
        The value. [`unit`]
    u : float or None
        Its standard uncertainty; None, NaN or 0 where there is none. [`unit`]
    unit : str
        As it is to be read; nothing is written for ``1``.

    Returns
    -------
    str
        ``183.1 ± 1.2 MPa`` or ``(7.31 ± 0.42)e14 m-2``; ``none`` if the value is not a
        finite number.

    Examples
    --------
    >>> with_uncertainty(7.314e14, 4.2e13, "m-2")
    '(7.31 ± 0.42)e14 m-2'
    """
    mantissa, spread, exponent = _parts(value, u)
    if not mantissa:
        return "none"
    text = f"{mantissa} ± {spread}" if spread else mantissa
    if exponent:
        text = f"({text})e{exponent}" if spread else f"{text}e{exponent}"
    return text if unit in {"", "1"} else f"{text} {unit}"


def _parts(value: float, u: float | None) -> tuple[str, str, int]:
    """Give mantissa, mantissa of the uncertainty, and their common exponent (0: none)."""
    if not isfinite(value):
        return "", "", 0
    with localcontext(prec=_ALL_DIGITS):
        x, spread = _to_places(Decimal(repr(float(value))), u)
        exponent = _exponent(max(abs(x), spread or Decimal(0)))
        shown = "" if spread is None else f"{spread.scaleb(-exponent):f}"
        return f"{_plain(x.scaleb(-exponent)):f}", shown, exponent


def _exponent(largest: Decimal) -> int:
    """Give the power of ten that numbers up to a size are written with, 0 for none."""
    exponent = largest.adjusted() if largest else 0
    return 0 if _SMALL <= exponent < _LARGE else exponent


def _to_places(x: Decimal, u: float | None) -> tuple[Decimal, Decimal | None]:
    if u is None or not isfinite(u) or u <= 0.0:
        return _to_digits(x, _DIGITS_ALONE), None
    spread = _to_digits(Decimal(repr(float(u))), _DIGITS_OF_U)
    return x.quantize(Decimal(1).scaleb(_place(spread))), spread


def _to_digits(x: Decimal, digits: int) -> Decimal:
    if not x:
        return Decimal(0)
    for _ in range(2):  # 9.96 becomes 10.0 first, and 10 then
        x = x.quantize(Decimal(1).scaleb(x.adjusted() - digits + 1))
    return x


def _place(x: Decimal) -> int:
    exponent = x.as_tuple().exponent
    return exponent if isinstance(exponent, int) else 0


def _plain(x: Decimal) -> Decimal:
    return x if x else abs(x)  # never "-0.0"
