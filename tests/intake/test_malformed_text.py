"""Malformed text files, each with its one verdict: which hazard, where, and what to do.

A verdict is `refused` (the batch is: where, words on the hazard and on the mending), `aside`
(lines that are set aside, each with the machine's own column and rule, and a hint) or `read`
(all is well: the values).
"""

from dataclasses import dataclass, field
from pathlib import Path

import pytest
from tests.intake.laid_out import LAYOUT, read, refusal

HEAD = (
    "bench record\npiece:;A\nby:;operator-1\nREADINGS FOLLOW\n"
    "no;weight;across;along;right;when\n;kgf;mm;mm;mm;\n"
)
ROWS = (
    "1;10;0,6009;0,5972;7,46;28.07.2026 07:50\n"
    "2;10;0,5990;0,5992;9,99;28.07.2026 07:51\n"
    "3;10;0,5951;0,6017;1.012,49;28.07.2026 07:53\n"
)
END = "average;10;0,5983;0,5994;;\nspread;0;0,0030;0,0023;;\n"
FILE = HEAD + ROWS + END
NO_ENDS = ('ends_before = ["average", "spread"]\n', "")
NO_SIGNS = ('decimal = ","\nthousands = "."\n', "")
NO_TIMES = ('times = "%d.%m.%Y %H:%M"\n', "")
UTF_8 = ('"cp1252"', '"utf-8"')
D1 = [600.9, 599.0, 595.1]
LOST = ("mean of d1_um", "standard deviation of d1_um", "standard deviation of d2_um")
"""What the printed lines say where the second row is not among the readings."""


@dataclass(frozen=True)
class Case:
    """One malformed file and its verdict."""

    name: str
    content: str | bytes
    changes: tuple[tuple[str, str], ...] = ()
    refused: tuple[str, ...] = ()
    aside: dict[int, tuple[str, str, str]] = field(default_factory=dict)
    d1: list[float] | None = None
    flags: tuple[str, ...] = ()

    @property
    def data(self) -> bytes:
        content = self.content
        return content if isinstance(content, bytes) else content.encode("cp1252")

    @property
    def layout(self) -> str:
        text = LAYOUT
        for old, new in self.changes:
            assert old in text
            text = text.replace(old, new)
        return text


def put(line: int, text: str) -> str:
    """Give the file with one line replaced, or put in before it where text ends with a feed."""
    lines = FILE.splitlines(keepends=True)
    if text.endswith("\n"):
        lines.insert(line - 1, text)
    else:
        lines[line - 1] = f"{text}\n"
    return "".join(lines)


def cell(place: int, raw: str, line: int = 8) -> str:
    """Give the file with one cell of a row replaced."""
    cells = FILE.splitlines()[line - 1].split(";")
    cells[place] = raw
    return put(line, ";".join(cells))


def not_a_number(column: str, words: str, line: int = 8) -> dict[int, tuple[str, str, str]]:
    return {line: (column, "not-a-number", words)}


