"""Which of our columns a column of an unknown file may fill, by the words in its name.

A guess and no more: whoever takes the draft decides.
"""

import re
from collections.abc import Mapping, Sequence
from typing import Final

from coldwork import contracts
from coldwork.inputs.layout_units import UNITS, spelled

__all__ = ["TABLES", "guess_columns", "guess_table", "unit_in"]

TABLES: Final = ("indents", "flow_stress", "curves", "coupons")
_WORDS: Final[Mapping[str, str]] = {  # our column: what its names look like
    "coupon_id": r"coupon|piece|specimen|sample|probe|test ?piece|part|id",
    "indent_no": r"no|nr|#|n|num(ber)?|ind(ent)?( no)?|reading|pos(ition)?|lfd.*",
    "reading_no": r"no|nr|#|n|num(ber)?|reading( no)?|lfd.*",
    "point_no": r"no|nr|#|n|num(ber)?|point( no)?|lfd.*",
    "scale": r"scale|method",
    "force_n": r"(test |std )?(force|load|weight|kraft|last|f|p)",
    "d1_um": r"d ?1|d h|dh|dx|diag(onal)? ?[1a]|(diag(onal)? )?(across|horiz\w*|waagrecht)",
    "d2_um": r"d ?2|d v|dv|dy|diag(onal)? ?[2b]|(diag(onal)? )?(down|along|vert\w*|senkrecht)",
    "hardness": r"hardness|h[vbk]w?\s?\d*|h\w{1,2}rte",
    "ball_mm": r"ball.*|kugel.*",
    "x_mm": r"x( ?(pos|position))?|right",
    "y_mm": r"y( ?(pos|position))?|up",
    "edge_mm": r"(to )?(edge|rim|margin|rand).*",
    "dwell_s": r"(dwell|hold|held|halte).*",
    "temperature_c": r"t(emp(erature|eratur)?)?|air|room",
    "measured_at": r"(date|time|when|clock|datum|zeit|measured|taken|finished)( (and )?(at|time))?",
    "operator": r"(by|operator|user|who|person|pr\w+fer)",
    "tester": r"tester|machine|bench|device|instrument|maschine",
    "plastic_strain": r"(true )?plastic strain|strain",
    "flow_stress_mpa": r"(true |flow )?stress",
    "strain_rate_per_s": r"(strain )?rate",
    "time_s": r"time|t|zeit|clock",
    "extension_mm": r"ext(ension|ensometer)?.*|gauge.*|stretch.*",
    "crosshead_mm": r"crosshead.*|travel|stroke|traverse.*",
    "stress_mpa": r"stress|sigma",
    "strain": r"strain|epsilon",
    "lot_id": r"lot|heat|coil|charge|batch",
    "condition": r"condition|state|pass|zustand",
    "prior_true_strain": r"(prior |true )*strain",
    "prior_plastic_work_j_per_m3": r"(prior |plastic )*work\b.*",
    "thickness_mm": r"thick(ness)?|dicke",
    "grain_size_um": r"grain( size)?|korn.*",
    "u_grain_size_um": r"u( of)? ?(the )?grain.*",
    "sampled_at": r"sampled( at)?|taken|cut|date|datum",
}
_BRACKETS: Final = re.compile(r"[\[(<]([^\])>]*)[\])>]\s*[:=]?$")
_NOISE: Final = re.compile(r"[\s._:=/-]+")
_TELLS: Final[Mapping[str, frozenset[str]]] = {  # of which table a column is
    "indents": frozenset(("d1_um", "d2_um", "hardness")),
    "flow_stress": frozenset(("plastic_strain", "flow_stress_mpa")),
    "curves": frozenset(("extension_mm", "crosshead_mm", "time_s")),
    "coupons": frozenset(("lot_id", "condition", "thickness_mm", "grain_size_um")),
}


def guess_table(names: Sequence[str]) -> str:
    """Say which table a header most looks like."""
    points = {}
    for table in TABLES:
        if f"in/{table}" in contracts.names():
            found = guess_columns(names, table)
            exact = sum(name in found for name in names)
            told = sum(name in _TELLS[table] for name in found)
            points[table] = (told, exact, len(found))
    return max(points, key=lambda table: points[table])


def guess_columns(names: Sequence[str], table: str) -> dict[str, int]:
    """Find which of our columns the columns of a file may fill.

    Parameters
    ----------
    names : sequence of str
        Names in the file, or labels over its table.
    table : str
        Which table it fills.

    Returns
    -------
    dict of str to int
        Our column to the place of the name, in the contract's order; each place once.
    """
    contract = contracts.load(f"in/{table}")
    found: dict[str, int] = {}
    bare = [_bare(name) for name in names]
    for ours in contract.columns:
        place = _place(ours, names, bare, set(found.values()), contract.columns)
        if place is not None:
            found[ours] = place
    return found


def unit_in(name: str, units_cell: str) -> str | None:
    """Give the unit that the units line, or else the name in its brackets, says."""
    brackets = _BRACKETS.search(name)
    for text in (units_cell.strip(), brackets[1].strip() if brackets else ""):
        unit = spelled(text) if text else None
        if unit is not None and unit.name in UNITS:
            return unit.name
    return None


def _place(
    ours: str, names: Sequence[str], bare: Sequence[str], taken: set[int], columns: Sequence[str]
) -> int | None:
    for place, name in enumerate(names):
        if name == ours and place not in taken:
            return place
    pattern = _WORDS.get(ours)
    for place, name in enumerate(bare):
        if pattern and place not in taken and names[place] and re.fullmatch(pattern, name):
            return None if names[place] in columns else place  # another column's own name
    return None


def _bare(name: str) -> str:
    """Give a name without unit, marks and capitals."""
    return _NOISE.sub(" ", _BRACKETS.sub("", name.strip()).lower()).strip()
