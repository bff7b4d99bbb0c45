"""Look at an unknown file: how it is written, and a layout to start from. Nothing is processed."""

from dataclasses import dataclass
from pathlib import Path
from typing import Final

from coldwork.jobs.looks.book import look_at_book
from coldwork.jobs.looks.draft import DECIDE, Draft, draft_of
from coldwork.jobs.looks.ends import Ends, printable, read_ends
from coldwork.jobs.looks.seen import Seen
from coldwork.jobs.looks.text import look_at_text

__all__ = ["Inspected", "inspect"]

_BOOKS: Final = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")
_MARGIN: Final = 18


@dataclass(frozen=True)
class Inspected:
    """What was seen of a file, and the draft of a layout.

    Attributes
    ----------
    seen : Seen
        What was seen.
    ends : Ends
        What was read of the file.
    draft : Draft or None
        None where no table was found.
    """

    seen: Seen
    ends: Ends
    draft: Draft | None

    def text(self) -> str:
        """Say it for a person, as one TOML text: what was seen in comments, then the layout."""
        seen = self.seen
        lines = [
            f"{seen.name}, {seen.size} bytes, {seen.kind}",
            "From coldwork inspect: a look, and a layout to start from. Nothing was processed.",
        ]
        if self.draft is not None and self.draft.decisions:
            count = len(self.draft.decisions)
            lines.append(
                f"Each of the {count} marks {DECIDE} asks for a person; the rest was seen."
            )
        if not self.ends.whole and seen.kind != "workbook":
            lines.append(
                f"Only the first {len(self.ends.head)} and the last {len(self.ends.tail)} bytes "
                "were looked at."
            )
        lines.append("")
        lines += [f"{subject.ljust(_MARGIN)}{words}" for subject, words in seen.facts]
        for oddity in seen.oddities:
            lines.append(f"{'suspicious'.ljust(_MARGIN)}{oddity.where}: {oddity.what}")
        head = "\n".join(f"# {line}".rstrip() for line in lines)
        if self.draft is None:
            return f"{head}\n#\n# No table was found, so there is no layout to start from."
        return f"{head}\n\n{self.draft.text}".rstrip()

    def as_json(self) -> dict[str, object]:
        """Say it for a program."""
        seen, draft = self.seen, self.draft
        return {
            "file": seen.name,
            "bytes": seen.size,
            "looked_at": {"begin": len(self.ends.head), "end": len(self.ends.tail)},
            "kind": seen.kind,
            "facts": [{"subject": s.strip(), "words": words} for s, words in seen.facts],
            "form": {entry.key: entry.value for entry in seen.form},
            "above": [{"label": label, "value": value} for label, value in seen.above],
            "columns": [
                {"name": c.name, "unit": c.unit, "samples": list(c.samples), "numbers": c.numbers}
                for c in seen.columns
            ],
            "suspicious": [{"where": o.where, "what": o.what} for o in seen.oddities],
            "decisions": [
                {"key": key, "question": question}
                for key, question in (draft.decisions if draft else ())
            ],
            "layout": draft.text if draft else None,
        }


def inspect(path: Path) -> Inspected:
    """Look at a file.

    Parameters
    ----------
    path : Path
        A text file or a workbook; of a text file only begin and end are read.

    Returns
    -------
    Inspected

    Raises
    ------
    UsageError
        If there is no such file, or it cannot be read.
    """
    ends = read_ends(path)
    seen = Seen(printable(path.name), ends.size)
    if ends.head.startswith(_BOOKS):
        look_at_book(seen, path)
    elif ends.head:
        look_at_text(seen, ends)
    else:
        seen.facts.append(("content", "the file is empty"))
    return Inspected(seen, ends, draft_of(seen))
