"""A coupon's record told as an account: what was read, what was made of it, what follows.

For people, so numbers are rounded: u to two digits, the value to match. The record
itself holds every digit.
"""

from collections.abc import Iterator, Mapping, Sequence
from math import nan
from textwrap import wrap
from typing import Any, Final, TypeAlias

from coldwork import contracts
from coldwork.results.curve_account import curve_lines
from coldwork.statistics.rounding import interval_ends, rounded, with_uncertainty

__all__ = ["HEADING", "account"]

HEADING: Final = "Stored energy in dislocations"
_WIDTH: Final = 96
_CAUTIONS: Final = (
    "This is the energy of dislocations alone. Calorimetry finds more, sometimes several times "
    "as much, since point defects and stacking faults also release heat.",
    "An estimate releases no part by itself: a person does, who has seen the flags, the readings "
    "set aside and the constants above.",
    "Inputs marked `default` are common practice, not measurements of this material.",
)
_MANY: Final = 1000.0  # degrees of freedom; beyond, their number says nothing more
_NAMES: Final = frozenset({"coupon_id", "indent_no", "reading_no"})  # told already
_Row: TypeAlias = Mapping[str, Any]


def account(row: _Row, record: _Row, method: _Row) -> str:
    """Tell how a coupon's answer came about.

    Parameters
    ----------
    row : mapping
        Its row of ``coupons``.
    record : mapping
        Its record.
    method : mapping
        The batch's ``method.json``.

    Returns
    -------
    str
        Lines of text, from the answer over raw cells and steps to the decision.
    """
    curve, readings = record.get("curve"), record["readings"]
    of_curve = curve and not readings  # told above: its points are no readings of their own
    used = (f"Readings used: {len(readings)}", _readings(readings))
    noun = "Points" if of_curve else "Readings"
    parts = (
        ("", _answer(row, record)),
        ("Coupon as listed", _listed(record["coupon"])),
        *([("Curve", map(_shown, curve_lines(curve)))] if curve else []),
        *([] if of_curve else [used]),
        (f"{noun} set aside: {len(record['set_aside'])}", _set_aside(record["set_aside"])),
        ("Repeatability of the mean", _facts(record["repeatability"])),
        ("The steps", _steps(record, method)),
        ("Results", _results(record["quantities"])),
        (f"Flags: {len(record['flags'])}", _flags(record["flags"])),
        (f"Decision: {record['decision'] or 'no limit was given'}", _decisions(record)),
        ("Mind", _bulleted(_CAUTIONS)),
    )
    lines: list[str] = []
    for title, body in parts:
        lines += ["", title] if title else []
        lines += [f"  {line}" if title else line for line in body]
    return "\n".join(lines)


def _answer(row: _Row, record: _Row) -> Iterator[str]:
    energy = record["quantities"].get("stored_energy_j_per_g", {})
    yield f"{HEADING}, coupon {_shown(record['coupon_id'])}"
    told = {
        "batch": record["batch_id"],
        "lot": record["lot_id"],
        "condition": record["condition"],
        "material": row.get("material"),
        "route": row.get("route"),
        "hardness scale": row.get("hardness_scale"),
    }
    yield ", ".join(f"{name} {_shown(text)}" for name, text in told.items() if text)
    yield ""
    yield f"{_quantity(energy)}{_interval(energy)}"


def _listed(coupon: _Row) -> Iterator[str]:
    yield f"{_place(coupon)}: {_cells(coupon['raw'])}"


def _readings(readings: Sequence[_Row]) -> Iterator[str]:
    for reading in readings:
        yield f"no. {reading['reading_no']}, {_place(reading)}: {_cells(reading.get('raw', {}))}"
        found = [
            f"{label} {with_uncertainty(reading[name], None, unit)}"
            for name, label, unit in (
                ("mean_diagonal_um", "mean diagonal", "um"),
                ("hardness", "hardness", "kgf/mm2"),
                ("flow_stress_mpa", "flow stress", "MPa"),
                ("weight", "weight", "1"),
            )
            if reading.get(name) is not None
        ]
        if reading.get("flags"):
            found.append(f"flags {reading['flags']}")
        yield f"  gives {', '.join(found)}" if found else "  gives nothing"


