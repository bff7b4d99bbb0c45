"""What ``[uncertainty]`` says of Monte Carlo, and what a schema cannot say about it."""

import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any, Final

from coldwork.inputs.causes import Causes
from coldwork.inputs.laws import choice
from coldwork.inputs.method import Draws, Method
from coldwork.inputs.words import shown

__all__ = ["draws_of", "refuse_bad_draws", "refuse_draws_beyond_memory"]

_SECTION: Final = "uncertainty"
_DRAWS: Final = 100_000  # unless said
_DIGITS: Final = 1
_MOST_ADAPTIVE: Final = 1_000_000  # of one coupon; its record says if they were not enough
_QUANTITIES: Final = 16  # that are held for some coupons at a time, with copies to order them
_SHARE: Final = 0.5  # of the machine's memory that draws may fill [1]
_LIMITS: Final = ("/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory/memory.limit_in_bytes")


def refuse_bad_draws(causes: Causes) -> None:
    """Refuse a seed that is no whole number, and fewer draws than the interval needs."""
    section = causes.sheet.tables.get(_SECTION)
    if not isinstance(section, dict) or section.get("method") != "monte-carlo":
        return
    for key in ("seed", "draws", "digits"):
        if isinstance(section.get(key), float | bool):
            causes.add(
                (_SECTION, key),
                f"{shown(section[key])} is not a whole number",
                f"{key} is written as a whole number, without a point.",
                "Write it so.",
            )
    found, coverage = (
        section.get("draws", _DRAWS),
        choice(causes.sheet.tables, _SECTION, "coverage"),
    )
    if causes.within((_SECTION, "draws")) or causes.within((_SECTION, "coverage")):
        return
    if isinstance(found, int) and found < Draws.least(coverage):
        causes.add(
            (_SECTION, "draws"),
            f"{found} draws are too few for a coverage of {coverage:g}",
            f"Ends of that interval need {Draws.least(coverage):.0f} draws or more "
            "(JCGM 101:2008, 7.9.4).",
            "Ask for more draws.",
        )


def draws_of(tables: Mapping[str, Any]) -> Draws | None:
    """Read the section of a sheet that fits; None by first order."""
    if choice(tables, _SECTION, "method") != "monte-carlo":
        return None
    section = tables[_SECTION]
    wanted = section.get("draws", _DRAWS)
    adaptive = wanted == "adaptive"
    return Draws(
        seed=section["seed"],
        number=_MOST_ADAPTIVE if adaptive else wanted,
        adaptive=adaptive,
        digits=section.get("digits", _DIGITS),
    )


def refuse_draws_beyond_memory(causes: Causes, method: Method) -> None:
    """Refuse more draws than fit into the memory of this machine."""
    if method.draws is None or method.draws.adaptive:
        return
    uncertain = sum(1 for x in method.inputs.values() if x.u > 0.0 and x.shared)
    each = 8 * (uncertain + 3 * _QUANTITIES)
    fits = int(_SHARE * _memory() / each)
    if method.draws.number > fits:
        causes.add(
            (_SECTION, "draws"),
            f"{method.draws.number} draws need {method.draws.number * each / 1e9:.3g} GB",
            f"This machine holds {fits} draws of {uncertain} shared inputs at once.",
            "Ask for fewer; 100000 give the ends of a 95 % interval to 1 % of u.",
        )


def _memory() -> float:
    """Give the memory that this process may use, in bytes."""
    sizes = [float(os.sysconf("SC_PAGE_SIZE")) * os.sysconf("SC_PHYS_PAGES")]
    for path in _LIMITS:
        try:
            sizes.append(float(Path(path).read_text(encoding="ascii")))
        except (OSError, ValueError):
            continue
    return min(sizes)
