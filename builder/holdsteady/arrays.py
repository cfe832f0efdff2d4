"""The array types that results carry, and how they are frozen."""

from __future__ import annotations

from typing import Any, TypeVar

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]
Sides = npt.NDArray[np.int8]  # -1 below, 1 above, 0 neither
Array = TypeVar("Array", bound=npt.NDArray[Any])


def frozen(array: Array) -> Array:
    """Return the array, set read-only, so that no later stage can change an earlier one's result."""
    array.flags.writeable = False
    return array
