"""Ratios with a value or a reason why there is none."""
