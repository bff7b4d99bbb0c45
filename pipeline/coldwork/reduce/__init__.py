"""Readings to one mean per coupon, with the rules that look at readings."""
