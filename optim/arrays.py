"""Array types and the one form of sentence for an array of the wrong shape or content."""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

FloatArray: TypeAlias = NDArray[np.float64]
IntArray: TypeAlias = NDArray[np.int64]
BoolArray: TypeAlias = NDArray[np.bool_]


def check_shape(name: str, array: FloatArray, expected: dict[str, int | None]) -> None:
    """Raise ValueError unless `array` has the expected shape.

    Parameters
    ----------
    name : str
        What the array is called in the sentence.
    array : ndarray
        The array to look at.
    expected : dict
        Axis name -> length, None for any length, in axis order.
    """
    fits = array.ndim == len(expected) and all(
        length is None or length == found
        for length, found in zip(expected.values(), array.shape, strict=True)
    )
    if not fits:
        words = ", ".join(k if v is None else f"{k} = {v}" for k, v in expected.items())
        raise ValueError(f"{name} must have the shape ({words}); found {array.shape}.")


def check_finite(name: str, array: FloatArray) -> None:
    """Raise ValueError, naming the first place, unless every element is finite."""
    bad = np.argwhere(~np.isfinite(array))
    if bad.size:
        place = tuple(int(i) for i in bad[0])
        raise ValueError(f"{name} must be finite; found {array[place]} at {place}.")


def frozen(array: FloatArray) -> FloatArray:
    """Return a read-only copy of `array` as float64."""
    copy = np.array(array, dtype=np.float64)
    copy.flags.writeable = False
    return copy
