"""The types of arrays. `numpy.typing` is left to type checkers: importing it takes a third as long as NumPy itself."""

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]
    Flags = NDArray[np.bool_]
    Indices = NDArray[np.int64]
    SmallIndices = NDArray[np.int8]
else:
    ArrayLike = Array = Flags = Indices = SmallIndices = np.ndarray

__all__ = ["Array", "ArrayLike", "Flags", "Indices", "SmallIndices"]
