"""Looking at a text file."""

from collections.abc import Sequence
from typing import Final

from coldwork.inputs.words import shown
from coldwork.jobs.looks.encodings import EncodingLook, decoded, look_at_encoding
from coldwork.jobs.looks.ends import Ends
from coldwork.jobs.looks.seen import Entry, Oddity, Seen
from coldwork.jobs.looks.shape import Shape, best_delimiter, closes, find_shape, split
from coldwork.jobs.looks.signs import is_number
from coldwork.jobs.looks.table import add_table, closing_words, labels_in

__all__ = ["look_at_text"]

_MOST_ODD: Final = 20
_LONGEST_LINE: Final = 20_000  # characters
_COMMENTS: Final = ("#", "//", "%", "!", "*")
_LAST: Final = 40  # lines at the end that may close the table


def look_at_text(seen: Seen, ends: Ends) -> None:
    """Add what begin and end of a text file show.

    Parameters
    ----------
    seen : Seen
        Where to add it.
    ends : Ends
        The bytes.
    """
    encoding = look_at_encoding(ends)
    head, tail = _texts(ends, encoding)
    lines, last = _lines(head), _lines(tail)
    if not ends.whole:
        last = last[1:]  # begins somewhere in a line
        lines = lines[:-1] if len(lines) > 1 else lines
    if _is_binary(head):
        seen.facts.append(("content", "no text: more than one character in a hundred is a control"))
        return
    _add_encoding(seen, encoding)
    _add_line_ends(seen, head)
    odd = list(_odd_bytes(lines))
    comment = _comment(lines)
    bare = [line if not (comment and line.startswith(comment)) else "" for line in lines]
    delimiter = best_delimiter(bare)
    seen.kind = "text" if delimiter or lines else "unknown"
    if delimiter is None:
        seen.facts.append(("delimiter", "no lines of cells that look like a table of numbers"))
        seen.oddities = odd[:_MOST_ODD]
        return
    seen.facts.append(("delimiter", delimiter))
    seen.form.append(Entry("delimiter", delimiter))
    if comment:
        seen.form.append(Entry("comment", comment, "lines that begin so are passed over"))
    rows = [split(line, delimiter) if line.strip() else [] for line in bare]
    shape = find_shape(rows)
    if shape is not None:
        _add_shape(seen, lines, rows, shape, delimiter)
        closers = (
            rows[shape.last + 1 :] if ends.whole else [split(line, delimiter) for line in last]
        )
        _add_closing(seen, closers[-_LAST:], rows[shape.first], delimiter)
        odd += _odd_rows(rows, lines, shape, len(rows) if not ends.whole else shape.last + 1)
        add_table(seen, rows, shape, text=True)
    if (tail or head) and not (tail or head).endswith(("\n", "\r")):
        note = "the last line has no line end: say true if a whole file ends so, else it is cut off"
        seen.form.append(Entry("last_line_open", value=False, note=note, decide=True))
        odd.append(Oddity("the last line", "it has no line end, as if the file were cut off"))
    seen.oddities = odd[:_MOST_ODD]


def _texts(ends: Ends, look: EncodingLook) -> tuple[str, str]:
    head = decoded(ends.head, look)
    tail = ends.tail
    if look.codec.startswith("utf-16") and (ends.size - len(tail)) % 2:
        tail = tail[1:]
    return head, tail.decode(look.codec, "replace")


def _is_binary(text: str) -> bool:
    controls = sum(ord(char) < 32 and char not in "\t\r\n\f" for char in text)
    return 100 * controls > len(text)


def _lines(text: str) -> list[str]:
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    return lines[:-1] if lines and not lines[-1] else lines


def _add_encoding(seen: Seen, look: EncodingLook) -> None:
    seen.facts.append(("encoding", f"{look.chosen} ({look.why})"))
    for name, reading in look.candidates:
        seen.facts.append((f"  in {name}", reading))
    note = "several are possible: see above how each reads" if not look.sure else look.why
    seen.form.append(Entry("encoding", look.chosen, note, decide=not look.sure))


