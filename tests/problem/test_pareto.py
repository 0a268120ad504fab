"""Non-dominated sets and hypervolumes against closed forms, brute force and another library.

Sources: published/moo_fronts.csv (closed forms, COMPUTED from the published definitions of the
test problems) and moocore, the general-purpose library behind pymoo's indicator.
"""

from __future__ import annotations

import csv
import time
from pathlib import Path

import moocore
import numpy as np
import pytest

from optim.problem.pareto import feasible_front, hypervolume, non_dominated

FRONTS = Path(__file__).parent / "published" / "moo_fronts.csv"


def published_fronts():
    lines = [line for line in FRONTS.read_text().splitlines() if not line.startswith("#")]
    return {row["problem"]: row for row in csv.DictReader(lines)}


def zdt_front(problem, f1):
    if problem in ("ZDT1", "ZDT4"):
        return np.column_stack([f1, 1.0 - np.sqrt(f1)])
    return np.column_stack([f1, 1.0 - f1**2])


def simplex_lattice(partitions):
    """The points of Das and Dennis (1998) in three dimensions."""
    i, j = np.meshgrid(np.arange(partitions + 1), np.arange(partitions + 1), indexing="ij")
    inside = i + j <= partitions
    a, b = i[inside], j[inside]
    return np.column_stack([a, b, partitions - a - b]) / partitions


def brute_force_non_dominated(points):
    no_worse = np.all(points[:, None] <= points[None], axis=-1)
    better = np.any(points[:, None] < points[None], axis=-1)
    return ~np.any(no_worse & better, axis=0)


@pytest.mark.published
@pytest.mark.parametrize("problem", ["ZDT1", "ZDT2", "ZDT4"])
def test_dense_fronts_approach_the_closed_form_from_below(problem):
    """A staircase of n points falls short by less than the largest step times the slope."""
    exact = float(published_fronts()[problem]["hv_exact"])
    f1 = np.linspace(0.0, 1.0, 20001) ** 2  # even in f2 where f2 = 1 - sqrt(f1)
    found = hypervolume(zdt_front(problem, f1), np.array([1.1, 1.1]))
    assert exact - 2e-4 < found < exact + 1e-10


@pytest.mark.published
@pytest.mark.parametrize("problem", ["ZDT1", "ZDT2", "ZDT4"])
def test_fronts_of_a_hundred_points(problem):
    row = published_fronts()[problem]
    front = zdt_front(problem, np.linspace(0.0, 1.0, 100))
    found = hypervolume(front, np.array([1.1, 1.1]))
    assert found == pytest.approx(float(row["hv_of_pymoo_front"]), abs=5e-9)


@pytest.mark.published
def test_three_objectives_on_the_sphere_and_the_plane():
    """DTLZ2 and DTLZ1 on the lattice of 861 points, reference point 1.1."""
    fronts = published_fronts()
    lattice = simplex_lattice(40)
    reference = np.full(3, 1.1)
    sphere = lattice / np.linalg.norm(lattice, axis=1)[:, None]
    plane = hypervolume(0.5 * lattice, reference)
    found = hypervolume(sphere, reference)
    assert found == pytest.approx(
        float(fronts["DTLZ2 (3 obj) on 861 das-dennis points"]["hv_of_pymoo_front"]), abs=5e-9
    )
    assert plane == pytest.approx(float(fronts["C1-DTLZ1 (3 obj)"]["hv_of_pymoo_front"]), abs=5e-9)


@pytest.mark.parametrize(("objectives", "size"), [(2, 300), (3, 120), (4, 50), (5, 25)])
def test_hypervolume_equals_another_library(objectives, size):
    """moocore on random sets, points beyond the reference and duplicates among them."""
    rng = np.random.default_rng(objectives)
    points = rng.uniform(0.0, 1.2, (size, objectives))
    points = np.vstack([points, points[:5], np.round(points[:20], 1)])
    reference = np.full(objectives, 1.1)
    expected = moocore.hypervolume(points, ref=reference)
    assert hypervolume(points, reference) == pytest.approx(expected, rel=1e-12)


def test_hypervolume_equals_a_count_of_cells():
    """Integer corners: the number of unit cells dominated, counted one by one."""
    rng = np.random.default_rng(3)
    points = rng.integers(0, 7, (12, 3)).astype(float)
    cells = np.stack(np.meshgrid(*[np.arange(7.0)] * 3, indexing="ij"), axis=-1).reshape(-1, 3)
    dominated = np.any(np.all(points[:, None] <= cells[None], axis=-1), axis=0)
    assert hypervolume(points, np.full(3, 7.0)) == pytest.approx(dominated.sum(), rel=1e-12)


def test_the_volume_of_nothing_is_nothing():
    reference = np.array([1.0, 1.0])
    assert hypervolume(np.empty((0, 2)), reference) == 0.0
    assert hypervolume(np.array([[1.0, 0.0], [2.0, -1.0]]), reference) == 0.0


@pytest.mark.parametrize("objectives", [2, 3, 4])
def test_non_dominated_equals_the_definition(objectives):
    rng = np.random.default_rng(objectives)
    points = np.round(rng.uniform(0.0, 1.0, (250, objectives)), 1)
    assert np.array_equal(non_dominated(points), brute_force_non_dominated(points))


def test_non_dominated_equals_another_library():
    points = np.random.default_rng(5).uniform(size=(400, 3))
    assert np.array_equal(non_dominated(points), moocore.is_nondominated(points))


def test_equal_points_are_all_kept():
    points = np.array([[0.0, 1.0], [0.0, 1.0], [1.0, 1.0]])
    assert non_dominated(points).tolist() == [True, True, False]


def test_an_archive_of_a_night_is_filtered_in_a_breath():
    """1e5 points in three objectives, a front of some hundreds, well under ten seconds."""
    points = np.random.default_rng(1).uniform(size=(100_000, 3))
    start = time.perf_counter()
    kept = non_dominated(points)
    assert kept.any()
    assert time.perf_counter() - start < 10.0


def test_the_front_is_made_of_feasible_designs_alone():
    """The best point is infeasible, one has no number, one is dominated."""
    points = np.array([[0.0, 0.0], [1.0, 2.0], [2.0, 1.0], [2.0, 2.0], [np.nan, 0.0], [1.0, 2.0]])
    violation = np.array([0.1, 0.0, 0.0, 0.0, 0.0, 0.0])
    assert feasible_front(points, violation).tolist() == [1, 2, 5]
    assert feasible_front(points, np.ones(6)).tolist() == []


def test_misuse_is_refused():
    with pytest.raises(ValueError, match="must be finite"):
        non_dominated(np.array([[np.nan, 0.0]]))
    with pytest.raises(ValueError, match="shape"):
        hypervolume(np.zeros((3, 2)), np.zeros(3))
