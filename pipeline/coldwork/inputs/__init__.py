"""What goes into the chain: numbers with their uncertainty, and the sheet that names them.

`quantity` holds one input, `method` the frozen method that a batch is worked
by, `sheet` reads `batch.toml` into it.
"""
