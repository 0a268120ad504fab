"""Arrays as text: four bytes a number instead of the ten to twenty characters of its digits."""

from __future__ import annotations

import base64
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from optim.arrays import FloatArray

Packed = dict[str, Any]
"""``f4``: base64 of little-endian single precision, row by row; ``shape``: list of int."""


def packed(values: ArrayLike) -> Packed:
    """Return numbers as text, seven digits of them; not-a-number stays what it is.

    Parameters
    ----------
    values : array
        Of any shape.
    """
    array = np.ascontiguousarray(values, dtype="<f4")
    return {"f4": base64.b64encode(array.tobytes()).decode("ascii"), "shape": list(array.shape)}


def unpacked(text: Packed) -> FloatArray:
    """Return the numbers again, in their shape.

    >>> unpacked(packed([[0.5, 2.0]])).tolist()
    [[0.5, 2.0]]
    """
    array = np.frombuffer(base64.b64decode(text["f4"]), dtype="<f4")
    return array.reshape(text["shape"]).astype(np.float64)
