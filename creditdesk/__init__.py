"""Assess one borrower at a time: statements in, probability of default with its reasons, signed memo out."""

__version__ = "0.1.0"
