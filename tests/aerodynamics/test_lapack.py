"""The factorisation in place against numpy's solution, and its compiled code in another process."""

import subprocess
import sys

import numpy as np
import pytest

from optim.aerodynamics.lapack import AS_STORED, TRANSPOSED, factorise, substitute

ORDER = 12


@pytest.fixture
def system():
    """Columns with two entries to spare, and three right sides with one."""
    rng = np.random.default_rng(11)
    return rng.normal(size=(ORDER, ORDER + 2)), rng.normal(size=(3, ORDER + 1))


@pytest.mark.parametrize("form", [AS_STORED, TRANSPOSED])
def test_solutions_are_those_of_numpy(form, system):
    columns, right = system
    stored = columns[:, :ORDER]
    matrix = stored.T if form == AS_STORED else stored
    expected = np.linalg.solve(matrix, right[:, :ORDER].T).T
    spare = columns[:, ORDER:].copy(), right[:, ORDER:].copy()
    pivots = np.zeros(ORDER, np.int32)
    assert factorise(columns, pivots)
    substitute(columns, pivots, right, form)
    assert right[:, :ORDER] == pytest.approx(expected, rel=1e-10)
    assert np.array_equal(columns[:, ORDER:], spare[0])
    assert np.array_equal(right[:, ORDER:], spare[1])


def test_a_singular_matrix_is_told():
    assert not factorise(np.ones((ORDER, ORDER)), np.zeros(ORDER, np.int32))


ANOTHER_PROCESS = """
import numpy as np
from optim.aerodynamics.lapack import factorise
assert factorise(2.0 * np.eye(4), np.zeros(4, np.int32))
print(sum(factorise.stats.cache_hits.values()))
"""


def test_compiled_code_serves_another_process():
    """The library lies at another address there: the code must not know it."""
    found = [
        subprocess.run(
            [sys.executable, "-c", ANOTHER_PROCESS], check=True, capture_output=True, text=True
        ).stdout.strip()
        for _ in range(2)
    ]
    assert found[1] == "1"
