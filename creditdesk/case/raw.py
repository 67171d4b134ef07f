"""Take raw tables of a file for what they are: a check bears any content, and skips what has another type."""

import math
from collections.abc import Mapping, Sequence

from creditdesk.house.decode import Table


def table_of(value: object) -> Table:
    """Take a table for what it is and anything else as empty."""
    return value if isinstance(value, Mapping) else {}


def list_of(value: object) -> Sequence[object]:
    """Take a list for what it is and anything else as empty."""
    return value if isinstance(value, list | tuple) else ()


def number_of(value: object, otherwise: float = math.nan) -> float:
    """Take a number for what it is; anything else, and whole numbers beyond a double, as ``otherwise``."""
    if not isinstance(value, int | float) or isinstance(value, bool):
        return otherwise
    try:
        return float(value)
    except OverflowError:
        return otherwise


def is_number(value: object) -> bool:
    """Tell a number from anything else; true and false are none."""
    return isinstance(value, int | float) and not isinstance(value, bool)
