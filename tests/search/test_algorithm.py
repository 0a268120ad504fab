"""Contract of the ask/tell loop, run on every algorithm."""

import json
import subprocess
import sys
import warnings

import numpy as np
import pytest

from optim.search.algorithm import ALGORITHMS, Search
from optim.search.space import SearchSpace, SearchState

SPACE = SearchSpace(
    lower=np.array([-1.0, 0.0, 2.0]),
    upper=np.array([1.0, 5.0, 4.0]),
    baseline=np.array([0.25, 1.0, 3.0]),
    n_objectives=2,
    n_constraints=2,
)


def smooth(designs):
    """Two convex objectives and two constraints that cut the box."""
    u = (designs - SPACE.lower) / (SPACE.upper - SPACE.lower)
    f = np.column_stack([np.sum(u**2, axis=1), np.sum((u - 1.0) ** 2, axis=1)])
    return f, np.column_stack([u[:, 0] - 0.8, 0.1 - u[:, 1]])


def half_fail_alike(designs):
    """As `smooth`, but half of the box fails with one and the same violation."""
    f, g = smooth(designs)
    failed = designs[:, 0] > 0.0
    f[failed], g[failed] = 10.0, 1.0
    return f, g


def nothing_is_feasible(designs):
    """As `smooth`, with a constraint that no design meets."""
    f, g = smooth(designs)
    return f, g + 2.0


def all_alike(designs):
    """Every design has the same values."""
    n = len(designs)
    return np.ones((n, 2)), np.ones((n, 2))


def as_stored(state):
    """Return a state that has been through text and bytes, as a journal keeps it."""
    arrays = {
        name: np.frombuffer(array.tobytes()).reshape(array.shape)
        for name, array in state.arrays.items()
    }
    return SearchState(json.dumps(json.loads(state.json)), arrays)


def same_state(one, other):
    """Tell whether two states are equal to the last bit."""
    return one.json == other.json and {k: v.tobytes() for k, v in one.arrays.items()} == {
        k: v.tobytes() for k, v in other.arrays.items()
    }


@pytest.mark.parametrize("algorithm", ALGORITHMS)
@pytest.mark.parametrize(
    "evaluate", [smooth, half_fail_alike, nothing_is_feasible, all_alike], ids=lambda f: f.__name__
)
class TestEveryAlgorithm:
    def test_equal_seeds_give_equal_runs(self, algorithm, evaluate, run_search, equal_records):
        """Also where two designs violate the constraints equally, the tie that pymoo 0.6.2
        draws from an unseeded state in NSGA-III (anyoptimization/pymoo issue 794)."""
        runs = [run_search(SPACE, evaluate, algorithm, 12, 10) for _ in range(2)]
        assert equal_records(*runs)

    def test_other_seeds_give_other_runs(self, algorithm, evaluate, run_search, equal_records):
        runs = [run_search(SPACE, evaluate, algorithm, 12, 3, seed) for seed in (1, 2)]
        assert not equal_records(*runs)

    @pytest.mark.parametrize("stop", [0, 1, 4, 12, 21])
    def test_restored_search_goes_on_bit_for_bit(
        self, algorithm, evaluate, stop, continue_search, equal_records
    ):
        whole = Search(SPACE, algorithm, 12, 7)
        uninterrupted = continue_search(whole, evaluate, 26)
        first = Search(SPACE, algorithm, 12, 7)
        record = continue_search(first, evaluate, stop)
        second = Search.restore(SPACE, algorithm, 12, as_stored(first.state()))
        assert second.generation == stop
        assert same_state(second.state(), first.state())
        record += continue_search(second, evaluate, 26 - stop)
        assert equal_records(record, uninterrupted)
        assert same_state(second.state(), whole.state())

    def test_asked_designs_are_new(self, algorithm, evaluate, continue_search):
        """None is asked twice in a generation, and none that still lives."""
        search = Search(SPACE, algorithm, 12, 3)
        for _ in range(8):
            living = search.state().arrays.get("designs", np.empty((0, 3)))
            (designs, _, _), *_ = continue_search(search, evaluate, 1)
            assert len(np.unique(np.vstack([living, designs]), axis=0)) == len(living) + len(
                designs
            )


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_restored_search_remembers_what_has_died(
    algorithm, published_problem, continue_search, equal_records
):
    """On DTLZ2 a run diverges if the normalisation that NSGA-III keeps is not brought back."""
    problem = published_problem("dtlz2")
    uninterrupted = continue_search(Search(problem.space, algorithm, 12, 4), problem.evaluate, 40)
    first = Search(problem.space, algorithm, 12, 4)
    record = continue_search(first, problem.evaluate, 12)
    second = Search.restore(problem.space, algorithm, 12, as_stored(first.state()))
    assert equal_records(record + continue_search(second, problem.evaluate, 28), uninterrupted)


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_warnings_of_the_process_stay_as_they_were(algorithm, run_search):
    """The library's normalisation switches all of them off (pymoo 0.6.2, nsga3.py)."""
    before = list(warnings.filters)
    run_search(SPACE, smooth, algorithm, 12, 3)
    assert warnings.filters == before


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_two_searches_side_by_side_do_not_meet(
    algorithm, run_search, continue_search, equal_records
):
    """Interleaved with another search, a search does what it does alone."""
    alone = run_search(SPACE, smooth, algorithm, 12, 6, seed=5)
    one, other = Search(SPACE, algorithm, 12, 5), Search(SPACE, algorithm, 12, 6)
    record = []
    for _ in range(6):
        record += continue_search(one, smooth, 1)
        continue_search(other, half_fail_alike, 1)
    assert equal_records(record, alone)


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_global_random_state_is_neither_used_nor_touched(algorithm, run_search, equal_records):
    record = run_search(SPACE, half_fail_alike, algorithm, 12, 4)
    np.random.seed(3)  # noqa: NPY002
    before = np.random.get_state()[1].copy()  # noqa: NPY002
    again = run_search(SPACE, half_fail_alike, algorithm, 12, 4)
    assert np.array_equal(before, np.random.get_state()[1])  # noqa: NPY002
    assert equal_records(record, again)


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_infeasible_search_walks_towards_the_feasible(algorithm, run_search):
    """From a first generation without a feasible design, feasible ones are found."""

    def corner(designs):
        f, _ = smooth(designs)
        u = (designs - SPACE.lower) / (SPACE.upper - SPACE.lower)
        return f, np.column_stack([0.97 - u[:, 0], u[:, 1] - 0.03])

    record = run_search(SPACE, corner, algorithm, 20, 25)
    assert not np.any(np.all(record[0][2] <= 0.0, axis=1))
    assert np.mean(np.all(record[-1][2] <= 0.0, axis=1)) > 0.5


