"""Testers and limits of a sheet, and what a schema cannot say about them."""

from collections.abc import Iterator, Mapping
from datetime import date
from typing import Any

from coldwork.inputs.causes import Causes
from coldwork.inputs.keys import WINDOWS, Spec, default_of
from coldwork.inputs.method import Limit, Tester
from coldwork.inputs.numbers import as_number
from coldwork.inputs.quantity import Input
from coldwork.inputs.words import shown

__all__ = ["limits_of", "refuse_bad_limits", "refuse_bad_testers", "testers_of"]


def refuse_bad_testers(causes: Causes) -> None:
    """Refuse testers of one name, biases beyond belief and days that do not exist."""
    spec = Spec("1", *WINDOWS["bias_rel"])
    for place, tester in _entries(causes, "testers"):
        bias = as_number(tester.get("bias_rel"))
        if bias is not None and spec.fault(bias):
            causes.add(
                ("testers", place, "bias_rel"),
                f"{bias:g} is impossible here",
                spec.fault(bias),
                "It is relative: 0.004 says that the tester reads 0.4 % too high.",
            )
        last = tester.get("valid_until")
        if isinstance(last, str) and _day(last) is None:
            causes.add(
                ("testers", place, "valid_until"),
                f"{shown(last)} is not a day",
                "A calibration is valid up to a day of the calendar.",
                "Write it like 2027-03-31.",
            )
    _refuse_doubles(causes, "testers")
    _refuse_checks_alone(causes)


def _refuse_checks_alone(causes: Causes) -> None:
    """Refuse checks that no tester takes its bias from, and a tester without checks."""
    files = causes.sheet.tables.get("files")
    named = isinstance(files, dict) and "verification" in files
    takers = [place for place, tester in _entries(causes, "testers") if "bias_from" in tester]
    if named and not takers:
        causes.add(
            ("files", "verification"),
            "no tester takes its bias from there",
            "A table that is named is read, or the batch is refused.",
            'Say bias_from = "verification" of a tester, or take the key out.',
        )
    for place in takers if not named else ():
        causes.add(
            ("testers", place, "bias_from"),
            "there are no checks to take it from",
            "Daily checks stand in a table of their own.",
            'Name it: [files] verification = "verification.csv".',
        )


def refuse_bad_limits(causes: Causes) -> None:
    """Refuse limits of one name and those whose lower end is not below their upper."""
    for place, limit in _entries(causes, "limits"):
        lower, upper = as_number(limit.get("lower")), as_number(limit.get("upper"))
        if lower is not None and upper is not None and lower >= upper:
            causes.add(
                ("limits", place, "lower"),
                f"lower {lower:g} is not below upper {upper:g}",
                "Nothing can keep both limits.",
                "Mend one of them.",
            )
    _refuse_doubles(causes, "limits")


def _entries(causes: Causes, section: str) -> Iterator[tuple[int, dict[str, Any]]]:
    entries = causes.sheet.tables.get(section)
    if isinstance(entries, list):
        yield from ((i, entry) for i, entry in enumerate(entries) if isinstance(entry, dict))


def _refuse_doubles(causes: Causes, section: str) -> None:
    first: dict[str, int] = {}
    for place, entry in _entries(causes, section):
        name = entry.get("id")
        if not isinstance(name, str):
            continue
        if not name.isprintable() or not name.strip():
            causes.add(
                (section, place, "id"),
                f"{shown(name)} is not a name",
                "A name is printable text.",
                "Write another.",
            )
        elif name in first:
            causes.add(
                (section, place, "id"),
                f"{shown(name)} is also the id of no. {first[name] + 1}",
                f"No two {section} share an id.",
                "Rename one of them.",
            )
        first.setdefault(name, place)


def _day(text: str) -> date | None:
    try:
        return date.fromisoformat(text)
    except ValueError:
        return None


def testers_of(tables: Mapping[str, Any], origin: str) -> tuple[Tester, ...]:
    """Read the testers of a sheet that fits."""
    return tuple(_tester(entry, origin) for entry in tables.get("testers", []))


def _tester(entry: Mapping[str, Any], origin: str) -> Tester:
    bias = Input(
        name=f"tester:{entry['id']}",
        value=float(entry.get("bias_rel", 0.0)),
        u=float(entry.get("u_rel", 0.0)),
        unit="1",
        source="the tester's calibration",
        origin=origin,
    )
    last = entry.get("valid_until")
    return Tester(
        entry["id"],
        bias,
        _day(last) if isinstance(last, str) else last,
        checked="bias_from" in entry,
        max_bias=float(_said(entry, "max_bias_rel")),
        max_repeatability=float(_said(entry, "max_repeatability_rel")),
        max_age_days=int(_said(entry, "max_age_days")),
    )


def _said(entry: Mapping[str, Any], key: str) -> Any:  # noqa: ANN401  # whatever TOML can hold
    return entry.get(key, default_of(("testers", 0, key)))


def limits_of(tables: Mapping[str, Any]) -> tuple[Limit, ...]:
    """Read the limits of a sheet that fits, defaults filled in."""
    return tuple(_limit(entry) for entry in tables.get("limits", []))


def _limit(entry: Mapping[str, Any]) -> Limit:
    rule = entry.get("rule", _default("rule"))
    least = entry.get("at_least", _default("at_least")) if rule == "probability" else None
    return Limit(
        id=entry["id"],
        quantity=entry["quantity"],
        lower=as_number(entry.get("lower")),
        upper=as_number(entry.get("upper")),
        rule=rule,
        basis=entry.get("basis", _default("basis")),
        at_least=as_number(least),
        max_relative_u=as_number(entry.get("max_relative_u")),
    )


def _default(key: str) -> Any:  # noqa: ANN401  # whatever TOML can hold
    return default_of(("limits", 0, key))
