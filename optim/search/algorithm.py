"""The ask/tell loop around the published algorithms NSGA-II, NSGA-III and SMS-EMOA.

The selection of survivors, the crossover and the mutation are pymoo's; the first generation, the
tournament, the ends of a run and the state are our own, so that a run stopped after any
generation and restored from its state goes on bit for bit. What is left of the library's state
between two generations is the population (designs, objectives, constraints, rank and crowding),
the random state, and for NSGA-III the normalisation, which remembers every generation.

References
----------
NSGA-II: Deb, Pratap, Agarwal, and Meyarivan, IEEE Transactions on Evolutionary Computation 6(2),
2002, pp. 182-197.
NSGA-III: Deb and Jain, IEEE Transactions on Evolutionary Computation 18(4), 2014, pp. 577-601;
constraints: Jain and Deb, the same volume, pp. 602-622.
SMS-EMOA: Beume, Naujoks, and Emmerich, European Journal of Operational Research 181(3), 2007,
pp. 1653-1669, here with a whole generation of offspring at a time.
Crossover and mutation: Deb and Agrawal, Complex Systems 9, 1995, pp. 115-148 (simulated binary);
Deb and Goyal, Computer Science and Informatics 26(4), 1996, pp. 30-45 (polynomial).
"""

from __future__ import annotations

import json
import warnings
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from typing import Protocol, TypeAlias

import numpy as np
from pymoo.algorithms.moo.nsga2 import NSGA2
from pymoo.algorithms.moo.nsga3 import NSGA3
from pymoo.algorithms.moo.sms import SMSEMOA, LeastHypervolumeContributionSurvival
from pymoo.core.duplicate import DefaultDuplicateElimination
from pymoo.core.population import Population
from pymoo.core.problem import Problem
from pymoo.core.termination import NoTermination
from pymoo.operators.crossover.sbx import SBX
from pymoo.operators.mutation.pm import PM
from pymoo.operators.selection.tournament import TournamentSelection
from pymoo.operators.survival.rank_and_crowding import RankAndCrowding

from optim.arrays import FloatArray, check_finite, check_shape, frozen
from optim.search.reference_directions import reference_directions
from optim.search.sampling import first_generation
from optim.search.space import SearchSpace, SearchState
from optim.search.tournament import (
    Individuals,
    crowding,
    rank,
    stored,
    stored_or_nan,
    tournament,
    violation,
)

ALGORITHMS = ("nsga2", "nsga3", "sms-emoa")
"""Names that a study may give."""

SMALLEST_POPULATION = 4
"""Two pairs of parents; fewer leave a tournament nothing to choose between."""

CROSSOVER = {"nsga2": (0.9, 15.0), "nsga3": (1.0, 30.0), "sms-emoa": (0.9, 15.0)}
"""Probability and distribution index of the simulated binary crossover; the values of the NSGA-II
and NSGA-III papers, except 15 where the former has 20 (common practice)."""

MUTATION_INDEX = 20.0
"""Distribution index of the polynomial mutation; both papers."""

STATE_VERSION = 1
"""Version of what `Search.state` writes."""

_NORMALISATION = ("ideal_point", "worst_point", "nadir_point", "extreme_points")
_PER_DESIGN = ("rank", "crowding")