@pytest.mark.parametrize("n_objectives", [3, 5])
@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_more_objectives(algorithm, n_objectives, continue_search, equal_records):
    """Three and five objectives without constraints, stopped in the middle."""
    space = SearchSpace(np.zeros(6), np.ones(6), np.full(6, 0.5), n_objectives, 0)

    def evaluate(designs):
        away = [np.sum((designs - k / n_objectives) ** 2, axis=1) for k in range(n_objectives)]
        return np.column_stack(away), np.empty((len(designs), 0))

    search = Search(space, algorithm, 20, 1)
    uninterrupted = continue_search(search, evaluate, 8)
    half = Search(space, algorithm, 20, 1)
    record = continue_search(half, evaluate, 3)
    rest = Search.restore(space, algorithm, 20, as_stored(half.state()))
    assert equal_records(record + continue_search(rest, evaluate, 5), uninterrupted)


@pytest.mark.parametrize("algorithm", ALGORITHMS)
def test_box_without_room_ends_in_an_empty_ask(algorithm, continue_search):
    """Where every design is the baseline, nothing new can be asked for."""
    point = np.array([1.0, 2.0])
    space = SearchSpace(point, point, point, 2, 0)
    search = Search(space, algorithm, 4, 1)
    continue_search(search, lambda x: (np.ones((len(x), 2)), np.empty((len(x), 0))), 1)
    assert search.ask().shape == (0, 2)


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
@pytest.mark.parametrize("where", ["objectives", "constraints"])
def test_only_finite_values_come_in(bad, where):
    search = Search(SPACE, "nsga3", 12, 1)
    designs = search.ask()
    objectives, constraints = smooth(designs)
    {"objectives": objectives, "constraints": constraints}[where][5, 1] = bad
    with pytest.raises(ValueError, match=rf"{where} must be finite; found .* at \(5, 1\)"):
        search.tell(designs, objectives, constraints)


def test_misuse_is_refused():
    search = Search(SPACE, "nsga2", 12, 1)
    with pytest.raises(RuntimeError, match="No designs"):
        search.tell(np.empty((0, 3)), np.empty((0, 2)), np.empty((0, 2)))
    designs = search.ask()
    with pytest.raises(RuntimeError, match="not been told"):
        search.ask()
    with pytest.raises(RuntimeError, match="between a tell and the next ask"):
        search.state()
    objectives, constraints = smooth(designs)
    with pytest.raises(ValueError, match="same order"):
        search.tell(designs[::-1], objectives, constraints)
    with pytest.raises(ValueError, match=r"objectives must have the shape \(designs = 12"):
        search.tell(designs, objectives[:, :1], constraints)
    search.tell(designs, objectives, constraints)
    assert search.generation == 1


def test_state_of_another_search_is_refused():
    state = Search(SPACE, "nsga2", 12, 1).state()
    with pytest.raises(ValueError, match="found version 1, nsga2 and population 12"):
        Search.restore(SPACE, "nsga3", 12, state)


@pytest.mark.parametrize(
    ("algorithm", "population", "match"),
    [("annealing", 12, "one of nsga2, nsga3, sms-emoa"), ("nsga2", 3, "at least 4; found 3")],
)
def test_wrong_settings_are_refused(algorithm, population, match):
    with pytest.raises(ValueError, match=match):
        Search(SPACE, algorithm, population, 1)


@pytest.mark.parametrize(
    ("change", "match"),
    [
        ({"lower": np.array([2.0, 0.0, 2.0])}, "lower must be at most upper"),
        ({"baseline": np.array([0.0, 0.0, 9.0])}, "inside the bounds"),
        ({"baseline": np.array([0.0, 0.0])}, "baseline must have the shape"),
        ({"upper": np.array([1.0, np.inf, 4.0])}, "upper must be finite"),
        ({"n_objectives": 1}, "at least 2"),
    ],
)
def test_wrong_spaces_are_refused(change, match):
    fields = {
        "lower": SPACE.lower,
        "upper": SPACE.upper,
        "baseline": SPACE.baseline,
        "n_objectives": 2,
        "n_constraints": 2,
    }
    with pytest.raises(ValueError, match=match):
        SearchSpace(**(fields | change))


def test_the_room_opens_without_the_library():
    """Only `algorithm` imports pymoo, and only when it is asked for."""
    code = (
        "import sys, optim.search, optim.search.termination, optim.search.sampling, "
        "optim.search.space; print('pymoo' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"
