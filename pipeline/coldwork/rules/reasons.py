"""Why readings are set aside. A reading is set aside by one of these and never dropped."""

from typing import Final

from coldwork.rules.rule import Reason

__all__ = [
    "BAD_TIME",
    "BALL_MISSING",
    "CELL_ERROR",
    "CUT_OFF",
    "DATE_IN_CELL",
    "EXCLUDED",
    "FORMULA_WITHOUT_VALUE",
    "HIDDEN_ROW",
    "IMPOSSIBLE_INDENT",
    "MERGED_CELL",
    "NOT_A_NUMBER",
    "OUT_OF_RANGE",
    "REASONS",
    "REPEATED_READING",
    "REQUIRED_EMPTY",
    "ROW_WIDTH",
    "SHALLOW_INDENT",
    "SHOWN_OTHERWISE",
    "UNKNOWN_SCALE",
    "UNLISTED_COUPON",
]

_GRAMMAR: Final = "number grammar of the in-tables (README)"
_TIDY: Final = "contract of the table"
_BOOK: Final = "cells of a workbook count as they are stored and shown (README)"

ROW_WIDTH: Final = Reason(
    "row-width",
    "the row has more or fewer cells than the header",
    "look for a missing or an unquoted comma in this row",
    _TIDY,
)
CUT_OFF: Final = Reason(
    "cut-off",
    "the file ends in the middle of this line, which may be cut off",
    "export the file again, or say last_line_open = true in its layout if it always ends so",
    "layout of the file",
)
HIDDEN_ROW: Final = Reason(
    "hidden-row",
    "the row is hidden in the workbook",
    "show the row if it counts, or delete it",
    _BOOK,
)
MERGED_CELL: Final = Reason(
    "merged-cell",
    "the cell is merged with others, so that it is not this row's alone",
    "unmerge the cells and fill each of them",
    _BOOK,
)
FORMULA_WITHOUT_VALUE: Final = Reason(
    "formula-without-value",
    "the cell holds a formula without a value, or with one that the workbook calls outdated",
    "open the workbook with a spreadsheet program, let it work out the formulas, and save it",
    _BOOK,
)
CELL_ERROR: Final = Reason(
    "cell-error",
    "the cell holds an error of the spreadsheet",
    "mend the formula, or empty the cell",
    _BOOK,
)
DATE_IN_CELL: Final = Reason(
    "date-in-cell",
    "the cell holds a date or a time where none belongs",
    "type what was meant again; spreadsheets turn 3-5 and 3.5 into days",
    _BOOK,
)
SHOWN_OTHERWISE: Final = Reason(
    "shown-otherwise",
    "the cell's format shows another value than it stores",
    "format the cell as General and look at what it holds; keep names as text",
    _BOOK,
)
UNLISTED_COUPON: Final = Reason(
    "unlisted-coupon",
    "the coupon is not listed in coupons.csv",
    "add the coupon to coupons.csv, or correct its name here",
    _TIDY,
)
REQUIRED_EMPTY: Final = Reason(
    "required-empty",
    "a cell that must be filled is empty",
    "fill the cell; an indent needs its hardness, or the diagonals that its scale is read by",
    _TIDY,
)
NOT_A_NUMBER: Final = Reason(
    "not-a-number",
    "the cell is not a number",
    "write a plain decimal number such as 183.1, -0.5 or 1.2E-4, without unit or separator",
    _GRAMMAR,
)
OUT_OF_RANGE: Final = Reason(
    "out-of-range",
    "the value is outside the range that the contract allows",
    "check the unit of the column and the decimal point",
    _TIDY,
)
BAD_TIME: Final = Reason(
    "bad-time",
    "the time is not an ISO 8601 time that exists once in its zone",
    "write it as 2026-07-31T14:05:00+02:00",
    "ISO 8601-1:2019",
)
UNKNOWN_SCALE: Final = Reason(
    "unknown-scale",
    "the hardness scale is not HV, HBW or HK",
    "write HV, HBW or HK; the force stands in its own column",
    "ISO 6507-1, ISO 6506-1, ISO 4545-1",
)
BALL_MISSING: Final = Reason(
    "ball-missing",
    "a Brinell reading has no ball diameter",
    "fill ball_mm",
    "ISO 6506-1, definition of HBW",
)
IMPOSSIBLE_INDENT: Final = Reason(
    "impossible-indent",
    "the ball cannot have made this indent: it is as wide as the ball or wider",
    "check ball_mm, the diameters and the force",
    "ISO 6506-1, definition of HBW (the indent is a cap of the ball)",
)
EXCLUDED: Final = Reason(
    "excluded",
    "a named person took the reading out",
    "see exclusions.csv for the person, the time and the reason",
    "exclusions.csv of the batch",
)
REPEATED_READING: Final = Reason(
    "repeated-reading",
    "the coupon already has a reading of this number",
    "number the readings of a coupon without repeats; the first one was used",
    _TIDY,
)
SHALLOW_INDENT: Final = Reason(
    "shallow-indent",
    "the indent is less than 0.2 um deep, where the law of the size effect no longer holds",
    "indent with a larger force",
    "W. D. Nix, H. Gao, J. Mech. Phys. Solids 46 (1998) 411; the depth is common practice",
)

REASONS: Final = (
    ROW_WIDTH,
    CUT_OFF,
    HIDDEN_ROW,
    MERGED_CELL,
    FORMULA_WITHOUT_VALUE,
    CELL_ERROR,
    DATE_IN_CELL,
    SHOWN_OTHERWISE,
    UNLISTED_COUPON,
    REQUIRED_EMPTY,
    NOT_A_NUMBER,
    OUT_OF_RANGE,
    BAD_TIME,
    UNKNOWN_SCALE,
    BALL_MISSING,
    IMPOSSIBLE_INDENT,
    EXCLUDED,
    REPEATED_READING,
    SHALLOW_INDENT,
)
