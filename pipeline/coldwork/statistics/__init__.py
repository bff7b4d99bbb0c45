"""Student, pooling, outlying values and rounding: arrays only, like the formulas."""
