"""Reference directions of NSGA-III: the simplex lattice, in two layers for many objectives.

References
----------
Das, I., and Dennis, J. E., "Normal-Boundary Intersection: A New Method for Generating the Pareto
Surface in Nonlinear Multicriteria Optimization Problems", SIAM Journal on Optimization 8(3),
1998, pp. 631-657.
Deb, K., and Jain, H., "An Evolutionary Many-Objective Optimization Algorithm Using
Reference-Point-Based Nondominated Sorting Approach, Part I", IEEE Transactions on Evolutionary
Computation 18(4), 2014, pp. 577-601: the two layers, section V.
"""

from __future__ import annotations

from itertools import combinations
from math import comb

import numpy as np

from optim.arrays import FloatArray

INNER_LAYER = 0.5
"""How far out the inner layer reaches, as a fraction of the outer one; Deb and Jain 2014."""


def simplex_lattice(n_objectives: int, partitions: int) -> FloatArray:
    """Return all points of the unit simplex whose coordinates are multiples of 1/partitions.

    Parameters
    ----------
    n_objectives : int
        Number of coordinates.
    partitions : int
        Number of steps along an edge, at least 1.

    Returns
    -------
    (n_points, n_objectives) array
        In lexicographic order; each row sums to one.
    """
    places = n_objectives + partitions - 1
    bars = np.array(list(combinations(range(places), n_objectives - 1)))
    fences = np.pad(bars, ((0, 0), (1, 1)), constant_values=((0, 0), (-1, places)))
    lattice: FloatArray = (np.diff(fences, axis=1) - 1) / partitions
    return lattice


def reference_directions(n_objectives: int, population: int) -> FloatArray:
    """Return as many evenly spread directions as the population can follow.

    Parameters
    ----------
    n_objectives : int
        Number of objectives, at least 2.
    population : int
        Number of designs of a generation; no more directions than this are returned.

    Returns
    -------
    (n_directions, n_objectives) array
        Each row sums to one. A lattice with fewer partitions than objectives has no direction
        in its interior, so a second layer half-way to the middle joins it then.

    Raises
    ------
    ValueError
        If the population is smaller than the number of objectives.
    """
    if population < n_objectives:
        raise ValueError(
            f"population must be at least the number of objectives, {n_objectives}; "
            f"found {population}."
        )
    partitions = _partitions(n_objectives, population)
    outer = simplex_lattice(n_objectives, partitions)
    inner_partitions = _partitions(n_objectives, population - len(outer))
    if partitions >= n_objectives or inner_partitions == 0:
        return outer
    inner = simplex_lattice(n_objectives, inner_partitions)
    return np.vstack([outer, INNER_LAYER * inner + (1 - INNER_LAYER) / n_objectives])


def _partitions(n_objectives: int, most: int) -> int:
    """Return the largest number of partitions whose lattice has no more than `most` points."""
    partitions = 0
    while comb(n_objectives + partitions, n_objectives - 1) <= most:
        partitions += 1
    return partitions
