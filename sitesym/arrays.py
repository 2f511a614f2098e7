"""Array types used in signatures, and the one way to make an array read-only."""

from __future__ import annotations

from typing import TypeAlias, TypeVar

import numpy as np
from numpy.typing import NDArray

FloatArray: TypeAlias = NDArray[np.float64]
IntArray: TypeAlias = NDArray[np.int64]
BoolArray: TypeAlias = NDArray[np.bool_]
ComplexArray: TypeAlias = NDArray[np.complex128]

_Scalar = TypeVar("_Scalar", bound=np.generic)


def frozen(array: NDArray[_Scalar]) -> NDArray[_Scalar]:
    """A read-only array with the same values; the caller's own array stays writable."""
    copy = np.array(array)
    copy.setflags(write=False)
    return copy
