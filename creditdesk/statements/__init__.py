"""Statements of a borrower: lines, periods, subtotals, disclosure, checks."""
