"""The running count of a run, against counting everything at once."""

import moocore
import numpy as np
import pytest

from optim.outcomes import Outcome
from optim.runner.tally import Judged, Tally


def generations(n_objectives, count, seed):
    """Points that come closer to the origin; a third violates, some are repeated."""
    generator = np.random.default_rng(seed)
    for k in range(count):
        points = np.abs(generator.normal(size=(30, n_objectives))) * (1.0 + 3.0 / (1 + k))
        points[7] = points[3]
        violation = np.where(generator.random(30) < 0.33, 0.5, 0.0)
        outcomes = np.where(violation > 0.0, Outcome.NOT_CONVERGED, Outcome.CONVERGED)
        yield Judged(points, violation, outcomes, points=90)


@pytest.mark.parametrize("n_objectives", [2, 3, 4])
def test_hypervolume_grows_to_that_of_all_points(n_objectives):
    """Against moocore, an independent library, measuring everything after each generation."""
    reference = np.full(n_objectives, 2.0)
    tally, seen = Tally(reference), np.empty((0, n_objectives))
    for generation in generations(n_objectives, 12, seed=n_objectives):
        found = tally.add(generation)
        feasible = generation.search_objectives[generation.violation == 0.0]
        seen = np.vstack([seen, feasible])
        assert found == pytest.approx(moocore.hypervolume(seen, ref=reference), rel=1e-12)
    assert tally.hypervolumes == sorted(tally.hypervolumes)
    assert tally.evaluations == 360
    assert tally.feasible == len(seen)
    assert tally.failures == {Outcome.NOT_CONVERGED: 360 - len(seen)}


def test_points_that_beat_nothing_add_nothing():
    tally = Tally(np.array([1.0, 1.0]))
    first = np.array([[0.5, 0.5], [2.0, 0.1], [0.5, 0.5]])
    ended = np.zeros(3, dtype=int)
    assert tally.add(Judged(first, np.zeros(3), ended, 1)) == 0.25
    assert tally.add(Judged(first + 0.1, np.zeros(3), ended, 1)) == 0.25
    assert tally.add(Judged(first - 0.5, np.ones(3), ended, 1)) == 0.25
