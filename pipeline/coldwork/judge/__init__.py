"""Coupon and batch rules to flags; limits to decisions."""
