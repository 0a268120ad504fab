"""LAPACK's LU factorisation on arrays as they lie, for compiled functions.

``numpy.linalg.solve`` checks and copies the matrix, transposed, at every call, which costs a
quarter of the solution of a section's system. Here the routines work in place. They are reached by
name: an address would be written into compiled code that another process reads from the cache.

References
----------
Anderson, E., and others, LAPACK Users' Guide, 3rd ed., SIAM 1999 (dgetrf, dgetrs).
"""

from __future__ import annotations

import ctypes
from typing import Any, TypeAlias

import llvmlite.binding  # type: ignore[import-untyped]
import numba
import numpy as np
from numba.extending import get_cython_function_address
from numpy.typing import NDArray

from optim.aerodynamics.kernels import njit
from optim.arrays import FloatArray

AS_STORED, TRANSPOSED = "N", "T"
"""LAPACK's letters for the system with the matrix or with its transpose."""


Pivots: TypeAlias = NDArray[np.int32]
"""Interchanges of columns, in LAPACK's integers."""


def _routine(name: str, *arguments: Any) -> Any:  # noqa: ANN401  numba's types have no stubs
    """Return a LAPACK routine for compiled functions, or for Python if nothing is compiled."""
    address = get_cython_function_address("scipy.linalg.cython_lapack", name)
    if numba.config.DISABLE_JIT:
        return ctypes.CFUNCTYPE(None, *([ctypes.c_void_p] * len(arguments)))(address)
    symbol = f"sectionwright_{name}"
    llvmlite.binding.add_symbol(symbol, address)
    pointers = [numba.types.CPointer(kind) for kind in arguments]
    return numba.types.ExternalFunction(symbol, numba.types.void(*pointers))


_LETTER, _INTEGER, _REAL = numba.types.uint8, numba.types.int32, numba.types.float64

_dgetrf = _routine("dgetrf", _INTEGER, _INTEGER, _REAL, _INTEGER, _INTEGER, _INTEGER)
_dgetrs = _routine(
    "dgetrs",
    *(_LETTER, _INTEGER, _INTEGER, _REAL, _INTEGER, _INTEGER, _REAL, _INTEGER, _INTEGER),
)


@njit
def factorise(columns: FloatArray, pivots: Pivots) -> bool:
    """Factorise a square matrix in place; False if it is singular.

    Parameters
    ----------
    columns : (m, at least m) array
        The matrix column by column; what a row holds beyond m entries is left alone.
    pivots : (m,) array of int32
        Filled.
    """
    m, stride = columns.shape
    size = np.array([m, stride, 0], np.int32)
    _dgetrf(
        size.ctypes, size.ctypes, columns.ctypes, size[1:].ctypes, pivots.ctypes, size[2:].ctypes
    )
    return bool(size[2] == 0)


@njit
def substitute(columns: FloatArray, pivots: Pivots, right: FloatArray, form: str) -> None:
    """Solve a factorised system in place.

    Parameters
    ----------
    columns, pivots : array
        What `factorise` left.
    right : (k, at least m) array
        k right sides, one a row; overwritten with the solutions.
    form : str
        AS_STORED or TRANSPOSED.
    """
    m, stride = columns.shape
    k, right_stride = right.shape
    size = np.array([m, stride, k, right_stride, 0], np.int32)
    letter = np.array([ord(form)], np.uint8)
    _dgetrs(
        letter.ctypes, size.ctypes, size[2:].ctypes, columns.ctypes, size[1:].ctypes,
        pivots.ctypes, right.ctypes, size[3:].ctypes, size[4:].ctypes,
    )  # fmt: skip
