"""Results: a coupon's record, results to disk, whole or not at all, and results read back."""
