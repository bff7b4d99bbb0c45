"""One batch under other choices: read and reduced once, evaluated once for each choice."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from importlib.metadata import version
from math import isfinite
from pathlib import Path
from textwrap import wrap
from typing import Any, Final, TypeAlias

import numpy as np
import pyarrow as pa
from numpy.typing import NDArray

import coldwork
from coldwork import contracts
from coldwork.errors import UsageError
from coldwork.inputs.sheet import method_of
from coldwork.inputs.source import read_sheet
from coldwork.jobs.choices import Choice, choices_of
from coldwork.jobs.evaluate import evaluate, inputs_of, start_of, with_readings
from coldwork.jobs.figures import Figures, figures_of
from coldwork.jobs.gather import Gathered, gather
from coldwork.jobs.judging import find_in_slice
from coldwork.jobs.tables import unit_of
from coldwork.results.apart import open_apart
from coldwork.units import from_si

__all__ = ["QUANTITIES", "Compared", "compare", "compared"]

_Floats: TypeAlias = NDArray[np.float64]
Take: TypeAlias = Callable[[pa.Table], None]
QUANTITIES: Final = ("dislocation_density_per_m2", "stored_energy_j_per_g")
_SLICE: Final = 1 << 14  # coupons that are worked at once
_ENDS: Final = ("dislocation_stress_mpa",)  # what rules look at
_COMPUTING: Final = ("numpy", "scipy", "pyarrow")
_WORDS: Final = {QUANTITIES[0]: "Density", QUANTITIES[1]: "Stored energy"}
_WIDTH: Final = 100  # characters
SAID: Final = (
    "Every choice starts from the same reduced coupons; readings, repeatability and what was set "
    "aside are those of the sheet.",
    "The relative u is what the sheet's own results state. A choice that moves a result by more "
    "than that is not covered by it.",
    "Which choice is right is not told by how far it moves a result.",
)


@dataclass(frozen=True)
class Compared:
    """What each choice moves.

    Attributes
    ----------
    batch : Gathered
        The batch, reduced.
    choices : list of Choice
        The sheet's own first.
    summary : pyarrow.Table
        ``compare_choices.csv``.
    """

    batch: Gathered
    choices: list[Choice]
    summary: pa.Table

    def text(self) -> str:
        """Tell it to a person."""
        method = self.batch.method
        head = f"Batch {method.batch_id}, {method.material}: {len(self.batch.coupons)} coupons"
        lines = [f"{head} under {len(self.choices) - 1} choices beside the sheet's own", ""]
        for i, choice in enumerate(self.choices):
            lines += wrap(
                choice.label, _WIDTH, initial_indent=f"  {i:>3}  ", subsequent_indent=7 * " "
            )
        rows = self.summary.to_pylist()
        for quantity, words in _WORDS.items():
            mine = [row for row in rows if row["quantity"] == quantity]
            u = _percent(mine[0]["relative_u"])
            lines += ["", f"{words}, over that of the sheet, whose own relative u is {u} (median)"]
            cells = [["choice", "median", "least to greatest", "its own u", "moved beyond u"]]
            cells += [_cells(row) for row in mine[1:]]
            widths = [max(len(row[i]) for row in cells) for i in range(len(cells[0]))]
            for row in cells:
                told = (cell.ljust(wide) for cell, wide in zip(row, widths, strict=True))
                lines.append("  " + "  ".join(told).rstrip())
        for sentence in SAID:
            lines += wrap(sentence, _WIDTH, initial_indent="- ", subsequent_indent="  ")
        return "\n".join(lines)

    def account(self) -> dict[str, Any]:
        """Give what the tables lean on, but for the files that are written."""
        method = self.batch.method
        read = [*method.sheets, *((s.path, s.sha256) for s in self.batch.sources)]
        return {
            "schema_version": contracts.document("account")["version"],
            "command": "compare",
            "batch_id": method.batch_id,
            "material": method.material,
            "coverage": method.coverage,
            "read": [{"path": path, "sha256": digest} for path, digest in read],
            "inputs": {},
            "choices": [dict(choice.said) for choice in self.choices],
            "said": list(SAID),
            "versions": {"coldwork": coldwork.__version__}
            | {name: version(name) for name in _COMPUTING},
        }

    def as_json(self) -> dict[str, Any]:
        """Give account and summary for a program to read; what is absent is null."""
        return self.account() | {"rows": [_plain(row) for row in self.summary.to_pylist()]}


def compare(
    folder: Path, varied: Sequence[str], into: Path | None = None, *, plots: bool = True
) -> Compared:
    """Evaluate a batch under other choices.

    Parameters
    ----------
    folder : Path
        The batch folder.
    varied : sequence of str
        ``KEY=V1,V2,...`` each; several make the full grid.
    into : Path, optional
        A new folder for tables, account and plot.
    plots : bool, optional
        Whether the plot is drawn there.

    Returns
    -------
    Compared
        What each choice moves.

    Raises
    ------
    BatchRefused
        If the batch cannot be trusted as a whole.
    UsageError
        If a key may not be varied or a choice makes no method.
    ResultsNotWritten
        If the folder is there already or cannot be written.
    """
    sheet = read_sheet(folder)
    method = method_of(sheet, folder)
    if method.both:
        message = (
            f"{method.batch_id} joins both routes, and comparing choices for those is not built. "
            'Compare them by one route: route = "indent" or "flow" in [strength].'
        )
        raise UsageError(message)
    choices = choices_of(read_sheet(folder), method, varied)
    batch, _ = gather(method)
    if into is None:
        return compared(batch, choices)
    with open_apart(into) as apart:
        found = compared(batch, choices, lambda table: apart.add("compare", table))
        apart.add("compare_choices", found.summary)
        if plots:
            for name, data in _drawn(found):
                apart.write(name, data)
        apart.commit(found.account())
    return found


def compared(batch: Gathered, choices: list[Choice], take: Take | None = None) -> Compared:
    """Evaluate reduced coupons under each choice, slice by slice.

    Parameters
    ----------
    batch : Gathered
        The batch, reduced.
    choices : list of Choice
        The sheet's own first.
    take : callable, optional
        Is given each slice of ``compare.csv``.

    Returns
    -------
    Compared
        With the summary.
    """
    runs = [_Run(batch, choice) for choice in choices]
    n = len(batch.coupons)
    moved = {q: [_Moved(n) for _ in choices] for q in QUANTITIES}
    for begin in range(0, n, _SLICE):
        rows = slice(begin, min(begin + _SLICE, n))
        figures = [run.figures(rows) for run in runs]
        for quantity, each in moved.items():
            for one, found in zip(each, figures, strict=True):
                one.keep(rows, found[quantity], figures[0][quantity])
        if take is not None:
            take(_slice_table(batch, rows, figures))
    return Compared(batch, choices, _summary(choices, moved))


class _Run:
    """A choice, ready to be evaluated."""

    def __init__(self, batch: Gathered, choice: Choice) -> None:
        method = with_readings(choice.method, batch.method)
        self._batch = replace(batch, method=method, findings=batch.findings.copied())
        self._inputs, self._spreads = inputs_of(method)

    def figures(self, rows: slice) -> Mapping[str, Figures]:
        batch = self._batch
        start, own = start_of(batch.method, batch.coupons, batch.reduced, batch.scatter, rows)
        spreads = {**self._spreads, **own}
        evaluated = evaluate(batch.method, self._inputs, spreads, start, _ENDS)
        find_in_slice(batch, rows, evaluated)
        return figures_of(evaluated, batch.findings.bits[rows])


class _Moved:
    """How far one choice moves one quantity of n coupons."""

    def __init__(self, n: int) -> None:
        self.ratio = np.full(n, np.nan)
        self.relative_u = np.full(n, np.nan)
        self.own_relative_u = np.full(n, np.nan)

    def keep(self, rows: slice, found: Figures, own: Figures) -> None:
        self.ratio[rows] = _ratio(found, own)
        with np.errstate(divide="ignore", invalid="ignore"):
            self.relative_u[rows] = found.combined.u / found.result.value
            self.own_relative_u[rows] = own.combined.u / own.result.value


def _ratio(found: Figures, own: Figures) -> _Floats:
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = found.result.value / own.result.value
    return np.where(np.isfinite(ratio), ratio, np.nan)


def _slice_table(
    batch: Gathered, rows: slice, figures: Sequence[Mapping[str, Figures]]
) -> pa.Table:
    """Build a slice of ``compare.csv``, choices one after the other for each coupon."""
    ids, m = batch.coupons.ids[rows], len(figures)
    n = len(ids)

    def flat(columns: list[_Floats]) -> "pa.Array[Any]":
        return pa.array(np.stack(columns, axis=1).ravel())

    each: NDArray[np.int64] = np.repeat(np.arange(n), m)
    columns: dict[str, Any] = {
        "coupon_id": ids.take(pa.array(each, pa.int64())),
        "choice_no": pa.array(np.tile(np.arange(m, dtype=np.int64), n)),
    }
    for name in QUANTITIES:
        unit = unit_of(name)
        here = [found[name] for found in figures]
        columns[name] = flat([from_si(x.result.value, unit) for x in here])
        columns[f"u_{name}"] = flat([from_si(x.combined.u, unit) for x in here])
        columns[f"ratio_{name}"] = flat([_ratio(x, here[0]) for x in here])
    return pa.table({name: columns[name] for name in contracts.load("out/compare").columns})


def _summary(choices: Sequence[Choice], moved: Mapping[str, Sequence[_Moved]]) -> pa.Table:
    rows = [
        {"choice_no": i, "choice": choice.label, "quantity": quantity, **_told(moved[quantity][i])}
        for quantity in QUANTITIES
        for i, choice in enumerate(choices)
    ]
    names = contracts.load("out/compare_choices").columns
    return pa.table({name: [row[name] for row in rows] for name in names})


def _told(one: _Moved) -> dict[str, object]:
    known = np.isfinite(one.ratio)
    ratio, u = one.ratio[known], one.own_relative_u[known]

    def of(values: _Floats, what: str) -> float:
        there = values[np.isfinite(values)]
        return float(getattr(np, what)(there)) if there.size else float("nan")

    return {
        "coupons": int(known.sum()),
        "median_ratio": of(ratio, "median"),
        "least_ratio": of(ratio, "min"),
        "greatest_ratio": of(ratio, "max"),
        "relative_u": of(one.own_relative_u, "median"),
        "relative_u_of_choice": of(one.relative_u, "median"),
        "beyond_u": int(np.count_nonzero(np.abs(ratio - 1.0) > u)),
    }


def _cells(row: Mapping[str, Any]) -> list[str]:
    median, least, greatest = (
        _ratio_text(_number(row[f"{name}_ratio"])) for name in ("median", "least", "greatest")
    )
    beyond = f"{row['beyond_u']} of {row['coupons']}"
    u = _percent(row["relative_u_of_choice"])
    return [f"{row['choice_no']:>6}", median, f"{least} to {greatest}", u, beyond]


def _percent(x: object) -> str:
    share = _number(x)
    return f"{100.0 * share:.3g} %" if isfinite(share) else "not known"


def _ratio_text(x: float) -> str:
    return f"{x:.4g}" if isfinite(x) else "none"


def _number(x: object) -> float:
    return x if isinstance(x, float) else float("nan")


def _plain(row: Mapping[str, Any]) -> dict[str, Any]:
    return {k: None if isinstance(x, float) and not isfinite(x) else x for k, x in row.items()}


def _drawn(found: Compared) -> Iterator[tuple[str, bytes]]:
    """Draw the summary; name and bytes of SVG and PNG."""
    from coldwork.contracts.frames import frame  # here: it brings pandas
    from coldwork.plots import Context, choices, save

    method = found.batch.method
    context = Context(method.batch_id, method.material, method.laws.route, method.coverage)
    table = frame(contracts.load("out/compare_choices"), found.summary)
    names = [choice.short for choice in found.choices]
    keys = [key for key, _ in found.choices[-1].said]
    figures = choices.draw({"compare_choices": table}, names, keys, context)
    digits = len(str(len(figures)))
    for number, figure in enumerate(figures, 1):
        stem = "choices" if len(figures) == 1 else f"choices-{number:0{digits}d}"
        svg, png = save(figure, stem)
        yield f"plots/{stem}.svg", svg
        yield f"plots/{stem}.png", png
