"""SHA-256 of an array: over its bytes in C order, then its type and shape."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable
from typing import Any

import numpy as np
from numpy.typing import NDArray


class RowDigest:
    """The digest of an array that arrives in blocks of rows."""

    def __init__(self) -> None:
        self._sha = hashlib.sha256()
        self._rows = 0

    def update(self, block: NDArray[Any]) -> None:
        """Add a block of rows."""
        self._sha.update(np.ascontiguousarray(block).data if block.size else b"")
        self._rows += len(block)

    def hexdigest(self, dtype: np.dtype[Any], row_shape: tuple[int, ...]) -> str:
        """Return the digest of the rows so far as an array of this type."""
        self._sha.update(_form(dtype, (self._rows, *row_shape)))
        return self._sha.hexdigest()


def _form(dtype: np.dtype[Any], shape: tuple[int, ...]) -> bytes:
    return f"{dtype.str}{list(shape)}".encode()


def array_digest(array: NDArray[Any]) -> str:
    """Return the digest of a whole array as 64 hexadecimal digits."""
    sha = hashlib.sha256(array.tobytes())
    sha.update(_form(array.dtype, array.shape))
    return sha.hexdigest()


def combined_digest(named: Iterable[tuple[str, str]]) -> str:
    """Return one digest of many named ones, in the order of their names."""
    lines = [f"{name}\t{digest}\n" for name, digest in sorted(named)]
    return hashlib.sha256("".join(lines).encode()).hexdigest()