def _add_line_ends(seen: Seen, head: str) -> None:
    both = head.count("\r\n")
    counts = {"CRLF": both, "LF": head.count("\n") - both, "CR": head.count("\r") - both}
    found = [f"{name} ({count})" for name, count in counts.items() if count]
    seen.facts.append(("line ends", ", ".join(found) or "none"))


def _comment(lines: Sequence[str]) -> str:
    """Give the mark of comments that stand among or over the rows, if lines begin with one."""
    for mark in _COMMENTS:
        if any(line.startswith(mark) for line in lines):
            return mark
    return ""


def _add_shape(
    seen: Seen, lines: Sequence[str], rows: Sequence[Sequence[str]], shape: Shape, delimiter: str
) -> None:
    if shape.header is None:
        seen.facts.append(("header", "no line over the rows names the columns"))
        note = "which line names the columns? a layout needs one"
        seen.form.append(Entry("header_line", shape.first or 1, note, decide=True))
        return
    seen.facts.append(("header", f"line {shape.header + 1}: {shown(lines[shape.header])}"))
    before = [place for place in range(shape.header) if lines[place].strip()]
    if before:
        mark = [cell for cell in rows[before[-1]] if cell.strip()]
        note = ""
        if len(mark) == 1 or delimiter == "spaces":
            words = shown(lines[before[-1]].strip())
            note = f"or table_starts_after = {words}, where its number changes"
        seen.form.append(Entry("header_line", shape.header + 1, note))
    above = [[line.strip()] for line in lines[: shape.header]]
    if delimiter != "spaces":
        above = [list(row) for row in rows[: shape.header]]
    seen.above = labels_in(above)
    if shape.units is not None:
        seen.facts.append(("units", f"line {shape.units + 1}: {shown(lines[shape.units])}"))
        seen.form.append(Entry("units_line", value=True))


def _add_closing(
    seen: Seen, closers: Sequence[Sequence[str]], first: Sequence[str], delimiter: str
) -> None:
    words = closing_words(closers, lead_is_number=bool(first) and is_number(first[0]))
    if words:
        seen.facts.append(("below the table", ", ".join(shown(word) for word in words)))
        note = "these lines close the table; each is kept"
        note += ", and means and scatters are compared"
        seen.form.append(Entry("ends_before", words, note, decide=delimiter == "spaces"))


def _odd_bytes(lines: Sequence[str]) -> list[Oddity]:
    found = []
    for number, line in enumerate(lines, 1):
        if len(line) > _LONGEST_LINE:
            found.append(Oddity(f"line {number}", f"it has {len(line)} characters"))
        elif any(ord(char) < 32 and char != "\t" for char in line):
            found.append(Oddity(f"line {number}", f"it holds control characters: {shown(line)}"))
        elif "\N{REPLACEMENT CHARACTER}" in line:
            what = f"bytes that are no text in this encoding: {shown(line)}"
            found.append(Oddity(f"line {number}", what))
    return found[:_MOST_ODD]


def _odd_rows(
    rows: Sequence[Sequence[str]], lines: Sequence[str], shape: Shape, end: int
) -> list[Oddity]:
    """Find lines among the readings that are unlike them."""
    lead = is_number(rows[shape.first][0])
    found = []
    for place in range(shape.first, end):
        row = rows[place]
        where = f"line {place + 1}"
        if not row:
            continue
        if len(row) != shape.width:
            what = f"{len(row)} cells instead of {shape.width}: {shown(lines[place])}"
            found.append(Oddity(where, what))
        elif shape.header is not None and row == rows[shape.header]:
            found.append(Oddity(where, "the header stands again"))
        elif not any(map(is_number, row)) or closes(row, lead_is_number=lead):
            found.append(Oddity(where, f"it does not look like a reading: {shown(lines[place])}"))
    return found[:_MOST_ODD]
