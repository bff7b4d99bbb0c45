"""What text files and workbooks share: columns with samples, labels, words, closing lines."""

import re
from collections.abc import Sequence
from typing import Final

from coldwork.inputs.words import listed, shown
from coldwork.jobs.looks.seen import Entry, Seen, SeenColumn
from coldwork.jobs.looks.shape import Shape, closes
from coldwork.jobs.looks.signs import (
    absent_words,
    is_number,
    look_at_signs,
    look_at_times,
)

__all__ = ["add_table", "closing_words", "labels_in"]

_SAMPLES: Final = 4
_MOST_CLOSING: Final = 8
_CELLS: Final = 2000  # of a column that are looked at
_LABEL: Final = re.compile(r"[^\W\d_][^:=]{0,59}[:=]")


def add_table(seen: Seen, rows: Sequence[Sequence[str]], shape: Shape, *, text: bool) -> None:
    """Add what the rows of a table show.

    Parameters
    ----------
    seen : Seen
        Where to add it.
    rows : sequence of rows of cells
        From the begin of the file, or the sheet.
    shape : Shape
        Where the table stands among them.
    text : bool
        Whether numbers are text, so that their signs matter.
    """
    readings = [row for row in rows[shape.first : shape.last + 1] if len(row) == shape.width]
    readings = readings[:_CELLS]
    columns = [[row[place] for row in readings] for place in range(shape.width)]
    header = rows[shape.header] if shape.header is not None else [""] * shape.width
    units = rows[shape.units] if shape.units is not None else [""] * shape.width
    padded = any(cell != cell.strip(" \t") for cells in (header, *columns) for cell in cells)
    if padded:
        header = [cell.strip(" \t") for cell in header]
    for place, cells in enumerate(columns):
        samples = tuple(dict.fromkeys(cell for cell in cells if cell.strip()))[:_SAMPLES]
        numbers = 2 * sum(map(is_number, cells)) > sum(bool(cell.strip()) for cell in cells) > 0
        seen.columns.append(SeenColumn(header[place], units[place].strip(), samples, numbers))
    numeric = [place for place, column in enumerate(seen.columns) if column.numbers]
    seen.signs = look_at_signs(cell for place in numeric for cell in columns[place])
    times = {place: look_at_times(cells) for place, cells in enumerate(columns)}
    seen.times = {place: look for place, look in times.items() if look is not None}
    if text:
        _add_signs(seen)
    _add_times(seen)
    _add_words(seen, [columns[place] for place in numeric])
    if padded:
        seen.form.append(Entry("padded", value=True, note="cells are filled up with spaces"))


def labels_in(rows: Sequence[Sequence[str]]) -> list[tuple[str, str]]:
    """Find labels over a table and their values: a cell and the next, or one cell of both."""
    found = []
    for row in rows:
        for place, cell in enumerate(row):
            match = _LABEL.match(cell.strip())
            if match is None or is_number(cell):
                continue
            rest = cell.strip()[match.end() :].strip()
            value = rest or (row[place + 1].strip() if place + 1 < len(row) else "")
            if value:
                found.append((match[0], value))
    return found


def closing_words(rows: Sequence[Sequence[str]], *, lead_is_number: bool) -> list[str]:
    """Give the first cells of rows that close a table rather than belong to it.

    Parameters
    ----------
    rows : sequence of rows of cells
        The last rows of the file, those after the last reading included.
    lead_is_number : bool
        Whether rows of readings begin with a number.
    """
    words = [row[0].strip() for row in rows if closes(row, lead_is_number=lead_is_number)]
    plain = [word for word in dict.fromkeys(words) if word.isprintable()]
    return plain[:_MOST_CLOSING]


def _add_signs(seen: Seen) -> None:
    signs = seen.signs
    if signs.decimal is not None:
        note = f"as in {shown(signs.sample)}"
        if not signs.sure:
            note = f"can {shown(signs.sample)} be read so?"
        seen.form.append(Entry("decimal", signs.decimal, note, decide=not signs.sure))
        if signs.thousands is not None:
            note = "between groups of three digits"
            seen.form.append(Entry("thousands", signs.thousands, note, decide=not signs.sure))
    word = {".": "the point", ",": "the comma", None: "no number has decimals"}[signs.decimal]
    doubt = "" if signs.sure else f"; {shown(signs.sample)} can be read in two ways"
    seen.facts.append(("decimal sign", word + doubt))


def _add_times(seen: Seen) -> None:
    forms = {look.form: look for look in seen.times.values() if look.form is not None}
    for form, look in list(forms.items())[:1]:
        note = f"as in {shown(look.sample)}"
        if not look.sure:
            note += "; day and month could change places"
        seen.form.append(Entry("times", form, note, decide=not look.sure))
    if len(forms) > 1:
        seen.facts.append(("times", f"come in several forms: {listed([f'{f}' for f in forms])}"))


def _add_words(seen: Seen, numeric: Sequence[Sequence[str]]) -> None:
    words = list(dict.fromkeys(word for cells in numeric for word in absent_words(cells)))
    if words:
        note = "words among numbers: do they stand for no value?"
        seen.form.append(Entry("absent", ["", *words], note, decide=True))
