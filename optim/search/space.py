"""What is searched, and what a search carries from one generation to the next."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray, check_finite, check_shape, frozen


@dataclass(frozen=True)
class SearchSpace:
    """What is searched.

    Attributes
    ----------
    lower, upper : (n_variables,) array
        Bounds of the variables.
    baseline : (n_variables,) array
        The design that comes first, inside the bounds.
    n_objectives : int
        At least two; all are minimised.
    n_constraints : int
        None or more; met at zero or below, each scaled by its own size.

    Raises
    ------
    ValueError
        If shapes differ, a number is not finite, bounds are crossed, the baseline lies outside,
        or there are fewer than two objectives.
    """

    lower: FloatArray
    upper: FloatArray
    baseline: FloatArray
    n_objectives: int
    n_constraints: int

    def __post_init__(self) -> None:
        """Check, and keep read-only copies."""
        for name in ("lower", "upper", "baseline"):
            array = frozen(getattr(self, name))
            check_shape(name, array, {"n_variables": len(self.lower)})
            check_finite(name, array)
            object.__setattr__(self, name, array)
        if np.any(self.lower > self.upper):
            raise ValueError("lower must be at most upper for every variable.")
        if np.any((self.baseline < self.lower) | (self.baseline > self.upper)):
            raise ValueError("baseline must lie inside the bounds.")
        if self.n_objectives < 2:
            raise ValueError(f"n_objectives must be at least 2; found {self.n_objectives}.")


@dataclass(frozen=True)
class SearchState:
    """All that a search carries from one generation to the next.

    Attributes
    ----------
    json : str
        Version, algorithm, generation, and the state of the random generator, whose integers
        have 128 bits.
    arrays : dict of str to array
        The population, row by row: designs, objectives, constraints, rank and crowding (nan
        where a design has none), and the normalisation of NSGA-III. Infinite values are meant.
    """

    json: str
    arrays: Mapping[str, FloatArray]
