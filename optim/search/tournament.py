"""Binary tournaments that draw every tie from the random state they are given.

The library's own comparison for NSGA-III leaves the random state out when two designs violate
the constraints equally, and then draws from an unseeded one, so that equal seeds give unequal
runs. Here a tournament is a list of criteria, the first that separates two designs decides, and
a coin from the given state decides what no criterion does.

References
----------
Deb, K., "An Efficient Constraint Handling Method for Genetic Algorithms", Computer Methods in
Applied Mechanics and Engineering 186, 2000, pp. 311-338: less violation wins before all else.
Deb, K., Pratap, A., Agarwal, S., and Meyarivan, T., "A Fast and Elitist Multiobjective Genetic
Algorithm: NSGA-II", IEEE Transactions on Evolutionary Computation 6(2), 2002, pp. 182-197: the
crowded comparison, rank and then crowding.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Protocol, TypeAlias

import numpy as np
from numpy.typing import NDArray

from optim.arrays import FloatArray, IntArray


class Individuals(Protocol):
    """What is used of a population of the library: one value an individual by name."""

    def get(self, key: str, /) -> NDArray[np.generic]:
        """Return the values, one row an individual."""

    def set(self, key: str, values: Sequence[float | None], /) -> object:
        """Keep one value with each individual."""

    def __len__(self) -> int:
        """Return the number of individuals."""


Criterion: TypeAlias = Callable[[Individuals], FloatArray]
"""Population of the library -> (n,) array, smaller is better."""


def stored(population: Individuals, key: str) -> FloatArray:
    """Return what every individual has: "X", "F", "G" or "CV", (n, number of them) array."""
    return population.get(key).astype(np.float64)


def stored_or_nan(population: Individuals, key: str) -> FloatArray:
    """Return what only ranked individuals have, nan for the others.

    Parameters
    ----------
    population : Individuals
        Designs that violate a constraint are not ranked.
    key : str
        "rank" [-] or "crowding" [-].

    Returns
    -------
    (n,) array
    """
    return np.array([np.nan if v is None else v for v in population.get(key)], dtype=np.float64)


def violation(population: Individuals) -> FloatArray:
    """Return the sum of the violated constraints of each individual, (n,) array, 0 if feasible."""
    total: FloatArray = stored(population, "CV")[:, 0]
    return total


def rank(population: Individuals) -> FloatArray:
    """Return the number of the front that each individual lies on, (n,) array, from 0."""
    return stored_or_nan(population, "rank")


def crowding(population: Individuals) -> FloatArray:
    """Return the crowding distance with its sign turned, (n,) array: lonely is better."""
    return -stored_or_nan(population, "crowding")


def tournament(*criteria: Criterion) -> Callable[..., IntArray]:
    """Return a comparison of pairs by the given criteria in turn.

    Parameters
    ----------
    *criteria : Criterion
        What is compared, the most important first; nan separates nothing.

    Returns
    -------
    callable
        ``compete(population, pairs, random_state=...)`` with `pairs` an (n_pairs, 2) array of
        indices gives the (n_pairs, 1) array of the winners. It has no default for the random
        state on purpose.
    """

    def compete(
        population: Individuals, pairs: IntArray, *, random_state: np.random.Generator, **_: object
    ) -> IntArray:
        worse = np.zeros(len(pairs), dtype=np.int64)
        for criterion in criteria:
            first, second = criterion(population)[pairs].T
            here = (first > second).astype(np.int64) - (first < second)
            worse = np.where(worse == 0, here, worse)
        coin = random_state.random(len(pairs)) < 0.5
        first_wins = (worse < 0) | ((worse == 0) & coin)
        return np.where(first_wins, pairs[:, 0], pairs[:, 1])[:, None]

    return compete
