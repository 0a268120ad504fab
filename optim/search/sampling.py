"""The first generation: the baseline, neighbours of it, and a Latin hypercube over the bounds.

The baseline comes first so that every run holds the section its front is drawn against. The
neighbours start the search where sections are known to be sound; the hypercube starts it
everywhere else. All random numbers come from the one generator that is passed in.

References
----------
McKay, M. D., Beckman, R. J., and Conover, W. J., "A Comparison of Three Methods for Selecting
Values of Input Variables in the Analysis of Output from a Computer Code", Technometrics 21(2),
1979, pp. 239-245.
"""

from __future__ import annotations

import numpy as np

from optim.arrays import FloatArray

NEIGHBOUR_SHARE = 0.4
"""Share of the first generation that are neighbours of the baseline; rule of thumb."""

SPREADS = (0.02, 0.3)
"""Standard deviation of the nearest and of the farthest neighbour, as a fraction of the range of
each variable, rising geometrically between them; rule of thumb."""


def first_generation(
    baseline: FloatArray,
    lower: FloatArray,
    upper: FloatArray,
    population: int,
    generator: np.random.Generator,
) -> FloatArray:
    """Return the designs of the first generation, the baseline at index 0.

    Parameters
    ----------
    baseline : (n_variables,) array
        The fitted baseline, inside the bounds, in the units of the variables.
    lower, upper : (n_variables,) array
        Bounds of the variables.
    population : int
        Number of designs, at least 1.
    generator : numpy.random.Generator
        Where every random number comes from; it is advanced.

    Returns
    -------
    (population, n_variables) array
        All inside the bounds.
    """
    n_neighbours = round(NEIGHBOUR_SHARE * (population - 1))
    near = neighbours(baseline, lower, upper, n_neighbours, generator)
    spread = lower + (upper - lower) * latin_hypercube(
        population - 1 - n_neighbours, len(baseline), generator
    )
    return np.clip(np.vstack([baseline, near, spread]), lower, upper)


def neighbours(
    baseline: FloatArray,
    lower: FloatArray,
    upper: FloatArray,
    count: int,
    generator: np.random.Generator,
) -> FloatArray:
    """Return normal deviates about the baseline, each farther out than the one before.

    Parameters
    ----------
    baseline, lower, upper : (n_variables,) array
        The middle and the bounds, in the units of the variables.
    count : int
        Number of neighbours.
    generator : numpy.random.Generator
        Where every random number comes from; it is advanced.

    Returns
    -------
    (count, n_variables) array
        Inside the bounds: what would fall outside is mirrored at the bound, because clipping
        would pile designs up on the faces of the box.
    """
    size = np.geomspace(*SPREADS, count)[:, None] * (upper - lower)
    moved = baseline + size * generator.standard_normal((count, len(baseline)))
    mirrored = np.where(moved < lower, 2 * lower - moved, moved)
    mirrored = np.where(mirrored > upper, 2 * upper - mirrored, mirrored)
    return np.clip(mirrored, lower, upper)


def latin_hypercube(count: int, n_variables: int, generator: np.random.Generator) -> FloatArray:
    """Return a Latin hypercube sample of the unit cube.

    Parameters
    ----------
    count, n_variables : int
        Number of points and of coordinates.
    generator : numpy.random.Generator
        Where every random number comes from; it is advanced.

    Returns
    -------
    (count, n_variables) array
        In each coordinate exactly one point in each of the `count` equal intervals of [0, 1).
    """
    strata = np.tile(np.arange(count), (n_variables, 1))
    shuffled = generator.permuted(strata, axis=1).T
    cell: FloatArray = (shuffled + generator.random((count, n_variables))) / max(count, 1)
    return cell
