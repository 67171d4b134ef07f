"""What goes into a formula and what comes out."""

from collections.abc import Callable, Mapping
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Value: TypeAlias = NDArray[np.float64] | float
"""Numbers, or flags as 1.0, 0.0 and nan; arrays broadcast together."""

Env: TypeAlias = Mapping[str, NDArray[np.float64] | float | str | None]
"""What each name holds: numbers and flags as floats or arrays, a text as str, an unknown text as None."""

Run: TypeAlias = Callable[[Env], Value]
