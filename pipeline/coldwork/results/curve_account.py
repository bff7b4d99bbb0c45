"""A coupon's curve told as an account: where it stands, what it gave, what it offers."""

from collections.abc import Iterator, Mapping
from typing import Any, Final, TypeAlias

from coldwork import contracts
from coldwork.statistics.rounding import with_uncertainty

__all__ = ["curve_lines"]

_Curve: TypeAlias = Mapping[str, Any]

_FACTS: Final = ("mode", "strain_from", "points_used", "points_set_aside")


def curve_lines(curve: _Curve) -> Iterator[str]:
    """Tell of a curve.

    Parameters
    ----------
    curve : mapping
        ``curve`` of a coupon's record.

    Yields
    ------
    str
        A line each; text that came in may hold anything and is made printable.
    """
    results = curve["results"]
    yield f"{curve['file']}, lines {curve['first_line']} to {curve['last_line']}"
    yield ", ".join(f"{_words(name)} {results[name]}" for name in _FACTS if name in results)
    if curve["read_at"]:
        at = curve["read_at"]
        cells = ", ".join(f"{name} {cell}" for name, cell in at["raw"].items() if cell)
        yield f"flow stress read at point {at['point_no']}, line {at['line']}: {cells}"
    contract = contracts.load("out/tensile")
    for field in contract.fields:
        if f"u_{field.name}" in contract.columns and field.name in results:
            value, u = results[field.name], results.get(f"u_{field.name}")
            yield f"{field.name}: {with_uncertainty(value, u, field.unit or '1')}"
    for proof in curve["proof_stresses_mpa"]:
        told = with_uncertainty(proof["value"], proof["u"], "MPa")
        yield f"proof stress at an offset of {proof['offset']:g}: {told}"
    if curve["for_another_sheet"]:
        yield "for the sheet of another batch, the baseline of this one taken off:"
        yield from (f"  {line}" for line in str(curve["for_another_sheet"]).splitlines())


def _words(name: str) -> str:
    return name.replace("_", " ")
