"""The loop reaches the fronts of published problems, with and without constraints."""

import csv
from pathlib import Path

import moocore
import numpy as np
import pytest

from optim.search.algorithm import ALGORITHMS

BUDGETS = {
    "bnh": (40, 40),
    "osy": (80, 100),
    "zdt1": (60, 200),
    "zdt2": (60, 300),
    "zdt3": (60, 200),
    "dtlz2": (60, 60),
    "c1dtlz1": (60, 100),
}

# Share of the exact hypervolume that all feasible designs of a run must reach. Each is the least
# of eight seeds (1 to 8), rounded down; an even sample of the same size over the bounds reaches
# 0.995 on bnh, 0.46 on osy, 0.45 on dtlz2 and nothing at all on the others. The problems without
# a figure in the papers are run here at far smaller budgets than there.
LEAST = {
    "bnh": (0.997, 0.9953, 0.9979),
    "osy": (0.91, 0.92, 0.92),
    "zdt1": (0.98, 0.98, 0.99),
    "zdt2": (0.99, 0.91, 0.99),
    "zdt3": (0.93, 0.98, 0.93),
    "dtlz2": (0.94, 0.95, 0.96),
    "c1dtlz1": (0.97, 0.92, 0.97),
}


def exact(name):
    lines = (Path(__file__).parent / "exact_hypervolumes.csv").read_text().splitlines()
    rows = csv.DictReader(line for line in lines if not line.startswith("#"))
    row = next(row for row in rows if row["problem"] == name)
    return np.array(row["reference_point"].split(), dtype=float), float(row["hypervolume"])


def feasible(record):
    return np.vstack([f[np.all(g <= 0.0, axis=1)] for _, f, g in record])


@pytest.mark.parametrize("algorithm", ALGORITHMS)
@pytest.mark.parametrize("name", BUDGETS)
def test_published_front_is_reached(name, algorithm, published_problem, run_search):
    """The hypervolume (by moocore) comes close to the exact one and never passes it."""
    problem = published_problem(name)
    population, generations = BUDGETS[name]
    record = run_search(problem.space, problem.evaluate, algorithm, population, generations)
    reference, whole = exact(name)
    reached = moocore.hypervolume(feasible(record), ref=reference) / whole
    assert LEAST[name][ALGORITHMS.index(algorithm)] <= reached <= 1.0 + 1e-9


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_designs_stay_inside_the_bounds(algorithm, published_problem, run_search):
    problem = published_problem("osy")
    record = run_search(problem.space, problem.evaluate, algorithm, 20, 15)
    designs = np.vstack([x for x, _, _ in record])
    assert np.all(designs >= problem.space.lower)
    assert np.all(designs <= problem.space.upper)


def test_the_closed_forms_of_the_table():
    """Closed forms of the ZDT papers' fronts; of the sphere and the simplex for DTLZ."""
    assert exact("zdt1")[1] == pytest.approx(1.1**2 - 1.0 + 2.0 / 3.0, abs=1e-9)
    assert exact("zdt2")[1] == pytest.approx(1.1**2 - 1.0 + 1.0 / 3.0, abs=1e-9)
    assert exact("dtlz2")[1] == pytest.approx(1.1**3 - np.pi / 6.0, abs=1e-9)
    assert exact("c1dtlz1")[1] == pytest.approx(1.1**3 - 1.0 / 48.0, abs=1e-9)
