"""The first generation."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from optim.search.reference_directions import reference_directions, simplex_lattice
from optim.search.sampling import first_generation, latin_hypercube, neighbours

LOWER, UPPER = np.array([-1.0, 0.0, 2.0]), np.array([1.0, 5.0, 2.5])
BASELINE = np.array([-0.9, 4.0, 2.25])


@given(population=st.integers(1, 60), seed=st.integers(0, 2**32))
def test_baseline_first_and_all_inside(population, seed):
    designs = first_generation(BASELINE, LOWER, UPPER, population, np.random.default_rng(seed))
    assert designs.shape == (population, 3)
    assert np.array_equal(designs[0], BASELINE)
    assert np.all((designs >= LOWER) & (designs <= UPPER))
    assert len(np.unique(designs, axis=0)) == population


def test_same_generator_state_same_designs():
    one, other = (
        first_generation(BASELINE, LOWER, UPPER, 30, np.random.default_rng(5)) for _ in range(2)
    )
    assert one.tobytes() == other.tobytes()


def test_neighbours_go_out_step_by_step():
    """Root mean square distances follow the stated spreads, 0.02 to 0.3 of the range."""
    lower, upper = np.zeros(4000), np.full(4000, 2.0)
    found = neighbours(np.ones(4000), lower, upper, 9, np.random.default_rng(1))
    distance = np.sqrt(np.mean(((found - 1.0) / 2.0) ** 2, axis=1))
    assert np.all(np.diff(distance) > 0.0)
    assert distance[0] == pytest.approx(0.02, rel=0.05)
    assert distance[4] == pytest.approx(np.sqrt(0.02 * 0.3), rel=0.05)


def test_neighbours_do_not_pile_up_on_the_bounds():
    found = neighbours(LOWER + 1e-3, LOWER, UPPER, 200, np.random.default_rng(2))
    assert np.mean((found == LOWER) | (found == UPPER)) < 0.01


@given(count=st.integers(1, 40), n_variables=st.integers(1, 6), seed=st.integers(0, 2**32))
def test_latin_hypercube_has_one_point_in_each_interval(count, n_variables, seed):
    """The definition of McKay, Beckman and Conover (1979)."""
    sample = latin_hypercube(count, n_variables, np.random.default_rng(seed))
    intervals = np.sort(np.floor(sample * count).astype(int), axis=0)
    assert np.array_equal(intervals, np.tile(np.arange(count)[:, None], (1, n_variables)))


def test_lattice_of_the_paper():
    """Das and Dennis (1998): C(M + p - 1, p) points; 3 objectives, 4 partitions give 15."""
    lattice = simplex_lattice(3, 4)
    assert lattice.shape == (15, 3)
    assert np.allclose(lattice.sum(axis=1), 1.0)
    assert np.all(lattice >= 0.0)
    assert len(np.unique(lattice, axis=0)) == 15


@pytest.mark.parametrize(
    ("n_objectives", "population", "expected"),
    [(2, 80, 80), (3, 92, 91), (5, 212, 210), (8, 156, 156), (10, 276, 275)],
)
def test_directions_of_the_nsga3_paper(n_objectives, population, expected):
    """Table 1 of Deb and Jain (2014), from memory: 91, 210, 156 (two layers) and 275 (two)."""
    directions = reference_directions(n_objectives, population)
    assert directions.shape == (expected, n_objectives)
    assert np.allclose(directions.sum(axis=1), 1.0)


def test_too_small_a_population_is_refused():
    with pytest.raises(ValueError, match="at least the number of objectives, 5; found 4"):
        reference_directions(5, 4)
