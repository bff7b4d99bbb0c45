"""Validate a batch without computing or writing anything."""

from collections import Counter
from dataclasses import dataclass
from pathlib import Path
from textwrap import wrap
from typing import Any, Final

import numpy as np
import pyarrow as pa

from coldwork.inputs.sheet import read_method
from coldwork.jobs.gather import Gathered, gather
from coldwork.judge.coupon_rules import judge_readings, judge_thickness
from coldwork.judge.temperatures import judge_temperatures
from coldwork.rules.rule import Level
from coldwork.statistics.rounding import counted

__all__ = ["Checked", "check"]

_SHOWN: Final = 20  # set-aside readings that are told one by one
_WIDTH: Final = 100


@dataclass(frozen=True)
class Checked:
    """What a check found.

    Attributes
    ----------
    batch : Gathered
        The batch, read and reduced.
    set_aside : pyarrow.Table
        Readings that could not be used, as ``set_aside.csv`` would list them.
    flags : pyarrow.Table
        Findings on readings, coupons and inputs that need no computing.
    """

    batch: Gathered
    set_aside: pa.Table
    flags: pa.Table

    @property
    def asks(self) -> bool:
        """Whether something asks for a person: a reading set aside, an error, a warning."""
        grave = {Level.ERROR.value, Level.WARNING.value}
        return bool(len(self.set_aside)) or bool(grave & set(self.flags["level"].to_pylist()))

    def as_json(self) -> dict[str, Any]:
        """Give it for a program to read."""
        return {
            "batch_id": self.batch.method.batch_id,
            "coupons": len(self.batch.coupons),
            "readings": self._counts(),
            "set_aside": self.set_aside.to_pylist(),
            "flags": self.flags.to_pylist(),
        }

    def text(self) -> str:
        """Tell it to a person."""
        method, counts = self.batch.method, self._counts()
        without = int(np.count_nonzero(self.batch.used_per_coupon == 0))
        lines = [
            f"{method.batch_id}: {method.material}, {method.route} route{'s' * method.both}",
            f"{counted(len(self.batch.coupons), 'coupon')}, "
            f"{without} of them without a usable reading",
            f"{counted(counts['read'], 'reading')} read: {counts['used']} can be used, "
            f"{counts['set_aside']} would be set aside",
        ]
        return "\n".join([*lines, *self._set_aside_lines(), *self._flag_lines(), "", _CLOSING])

    def _counts(self) -> dict[str, int]:
        return {
            "read": self.batch.readings_read,
            "used": self.batch.readings_used,
            "set_aside": self.batch.readings_set_aside,
        }

    def _set_aside_lines(self) -> list[str]:
        rows = self.set_aside.slice(0, _SHOWN).to_pylist()
        lines = ["", "Set aside:"] if rows else []
        for row in rows:
            place = f"{row['file']}, line {row['line']}"
            if row["column"]:
                place += f", {row['column']} {row['raw']!r}"
            lines += _hung(f"{place}: {row['statement']}; {row['hint']}")
        more = len(self.set_aside) - len(rows)
        return [*lines, f"  and {more} more"] if more > 0 else lines

    def _flag_lines(self) -> list[str]:
        rows = self.flags.to_pylist()
        counted = Counter((row["level"], row["rule"], row["statement"]) for row in rows)
        lines = ["", "Found before anything is computed:"] if counted else []
        for (level, rule, statement), count in counted.items():
            names = dict.fromkeys(r["coupon_id"] for r in rows if r["rule"] == rule)
            told = [name for name in names if name][:5]
            details = dict.fromkeys(r["detail"] for r in rows if r["rule"] == rule and r["detail"])
            where = (
                f": {', '.join(told)}{', ...' if len(names) > len(told) else ''}" if told else ""
            )
            lines += _hung(f"{level}, {count} x {rule}: {statement}{where}")
            lines += [f"      {detail}" for detail in list(details)[:5]]
        return lines


_CLOSING: Final = "Nothing was computed and nothing was written."


def check(batch: str | Path) -> Checked:
    """Validate a batch folder.

    Parameters
    ----------
    batch : str or Path
        The batch folder.

    Returns
    -------
    Checked
        What would be set aside or flagged.

    Raises
    ------
    BatchRefused
        With everything for which the batch would be refused.
    """
    gathered, _ = gather(read_method(Path(batch)))
    reduced, coupons = gathered.reduced, np.arange(len(gathered.coupons))
    flow = gathered.flow
    if flow is None:
        route = gathered.method.laws.route
        judge_readings(
            gathered.findings, coupons, reduced.used, gathered.repeatability, route=route
        )
    else:
        alone = reduced.used == 0
        judge_readings(
            gathered.findings,
            coupons,
            np.where(alone, flow.reduced.used, reduced.used),
            gathered.repeatability,
            route=np.where(alone, "flow", "indent"),
        )
        judge_temperatures(flow.told.findings, flow.method, coupons, flow.reduced.temperature)
    judge_temperatures(gathered.findings, gathered.method, coupons, reduced.temperature)
    judge_thickness(
        gathered.findings,
        coupons,
        gathered.coupons.thickness,
        reduced.scale,
        reduced.mean_diagonal,
        reduced.ball,
    )
    flags = pa.concat_tables(list(gathered.flags()))
    return Checked(gathered, gathered.set_aside_table(), flags)


def _hung(words: str) -> list[str]:
    return wrap(words, _WIDTH, initial_indent="  ", subsequent_indent="    ")