class Search:
    """One of the published algorithms, asked for designs and told their values.

    Parameters
    ----------
    space : SearchSpace
        Bounds, baseline and dimensions.
    algorithm : str
        One of `ALGORITHMS`.
    population : int
        Designs of a generation, at least `SMALLEST_POPULATION` and the number of objectives.
    seed : int
        Where all random numbers start, 0 or more.

    Raises
    ------
    ValueError
        If the algorithm has another name or the population is too small.
    """

    def __init__(self, space: SearchSpace, algorithm: str, population: int, seed: int) -> None:
        if algorithm not in ALGORITHMS:
            names = ", ".join(ALGORITHMS)
            raise ValueError(f"algorithm must be one of {names}; found {algorithm!r}.")
        if population < SMALLEST_POPULATION:
            raise ValueError(
                f"population must be at least {SMALLEST_POPULATION}; found {population}."
            )
        self._space = space
        self._name = algorithm
        self._population = population
        self._generation = 0
        self._asked: FloatArray | None = None
        self._engine = _engine(space, algorithm, population, seed)

    @property
    def generation(self) -> int:
        """Number of generations told so far."""
        return self._generation

    def ask(self) -> FloatArray:
        """Return the next designs to evaluate.

        Returns
        -------
        (n_designs, n_variables) array
            Read-only, inside the bounds, each different from the others and from the surviving
            population. Fewer than the population where no more such designs were found; none at
            all means that the search cannot go on.

        Raises
        ------
        RuntimeError
            If the designs asked for last have not been told.
        """
        if self._asked is not None:
            raise RuntimeError("The designs asked for last have not been told yet.")
        self._asked = frozen(self._offspring() if self._generation else self._first())
        return self._asked

    def tell(self, designs: FloatArray, objectives: FloatArray, constraints: FloatArray) -> None:
        """Take the values of the designs asked for last and choose the survivors.

        Parameters
        ----------
        designs : (n_designs, n_variables) array
            As they were asked for, in that order.
        objectives : (n_designs, n_objectives) array
            Minimised, finite.
        constraints : (n_designs, n_constraints) array
            Met at zero or below, finite.

        Raises
        ------
        RuntimeError
            If no designs are asked for.
        ValueError
            If the designs are others, a shape is wrong, or a value is not finite: one
            not-a-number would collapse the front of NSGA-III without a message.
        """
        if self._asked is None:
            raise RuntimeError("No designs have been asked for.")
        if not np.array_equal(designs, self._asked):
            raise ValueError("designs must be those asked for last, in the same order.")
        n = len(self._asked)
        check_shape(
            "objectives", objectives, {"designs": n, "objectives": self._space.n_objectives}
        )
        check_shape(
            "constraints", constraints, {"designs": n, "constraints": self._space.n_constraints}
        )
        check_finite("objectives", objectives)
        check_finite("constraints", constraints)
        with _library():
            self._engine.advance(infills=_individuals(self._asked, objectives, constraints))
        self._generation += 1
        self._asked = None

    def state(self) -> SearchState:
        """Return everything that `restore` needs.

        Raises
        ------
        RuntimeError
            If designs are asked for and not yet told.
        """
        if self._asked is not None:
            raise RuntimeError("The state is whole only between a tell and the next ask.")
        header = {
            "version": STATE_VERSION,
            "algorithm": self._name,
            "population": self._population,
            "generation": self._generation,
            "random": self._engine.random_state.bit_generator.state,
        }
        return SearchState(json.dumps(header, sort_keys=True), self._arrays())

    @classmethod
    def restore(
        cls, space: SearchSpace, algorithm: str, population: int, state: SearchState
    ) -> Search:
        """Return a search that goes on as the one that wrote the state would have.

        Parameters
        ----------
        space : SearchSpace
            The same space.
        algorithm : str
            The same algorithm.
        population : int
            The same population.
        state : SearchState
            From `state`, of this version.

        Raises
        ------
        ValueError
            If the state was written by another algorithm, population or version.
        """
        header = json.loads(state.json)
        found = tuple(header[key] for key in ("version", "algorithm", "population"))
        if found != (STATE_VERSION, algorithm, population):
            raise ValueError(
                f"The state must be of version {STATE_VERSION}, {algorithm} and population "
                f"{population}; found version {found[0]}, {found[1]} and population {found[2]}."
            )
        search = cls(space, algorithm, population, seed=0)
        search._engine.random_state.bit_generator.state = header["random"]
        search._generation = header["generation"]
        if search._generation:
            search._take(state.arrays)
        return search

    def _first(self) -> FloatArray:
        space = self._space
        return first_generation(
            space.baseline, space.lower, space.upper, self._population, self._engine.random_state
        )

    def _offspring(self) -> FloatArray:
        with _library():
            found = self._engine.infill()
        if found is None:  # a hundred matings gave only copies of the population
            return np.empty((0, len(self._space.lower)))
        return stored(found, "X")

    def _arrays(self) -> dict[str, FloatArray]:
        if not self._generation:
            return {}
        population = self._engine.pop
        arrays = {
            "designs": stored(population, "X"),
            "objectives": stored(population, "F"),
            "constraints": stored(population, "G"),
        }
        arrays |= {key: stored_or_nan(population, key) for key in _PER_DESIGN}
        if self._name == "nsga3":
            normalisation = self._engine.survival.norm
            found = {key: getattr(normalisation, key) for key in _NORMALISATION}
            arrays |= {key: value for key, value in found.items() if value is not None}
        return {key: frozen(value) for key, value in arrays.items()}

    def _take(self, arrays: Mapping[str, FloatArray]) -> None:
        population = _individuals(arrays["designs"], arrays["objectives"], arrays["constraints"])
        for key in _PER_DESIGN:
            population.set(key, [None if np.isnan(v) else v for v in arrays[key]])
        self._engine.pop = population
        self._engine.is_initialized = True
        self._engine.n_iter = self._generation + 1
        for key in _NORMALISATION:
            if key in arrays:
                setattr(self._engine.survival.norm, key, np.array(arrays[key]))


