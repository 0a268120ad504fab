"""One BLAS thread, the clock, and the factorisation that everything is measured against.

Import this before numpy: the number of threads is read when the library is loaded.
"""

import os

for _name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "NUMBA_NUM_THREADS"):
    os.environ[_name] = "1"

import argparse  # noqa: E402
import json  # noqa: E402
import time  # noqa: E402

import numpy as np  # noqa: E402
from scipy.linalg.lapack import dgesv  # noqa: E402

LU_ROUNDS = 40


def seconds(work):
    """Return how long a call took."""
    began = time.perf_counter()
    work()
    return time.perf_counter() - began


def factorisation(order):
    """Return the best time of LAPACK's LU and solution of one dense system [s].

    The best of many, because everything that disturbs a machine only ever adds.
    """
    rng = np.random.default_rng(0)
    matrix = np.asfortranarray(rng.normal(size=(order, order)) + order * np.eye(order))
    right = np.asfortranarray(rng.normal(size=(order, 1)))
    best = float("inf")
    for _ in range(LU_ROUNDS):
        a, b = matrix.copy(order="F"), right.copy(order="F")
        began = time.perf_counter()
        info = dgesv(a, b, overwrite_a=1, overwrite_b=1)[3]
        best = min(best, time.perf_counter() - began)
        assert info == 0
    return best


def parser(description):
    """Return a parser that knows --json."""
    made = argparse.ArgumentParser(description=description)
    made.add_argument("--json", action="store_true", help="one JSON document on standard output")
    return made


def show(result, as_json):
    """Print a result for a machine or for a reader."""
    if as_json:
        print(json.dumps(result, indent=1, allow_nan=False))
        return
    for name, value in result.items():
        if isinstance(value, list) and value and isinstance(value[0], dict):
            print(f"{name}:")
            for row in value:
                print("  " + "  ".join(f"{k} {_short(v)}" for k, v in row.items()))
        else:
            print(f"{name:28s} {_short(value)}")


def _short(value):
    if isinstance(value, float):
        return f"{value:.4g}"
    if isinstance(value, list):
        return " ".join(_short(one) for one in value)
    return str(value)
