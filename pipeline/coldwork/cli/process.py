"""`coldwork process`."""

import sys
from enum import StrEnum
from pathlib import Path
from time import monotonic
from typing import TYPE_CHECKING, Annotated, Final

import typer

from coldwork.cli.reporting import note, reporting, show, show_json
from coldwork.errors import ColdworkError, Exit
from coldwork.statistics.rounding import counted

if TYPE_CHECKING:
    from collections.abc import Mapping

    from coldwork.jobs.run import Outcome

__all__ = ["process"]

_RULES_NAMED: Final = 3  # of one level in the words for a person
_QUIET: Final = 5.0  # between two lines of progress that are not written over [s]


class Accepted(StrEnum):
    """What `--accept` can call fine."""

    SET_ASIDE = "set-aside"
    UNDECIDED = "undecided"
    NON_CONFORMING = "non-conforming"
    ERRORS = "errors"
    INCOMPLETE = "incomplete"


def process(
    batches: Annotated[list[Path], typer.Argument(metavar="BATCH...", help="Batch folders.")],
    *,
    into: Annotated[Path, typer.Option("--into", metavar="DIR", help="Folder of all results.")],
    replace: Annotated[
        bool, typer.Option("--replace", help="Move an existing result to DIR/replaced/.")
    ] = False,
    reason: Annotated[
        str | None, typer.Option(metavar="TEXT", help="Why it is replaced; goes into the manifest.")
    ] = None,
    accept: Annotated[
        list[Accepted] | None,
        typer.Option(
            help="What is fine and need not end with 3; may be repeated. An incomplete coupon "
            "has no density, or no interval of it."
        ),
    ] = None,
    plots: Annotated[bool, typer.Option("--plots/--no-plots", help="Draw the QC plots.")] = True,
    json: Annotated[bool, typer.Option("--json", help="Outcome for a program to read.")] = False,
) -> None:
    """Process batches: every coupon to density, stored energy, uncertainty and decision."""
    with reporting():
        if replace != bool(reason and reason.strip()):
            note("--replace and --reason TEXT go together: say why a result is replaced")
            raise typer.Exit(Exit.USAGE)
        from coldwork.jobs.run import run

        fine = {word.value for word in accept or ()}
        worst, outcomes = Exit.DONE, []
        for batch in batches:
            try:
                outcome = run(
                    batch,
                    into,
                    replace=replace,
                    reason=reason,
                    plots=plots,
                    progress=Teller(batch.name),
                )
            except ColdworkError as error:
                if len(batches) == 1:
                    raise
                note(str(error))
                worst = _graver(worst, error.exit)
                continue
            outcomes.append(outcome)
            asks = set(outcome.attention) - fine
            worst = _graver(worst, Exit.ATTENTION if asks else Exit.DONE)
            if not json:
                show(str(outcome.path))
            note(_words(outcome, asks))
        if json:
            show_json([_document(outcome) for outcome in outcomes])
        if worst is not Exit.DONE:
            raise typer.Exit(worst)


def _graver(a: Exit, b: Exit) -> Exit:
    """Give the graver of two exit codes: internal, not written, refused, usage, attention."""
    order = (Exit.DONE, Exit.ATTENTION, Exit.USAGE, Exit.REFUSED, Exit.NOT_WRITTEN, Exit.INTERNAL)
    return max(a, b, key=order.index)


def _words(outcome: "Outcome", asks: set[str]) -> str:
    counts = [
        counted(outcome.coupons, "coupon"),
        f"{counted(outcome.readings_read, 'reading')} read, {outcome.readings_used} used, "
        f"{outcome.readings_set_aside} set aside",
    ]
    if any(outcome.decisions.values()):
        counts.append(", ".join(f"{n} {word}" for word, n in outcome.decisions.items()))
    flags = ", ".join(_flags(level, rules) for level, rules in outcome.flags.items())
    counts += [f"flags: {flags or 'none'}", f"plots: {outcome.plots}"]
    lines = [f"{outcome.batch_id}: " + "; ".join(counts)]
    if asks:
        told = ", ".join(_asking(word, outcome.attention[word]) for word in sorted(asks))
        lines.append(f"{outcome.batch_id}: asks for a person: {told}")
    return "\n".join(lines)


def _asking(word: str, n: int) -> str:
    return f"{n} {word}" if word != "errors" else f"{n} with errors"


def _flags(level: str, rules: "Mapping[str, int]") -> str:
    """Count the findings of a level, and name the rules that have most of them."""
    n = sum(rules.values())
    words = f"{n} of information" if level == "information" else counted(n, level)
    named = [f"{count} {rule}" for rule, count in list(rules.items())[:_RULES_NAMED]]
    more = ", ..." if len(rules) > len(named) else ""
    return f"{words} ({', '.join(named)}{more})"


def _document(outcome: "Outcome") -> dict[str, object]:
    return {
        "path": str(outcome.path),
        "batch_id": outcome.batch_id,
        "coupons": outcome.coupons,
        "readings": {
            "read": outcome.readings_read,
            "used": outcome.readings_used,
            "set_aside": outcome.readings_set_aside,
        },
        "flags": {level: dict(rules) for level, rules in outcome.flags.items()},
        "decisions": dict(outcome.decisions),
        "attention": outcome.attention,
        "plots": outcome.plots,
    }


class Teller:
    """Progress: one line that is written over on a terminal, a plain line now and then elsewhere.

    Parameters
    ----------
    name : str
        What is being worked.
    """

    def __init__(self, name: str) -> None:
        self._name = name
        self._next = monotonic() + _QUIET
        self._terminal = sys.stderr.isatty()

    def __call__(self, words: str) -> None:
        """Tell what is being done."""
        if self._terminal:
            typer.echo(f"\r\x1b[K{self._name}: {words}\r", err=True, nl=False)
        elif monotonic() >= self._next:
            self._next = monotonic() + _QUIET
            note(f"{self._name}: {words}")
