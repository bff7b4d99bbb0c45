"""Workbooks, looked at before they are believed.

`package` opens the zip within limits, `walk` reads XML that may be hostile, `xlsx` and
`ods` find out from it what stands where and what a value alone would not tell (formulas,
errors, merged cells, what is hidden), `grid` holds that, and `book` puts it beside the
values that python-calamine reads, cell against cell.
"""