def _set_aside(rows: Sequence[_Row]) -> Iterator[str]:
    for row in rows:
        cell = f" {row['column']} {_quoted(row.get('raw'))}" if row.get("column") else ""
        number = f"no. {row['reading_no']}, " if row.get("reading_no") is not None else ""
        yield f"{number}{_place(row)}:{cell} [{row['rule']}]"
        said = [row.get("statement"), row.get("hint"), row.get("also")]
        if row.get("excluded_by"):
            said.append(
                f"Taken out by {row['excluded_by']} at {row['excluded_at']}: {row['reason']}"
            )
        yield from _indented(". ".join(_shown(text).rstrip(".") for text in said if text) + ".")


def _facts(facts: _Row) -> Iterator[str]:
    for name, fact in facts.items():
        words = {None: "none", True: "yes", False: "no"}
        plain = fact is None or isinstance(fact, bool)
        yield f"{name.replace('_', ' ')}: {words[fact] if plain else _number(fact)}"


def _steps(record: _Row, method: _Row) -> Iterator[str]:
    inputs = method["inputs"]
    made: dict[str, str] = {}
    for number, step in enumerate(record["steps"], 1):
        published = record["quantities"].get(step["quantity"], {})
        same = published.get("value") == step["value"]
        u = published.get("u") if same else None
        result = _quantity({"value": step["value"], "u": u, "unit": step["unit"]})
        emptied = published and published["value"] is None and step["value"] is not None
        note = ", not published: a flag below empties it" if emptied else ""
        yield f"{number}. {step['step']}: {result}{note}  [{step['relation']}]"
        yield from _indented(step.get("explanation") or "", "   ")
        for name, value in step["from"].items():
            if name in made:
                told = made[name]
            elif name in inputs:
                told = _input(inputs[name])
            else:
                told = _of_coupon(name, value, record, method)
            yield from _indented(f"from {name}: {told}", "   ")
        made[step["quantity"]] = f"{result} (step {number})"


def _of_coupon(name: str, value: object, record: _Row, method: _Row) -> str:
    """Tell an input that is neither of the method nor an earlier step."""
    judged, raw = record["repeatability"], record["coupon"]["raw"]
    of_cell = name in contracts.load("in/coupons").columns
    name = _own_name(name, record["coupon"]["file"], method)
    if value is not None:
        return f"{_number(value)} of this coupon"
    of = {"repeatability": "", "repeatability:flow": "flow_"}.get(name)
    if of is not None and judged.get(f"{of}u") is not None:
        unit = judged.get(f"{of}unit") or "1"
        return f"u {with_uncertainty(judged[f'{of}u'], None, unit)}, as above"
    if raw.get(name):
        return f"{_shown(raw[name])} ({_place(record['coupon'])})"
    return "not given" if of_cell else "of this coupon"


def _own_name(name: str, file: str, method: _Row) -> str:
    """Give the name that a column of ours has in the file that lists the coupon."""
    for layout in method.get("layouts", ()):
        if layout["fills"] == "coupons" and file.partition("!")[0] in layout["files"]:
            own: str = layout["columns"].get(name, {}).get("from", name)
            return own
    return name


def _input(entry: _Row) -> str:
    if entry["shape"] == "lognormal" and entry["factor"]:
        unit = "" if entry["unit"] == "1" else f" {entry['unit']}"
        value = f"{_number(entry['value'])}{unit}, times or over {entry['factor']:g} (lognormal)"
    else:
        value = with_uncertainty(entry["value"], entry["u"], entry["unit"])
        value += "" if entry["u"] else ", exact"
    source = f"; {_shown(entry['source'])}" if entry["source"] else ""
    return f"{value} ({entry['origin']}{source})"


