"""The safe formula language of ratios, rules and typed sums."""
