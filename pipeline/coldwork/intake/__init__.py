"""A batch's tables, from bytes to typed columns and what was set aside.

`files` cuts a file into whole lines and digests it, `quotes` and `header` look at what
they say, `text` turns them into blocks of cells with file and line, `numbers` and
`times` hold the grammar, `column` applies a contract to one column, and `coupons`,
`exclusions` and `readings` give what the rest of the package works with. No cell is
guessed at: what cannot be read is set aside or refuses the batch.
"""