@contextmanager
def _library() -> Iterator[None]:
    """Keep the library's switching off of all warnings to itself.

    Its normalisation divides by zero where a front is degenerate, handles the result, and
    silences every warning of the process on the way.
    """
    with warnings.catch_warnings(), np.errstate(divide="ignore", invalid="ignore"):
        yield


def _individuals(
    designs: FloatArray, objectives: FloatArray, constraints: FloatArray
) -> Individuals:
    """Return a population of the library that holds copies of the given rows."""
    made: Individuals = Population.new(
        "X", np.array(designs), "F", np.array(objectives), "G", np.array(constraints)
    )
    return made


class _Survival(Protocol):
    """What is used of the library's choice of survivors."""

    norm: object  # NSGA-III only


class _Engine(Protocol):
    """What is used of an algorithm of the library."""

    pop: Individuals
    random_state: np.random.Generator
    survival: _Survival
    is_initialized: bool
    n_iter: int

    def setup(self, problem: object, *, termination: object) -> object:
        """Take the problem and start the random state."""

    def infill(self) -> Individuals | None:
        """Return offspring of the population."""

    def advance(self, infills: Individuals) -> object:
        """Choose the survivors."""


_Parts: TypeAlias = dict[str, object]


def _engine(space: SearchSpace, algorithm: str, population: int, seed: int) -> _Engine:
    """Return the library's algorithm, set up, with operators that nobody else holds.

    The operators in the library's own signatures are shared by all algorithms of a process.
    """
    probability, index = CROSSOVER[algorithm]
    parts = {
        "pop_size": population,
        "crossover": SBX(prob=probability, eta=index),
        "mutation": PM(eta=MUTATION_INDEX),
        "eliminate_duplicates": DefaultDuplicateElimination(),
        "output": None,
        "seed": seed,
        "sampling": None,
    }
    engine = _ENGINES[algorithm](space, population, parts)
    problem = Problem(
        n_var=len(space.lower),
        n_obj=space.n_objectives,
        n_ieq_constr=space.n_constraints,
        xl=np.array(space.lower),
        xu=np.array(space.upper),
    )
    engine.setup(problem, termination=NoTermination())
    return engine


def _nsga2(_space: SearchSpace, _population: int, parts: _Parts) -> _Engine:
    selection = TournamentSelection(func_comp=tournament(violation, rank, crowding))
    made: _Engine = NSGA2(selection=selection, survival=RankAndCrowding(), **parts)
    return made


def _nsga3(space: SearchSpace, population: int, parts: _Parts) -> _Engine:
    selection = TournamentSelection(func_comp=tournament(violation))
    directions = reference_directions(space.n_objectives, population)
    made: _Engine = NSGA3(directions, selection=selection, **parts)
    return made


def _sms_emoa(_space: SearchSpace, _population: int, parts: _Parts) -> _Engine:
    selection = TournamentSelection(func_comp=tournament(violation, rank))
    survival = LeastHypervolumeContributionSurvival()
    made: _Engine = SMSEMOA(selection=selection, survival=survival, **parts)
    return made


_ENGINES = {"nsga2": _nsga2, "nsga3": _nsga3, "sms-emoa": _sms_emoa}
