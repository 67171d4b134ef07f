"""Yes, no and unknown: comparisons and connectives over 1.0, 0.0 and nan.

Connectives follow Kleene's strong three-valued logic (S. C. Kleene, Introduction to Metamathematics, 1952, section
64): an unknown part leaves the whole unknown only where its truth would matter.
"""

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from creditdesk.formula.values import Value

COMPARE: Mapping[str, Callable[[Any, Any], Any]] = {
    "<": np.less,
    "<=": np.less_equal,
    ">": np.greater,
    ">=": np.greater_equal,
    "==": np.equal,
    "!=": np.not_equal,
}


def compare(operator: str, left: Value, right: Value) -> Value:
    """Compare two numbers; unknown where either is."""
    unknown = np.isnan(left) | np.isnan(right)
    return np.where(unknown, np.nan, COMPARE[operator](left, right))


def compare_text(operator: str, held: str | None, text: str) -> float:
    """Compare a text with the one a name holds; None, the unknown text, leaves the answer unknown."""
    if held is None:
        return float("nan")
    return float((held == text) is (operator == "=="))


def both(left: Value, right: Value) -> Value:
    """Join with *and*: no if either is no, else unknown if either is unknown, else yes."""
    return np.where(np.equal(left, 0.0) | np.equal(right, 0.0), 0.0, np.multiply(left, right))


def either(left: Value, right: Value) -> Value:
    """Join with *or*: yes if either is yes, else unknown if either is unknown, else no."""
    return np.where(np.equal(left, 1.0) | np.equal(right, 1.0), 1.0, np.add(left, right))


def choose(condition: Value, if_true: Value, if_false: Value) -> Value:
    """Take one of two values by a condition; unknown where the condition is."""
    return np.where(np.isnan(condition), np.nan, np.where(np.equal(condition, 1.0), if_true, if_false))
