"""Looking at a file that nobody has described yet; nothing here processes anything.

`ends` reads begin and end of a file, `encodings` and `shape` say how it is written,
`signs` and `columns` what its cells may mean, `text` and `book` put that together, and
`draft` writes a layout to start from, with a mark on whatever a person must decide.
"""