def _results(quantities: _Row) -> Iterator[str]:
    columns = contracts.load("out/coupons").columns
    for name in sorted(quantities, key=columns.index):  # in the order of the chain
        quantity = quantities[name]
        yield f"{name}: {_quantity(quantity)}{_interval(quantity)}"
        if quantity.get("u"):
            own = rounded(0.0, quantity["u_own"])[1] or "0"
            shared = rounded(0.0, quantity["u_shared"])[1] or "0"
            yield f"  u of its own {own}, shared {shared}{_freedom(quantity)}"


def _freedom(quantity: _Row) -> str:
    nu = quantity.get("degrees_of_freedom")
    if nu is None:
        return ""
    shown = f"{nu:.4g}" if nu < _MANY else f"more than {_MANY:g}"
    return f", {shown} degrees of freedom"


def _flags(flags: Sequence[_Row]) -> Iterator[str]:
    for flag in flags:
        reading = f", reading {flag['reading_no']}" if flag.get("reading_no") is not None else ""
        yield f"{flag['level']} {flag['rule']}{reading}"
        unit = flag.get("unit") or "1"
        seen = [
            f"{word} {with_uncertainty(flag[key], None, unit)}"
            for key, word in (("value", "found"), ("limit", "limit"))
            if flag.get(key) is not None
        ]
        said = [flag.get("statement"), ", ".join(seen), flag.get("detail")]
        if flag.get("empties"):
            said.append(f"empties {flag['empties'].replace(';', ', ')}")
        told = "; ".join(_shown(text) for text in said if text)
        yield from _indented(f"{told} ({_shown(flag.get('source') or '')})")


def _decisions(record: _Row) -> Iterator[str]:
    for decision in record["decisions"]:
        chance = decision.get("probability")
        told = "" if chance is None else f", probability {with_uncertainty(chance, None)}"
        yield (
            f"{_shown(decision['limit_id'])}: {decision['decision']} "
            f"({decision['rule']}, basis {decision['basis']}{told})"
        )
        yield from _indented(_shown(decision["reason"]))
        if decision.get("to_settle"):
            told = f"{decision['to_settle']} would settle it, if the mean stays where it is"
            yield from _indented(told)


def _quantity(quantity: _Row) -> str:
    value = quantity.get("value")
    if value is None:
        return "none"
    return with_uncertainty(value, quantity.get("u"), quantity.get("unit") or "1")


def _interval(quantity: _Row) -> str:
    lower, upper = quantity.get("lower"), quantity.get("upper")
    if lower is None and upper is None:
        return ""
    low, high = interval_ends(
        nan if lower is None else lower, nan if upper is None else upper, quantity.get("u")
    )
    low = f"from {low}" if low else "no lower end"
    high = f" to {high}" if high else ""
    coverage, unit = quantity.get("coverage"), quantity.get("unit") or "1"
    share = "" if coverage is None else f"{100 * coverage:g} % "
    ending = ", without an upper end" if upper is None else ""
    return f"; {share}interval {low}{high}{'' if unit == '1' else f' {unit}'}{ending}"


def _number(value: object) -> str:
    return with_uncertainty(value, None) if isinstance(value, float) else _shown(value)


def _place(where: _Row) -> str:
    return f"{_shown(where['file'])}, line {where['line']}"


def _cells(raw: _Row) -> str:
    shown = [f"{name} {_shown(cell)}" for name, cell in raw.items() if cell and name not in _NAMES]
    return ", ".join(shown) or "no further cells"


def _quoted(raw: object) -> str:
    return f'"{_shown(raw or "")}"'


def _shown(text: object) -> str:
    """Text that cannot move the cursor of a terminal or break its line."""
    return "".join(c if c.isprintable() else repr(c)[1:-1] for c in str(text))


def _bulleted(sentences: Sequence[str]) -> Iterator[str]:
    for sentence in sentences:
        first, *rest = wrap(sentence, _WIDTH)
        yield f"- {first}"
        yield from (f"  {line}" for line in rest)


def _indented(text: str, indent: str = "  ") -> Iterator[str]:
    return (f"{indent}{line}" for line in wrap(text, _WIDTH))
