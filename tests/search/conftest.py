"""Published test problems, evaluated by the optimisation library's own definitions of them."""

from dataclasses import dataclass

import numpy as np
import pytest
from pymoo.problems import get_problem

from optim.search.algorithm import Search
from optim.search.space import SearchSpace


@dataclass(frozen=True)
class PublishedProblem:
    """A published problem in the form that a search is told of it."""

    definition: object
    space: SearchSpace

    def evaluate(self, designs):
        """Return objectives and constraints, met at zero or below."""
        out = self.definition.evaluate(np.array(designs), return_as_dictionary=True)
        n_constraints = self.space.n_constraints
        return out["F"], out["G"] if n_constraints else np.empty((len(designs), 0))


def published(name):
    definition = get_problem(name)
    middle = 0.5 * (definition.xl + definition.xu)
    return PublishedProblem(
        definition,
        SearchSpace(
            definition.xl, definition.xu, middle, definition.n_obj, definition.n_ieq_constr
        ),
    )


def advance(search, evaluate, generations):
    """Run some generations and return what was asked and told."""
    record = []
    for _ in range(generations):
        designs = search.ask()
        objectives, constraints = evaluate(designs)
        search.tell(designs, objectives, constraints)
        record.append((designs, objectives, constraints))
    return record


def same(one, other):
    """Tell whether two records are equal to the last bit."""
    return len(one) == len(other) and all(
        a.tobytes() == b.tobytes()
        for left, right in zip(one, other, strict=True)
        for a, b in zip(left, right, strict=True)
    )


@pytest.fixture(scope="session")
def published_problem():
    return published


@pytest.fixture(scope="session")
def run_search():
    def run(space, evaluate, algorithm, population, generations, seed=1):
        return advance(Search(space, algorithm, population, seed), evaluate, generations)

    return run


@pytest.fixture(scope="session")
def continue_search():
    return advance


@pytest.fixture(scope="session")
def equal_records():
    return same