CASES = [
    # decimal signs and thousands marks
    Case(
        "decimal point in a comma file",
        cell(2, "0.5990"),
        aside=not_a_number("across", "'.' must stand between groups of three digits"),
    ),
    Case(
        "decimal commas in a file that is said to have points",
        FILE,
        (('decimal = ","\nthousands = "."', 'decimal = "."'),),
        aside={
            7: ("across", "not-a-number", "decimal = ','"),
            8: ("across", "not-a-number", "decimal = ','"),
            9: ("across", "not-a-number", "decimal = ','"),
        },
    ),
    Case(
        "a thousands mark that is not declared",
        FILE,
        (('thousands = "."\n', ""),),
        aside=not_a_number("right", "thousands = '.'", 9),
    ),
    Case(
        "a group of two digits",
        cell(4, "1.01,2"),
        aside=not_a_number("right", "groups of three digits"),
    ),
    Case(
        "1.234 with both signs undeclared",
        cell(4, "1.234").replace("0,", "0.").replace("7,46", "7.46").replace("9,99", "9.99"),
        (NO_SIGNS,),
        refused=("f.txt, line 8, column right", "1.234 with a decimal point", "1234", "decimal ="),
    ),
    # what is no number
    Case(
        "a unit in the cell",
        cell(1, "10 kgf"),
        aside=not_a_number("weight", "leave out the unit"),
    ),
    Case("a plus sign", cell(4, "+9,99"), aside=not_a_number("right", "without the plus sign")),
    Case("a bound", cell(4, ">9,99"), aside=not_a_number("right", "a bound")),
    Case(
        "an error of a spreadsheet",
        cell(4, "#DIV/0!"),
        aside=not_a_number("right", "error of the spreadsheet"),
    ),
    Case(
        "a word for no value that is not declared",
        cell(4, "n/a"),
        aside=not_a_number("right", "leave the cell empty"),
    ),
    Case(
        "an empty cell where only --- is declared",
        cell(4, ""),
        (('["", "---"]', '["---"]'),),
        aside=not_a_number("right", "under absent"),
    ),
    Case("spaces around a number", cell(4, " 9,99"), aside=not_a_number("right", "padded = true")),
    Case(
        "digits of another script",
        cell(4, "٩").encode("utf-8"),
        (UTF_8,),
        aside=not_a_number("right", "the digits 0 to 9"),
    ),
    Case(
        "a cell of 10 MB",
        cell(4, "9" * 10_000_000),
        aside=not_a_number("right", "at most 40 characters"),
    ),
    Case(
        "a required value that is absent",
        cell(2, "---"),
        aside={8: ("across", "required-empty", "fill the cell")},
    ),
    Case(
        "an impossible value",
        cell(2, "-0,5990"),
        aside={8: ("across", "out-of-range", "it must be above 0")},
    ),
    # times
    Case(
        "a date that reads in two ways",
        FILE.replace("28.07.2026 07:5", "03/04/2026 07:5"),
        (NO_TIMES,),
        refused=("f.txt, line 7, column when", "3 April and 4 March", "times"),
    ),
    Case(
        "a time of another form",
        cell(5, "2026-07-28"),
        aside={8: ("when", "bad-time", "%d.%m.%Y %H:%M")},
    ),
    Case(
        "a day that does not exist",
        cell(5, "31.06.2026 07:51"),
        aside={8: ("when", "bad-time", "there is no such day")},
    ),
    # rows that are none, and rows of another width
    Case(
        "shifted columns",
        put(8, "2;10;;0,5990;0,5992;9,99;28.07.2026 07:51"),
        aside={8: ("", "row-width", "7 cells where the header has 6")},
        flags=LOST,
    ),
    Case(
        "a cell too few",
        put(8, "2;10;0,5990;0,5992;9,99"),
        aside={8: ("", "row-width", "5 cells where the header has 6")},
        flags=LOST,
    ),
    Case(
        "a line of means in the middle that nobody declared",
        put(9, "Mean;10;0,6000;0,5982;;\n"),
        refused=("f.txt, line 9", "'Mean'", "ends_before"),
    ),
    Case(
        "a line of means in the middle that closes the table",
        put(9, "average;10;0,6000;0,5982;;\n"),
        refused=("f.txt, line 10", "closes no table", "ends_before"),
    ),
    Case(
        "a line of means that begins with nothing",
        put(9, ";10;0,6000;0,5982;;\n"),
        refused=("f.txt, line 9", "begins with ''", "ends_before"),
    ),
    Case(
        "two tables in one file",
        FILE + FILE.replace("piece:;A", "piece:;B"),
        refused=("f.txt, line 12", "closes no table", "split the file"),
    ),
    Case(
        "two tables in one file, nothing below either",
        HEAD + ROWS + "REMARK\nREADINGS FOLLOW\n" + ROWS,
        (NO_ENDS,),
        refused=("f.txt, line 11", "line before the header stands again", "Split the file"),
    ),
    Case(
        "the header repeated halfway",
        put(9, "no;weight;across;along;right;when\n"),
        refused=("f.txt, line 9", "the header stands again", "Split the file"),
    ),
    Case(
        "a quote that is left open",
        cell(1, '"10'),
        refused=("f.txt, line 8", "still open", "Close the quote"),
    ),
    Case("quotes that close", cell(2, '"0,5990"'), d1=D1),
    # the header, the units line and what stands above
    Case(
        "a header name twice",
        FILE.replace("no;weight;across;along", "no;weight;across;across"),
        refused=("f.txt, line 5", "'across' stands 2 times", "cannot tell which"),
    ),
    Case(
        "a column that is missing",
        FILE.replace(";along;", ";alongside;"),
        refused=("f.txt, line 5", "no column 'along'", "nearest known name is 'alongside'"),
    ),
    Case(
        "a units line that lies",
        FILE.replace(";kgf;mm;mm", ";N;mm;mm"),
        refused=("f.txt, line 6, column weight", "says 'N' and the layout kgf", "unit = 'N'"),
    ),
    Case(
        "a units line that is a row",
        FILE.replace(";kgf;mm;mm;mm;\n", ""),
        refused=("f.txt, line 6, column weight", "says '10'", "units_line = false"),
    ),
    Case(
        "a label that is missing",
        FILE.replace("piece:;A\n", ""),
        refused=("f.txt", "the label 'piece:' does not stand", "fills coupon_id"),
    ),
    Case(
        "a label twice",
        FILE.replace("piece:;A\n", "piece:;A\npiece:;B\n"),
        refused=("f.txt, line 3", "'piece:' stands twice, first in f.txt, line 2", "Split"),
    ),
    Case(
        "a label without its value",
        FILE.replace("piece:;A", "piece:;"),
        refused=("f.txt, line 2", "no value stands after 'piece:'", "Write it there"),
    ),
    Case(
        "a value above in another unit than declared",
        FILE.replace("by:;operator-1\n", "by:;operator-1\nheld:;0,2;min\n"),
        (('operator = "by:"\n', 'operator = "by:"\ndwell_s = "held:"\n'),),
        refused=("f.txt, line 4", "says 'min' and the layout s", "unit = 'min'"),
    ),
    Case(
        "a coupon that is not listed",
        FILE.replace("piece:;A", "piece:;a"),
        aside=dict.fromkeys(
            (7, 8, 9), ("above: piece:", "unlisted-coupon", "coupons.csv lists 'A'")
        ),
    ),
    Case(
        "a table that does not begin",
        FILE.replace("READINGS FOLLOW", "READINGS"),
        refused=("f.txt", "no header stands after a line 'READINGS FOLLOW'", "Check the layout"),
    ),
    Case("an empty file", b"", refused=("f.txt", "is empty", "Check the layout and the file")),
    # ends of lines and of files
    Case(
        "mixed line ends",
        HEAD.replace("\n", "\r\n") + ROWS.replace("\n", "\r", 1) + END,
        d1=D1,
    ),
    Case(
        "a million blank lines",
        HEAD + "\n" * 500_000 + ROWS + "  \n" * 500_000 + END,
        d1=D1,
    ),
    Case("comments in between", put(8, "# lamp readjusted; 3;4\n"), d1=D1),
    Case(
        "a table that is not closed",
        HEAD + ROWS,
        refused=("f.txt", "the table is not closed", "may be cut off", "Export it again"),
    ),
    Case(
        "a cut-off last line",
        (HEAD + ROWS)[:-20],
        (NO_ENDS,),
        aside={9: ("", "row-width", "5 cells where the header has 6")},
    ),
    Case(
        "a last line that is cut off inside its last cell",
        (HEAD + ROWS)[:-4],
        (NO_ENDS,),
        aside={9: ("when", "cut-off", "last_line_open")},
    ),
    Case(
        "a last line without end where the machine writes none",
        (HEAD + ROWS)[:-1],
        (NO_ENDS, ("units_line = true", "units_line = true\nlast_line_open = true")),
        d1=D1,
    ),
    # means that are not ours
    Case(
        "a mean that is not ours",
        FILE.replace("0,5983", "0,5993"),
        d1=D1,
        flags=("mean of d1_um",),
    ),
    Case(
        "a scatter that is not ours",
        FILE.replace("0,0023", "0,0123"),
        d1=D1,
        flags=("standard deviation of d2_um",),
    ),
    # encodings
    Case(
        "UTF-8 in a file that is said to have one byte a character",
        FILE.replace("operator-1", "Prüfer").encode("utf-8"),
        refused=("f.txt, line 3", "PrÃ¼fer' in cp1252", "Prüfer' in UTF-8", "encoding = 'utf-8'"),
    ),
    Case(
        "one byte a character in a file that is said to be UTF-8",
        FILE.replace("operator-1", "Prüfer"),
        (UTF_8,),
        refused=("f.txt, line 3", "(0xfc) is no utf-8", "encoding"),
    ),
    Case(
        "a wrong byte order mark",
        b"\xfe\xff" + FILE.encode("utf-16-be"),
        (('"cp1252"', '"utf-16-le"'),),
        refused=("f.txt, line 1", "mark of utf-16-be", "utf-16-le"),
    ),
    Case(
        "UTF-16 without its mark",
        FILE.encode("utf-16-le"),
        (('"cp1252"', '"utf-16"'),),
        refused=("f.txt, line 1", "no byte order mark", "bench record"),
    ),
    Case(
        "UTF-16 that is said to be a code page",
        b"\xff\xfe" + FILE.encode("utf-16-le"),
        refused=("f.txt, line 1", "mark of utf-16-le", "cp1252"),
    ),
    Case(
        "control characters where a code page was meant",
        FILE.replace("operator-1", "operator–1"),
        (('"cp1252"', '"latin-1"'),),
        refused=("f.txt, line 3", "0x96", "'–' in cp1252"),
    ),
    Case(
        "a NUL",
        cell(2, "0,5\x00990"),
        refused=("f.txt", "holds a NUL", "line 8", "damaged"),
    ),
]  # fmt: skip


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
@pytest.mark.parametrize("block_bytes", [2 << 20, 40])
def test_each_has_its_one_verdict(tmp_path: Path, case: Case, block_bytes: int) -> None:
    if len(case.data) > 10_000 > block_bytes:
        return  # a verdict does not hang on where a block ends; the large ones take too long
    if case.refused:
        causes = refusal(tmp_path, case.data, case.layout, block_bytes=block_bytes)
        assert [words for words in case.refused if words not in causes[0]] == [], causes
        where = case.refused[0].partition(", column")[0]
        assert all(cause.startswith(where) for cause in causes)  # all of the one hazard
        return
    found = read(tmp_path, case.data, case.layout, block_bytes=block_bytes)
    told = {row["line"]: row for row in found.aside}
    assert set(told) == set(case.aside)
    for line, (column, rule, words) in case.aside.items():
        row = told[line]
        assert (row["column"] or "", row["rule"]) == (column, rule)
        assert words in row["hint"]
    if case.d1 is not None:
        assert [row["d1_um"] for row in found.rows] == case.d1
    flagged = [one.found.words for one in found.printed]
    if case.d1 is not None or case.flags:
        assert len(flagged) == len(case.flags), flagged
        for words, flag in zip(case.flags, flagged, strict=True):
            assert words in flag


def test_there_are_enough_of_them() -> None:
    assert len({case.name for case in CASES}) == len(CASES) >= 40


def test_the_file_that_all_are_made_from_is_sound(tmp_path: Path) -> None:
    found = read(tmp_path, FILE.encode("cp1252"))
    assert [row["d1_um"] for row in found.rows] == D1
    assert found.aside == []
    assert found.printed == []
