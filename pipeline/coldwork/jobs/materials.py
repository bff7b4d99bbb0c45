"""The library of metals in words, and as data for a program."""

from collections.abc import Iterator
from dataclasses import asdict
from pathlib import Path
from textwrap import wrap
from typing import Any, Final

from coldwork import materials
from coldwork.materials import LibraryValue, Material
from coldwork.statistics.rounding import rounded

__all__ = ["as_json", "detail", "table"]

_WIDTH: Final = 100  # characters
_COLUMNS: Final = {
    "shear_modulus_gpa": "G, GPa",
    "poisson_ratio": "nu",
    "burgers_vector_nm": "b, nm",
    "mass_density_kg_per_m3": "density, kg/m3",
}


def table() -> str:
    """List the metals of the library, a line each.

    Returns
    -------
    str
        Name, lattice and the constants that every method needs, each with its
        standard uncertainty; lines of at most 100 characters.
    """
    rows = [["name", "lattice", *_COLUMNS.values()]]
    for name in materials.names():
        metal = materials.load(name)
        rows.append([name, metal.lattice, *(_short(metal, key) for key in _COLUMNS)])
    widths = [max(len(row[i]) for row in rows) for i in range(len(rows[0]))]
    lines = [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in rows
    ]
    return "\n".join([*lines, "", "`coldwork materials NAME` shows one of them with its sources."])


def detail(name: str) -> str:
    """Describe one metal: every constant with its uncertainty and source.

    Parameters
    ----------
    name : str
        Name in the library, or the path of a metal's own ``.toml`` file.

    Returns
    -------
    str
        Lines of at most 100 characters.

    Raises
    ------
    UsageError
        If the library has no such metal; the message names the nearest. If the file is
        no metal's; the message lists every fault.
    """
    return "\n".join(_lines(_metal(name)))


def as_json(name: str | None = None) -> dict[str, Any]:
    """Give one metal, or all of them, as data.

    Parameters
    ----------
    name : str, optional
        Name in the library, or the path of a metal's own ``.toml`` file; the whole library
        without one.

    Returns
    -------
    dict
        ``materials``, by name: title, lattice, slip system, note, and each constant
        with value, u, unit, source and whether the number was seen.

    Raises
    ------
    UsageError
        As `detail`.
    """
    metals = [_metal(each) for each in (materials.names() if name is None else (name,))]
    return {"materials": {metal.name: asdict(metal) for metal in metals}}


def _metal(name: str) -> Material:
    of_its_own = name.endswith(".toml")
    return materials.load_file(Path(name)) if of_its_own else materials.load(name)


def _short(metal: Material, key: str) -> str:
    entry = metal.values.get(key)
    if entry is None:
        return ""
    value, u = rounded(entry.value, entry.u)
    return f"{value} ± {u}"


def _lines(metal: Material) -> Iterator[str]:
    yield from wrap(f"{metal.name}: {metal.title} ({metal.lattice})", _WIDTH)
    yield f"slip system {metal.slip_system}"
    if metal.note:
        yield from wrap(metal.note, _WIDTH)
    for key, entry in metal.values.items():
        yield ""
        yield f"  {key} = {_with_u(entry)}"
        seen = "" if entry.seen else " The number itself was not seen."
        yield from wrap(
            f"Source: {entry.source}.{seen}",
            _WIDTH,
            initial_indent="    ",
            subsequent_indent="    ",
            break_on_hyphens=False,
        )


def _with_u(entry: LibraryValue) -> str:
    spread = f" ± {entry.u:g}" if entry.u else ""
    unit = "" if entry.unit == "1" else f" {entry.unit}"
    return f"{entry.value:.10g}{spread}{unit}"
