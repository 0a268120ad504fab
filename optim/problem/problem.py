"""Problem: a study turned into a function from a design to its evaluation.

::

    design -> section -> shape limits -> flows of all conditions -> quantities -> judgement

The function is pure: flows start from the same section's earlier conditions, in the order of the
study, and from nothing else, so that `analyse` gives the numbers that `evaluate` recorded. A
design that is no section, or that misses the limits on its shape by far, is not flown.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import TypeVar

import numpy as np

from optim.aerodynamics.operating_point import SectionFlow
from optim.arrays import FloatArray, check_finite, check_shape, frozen
from optim.errors import Fault, StudyError
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes
from optim.geometry.validity import faults
from optim.outcomes import Outcome
from optim.problem import judge
from optim.problem.conditions import Condition, resolve
from optim.problem.constraints import ConstraintSpec, shortfall
from optim.problem.design_space import DesignSpace, design_space
from optim.problem.evaluation import Evaluation
from optim.problem.flying import MakeSolver, coupled_solver, fly, not_flown
from optim.problem.grading import condition_shortfall, contour_violation, lift_reached
from optim.problem.objectives import ObjectiveSpec
from optim.problem.quantities import (
    RECORDED_OF_A_CONDITION,
    RECORDED_OF_A_SECTION,
    flow_quantities,
    section_quantity,
)
from optim.problem.specs import constraint_specs, objective_specs
from optim.study.schema import Study
from optim.study.vocabulary import QUANTITIES

Step = TypeVar("Step")

GIVE_UP_AT = 0.25
"""Sum of the scaled violations of shape limits from which a section is not flown: a quarter of a
limit is more than a search gains on its way by knowing the flow."""


@dataclass(frozen=True)
class _Attempt:
    """How far a design got: its section's numbers, its flows and what they cost."""

    section: dict[str, float]
    flows: tuple[SectionFlow, ...]
    contour_violation: float = 0.0
    points: int = 0


@dataclass(frozen=True)
class Problem:
    """A study as a function from a design to its evaluation.

    Attributes
    ----------
    name : str
        Name of the study.
    space : DesignSpace
        Variables, bounds and baseline.
    conditions : tuple of Condition
        Resolved conditions in the order of the study.
    objectives : tuple of ObjectiveSpec
        What is wanted, two or more.
    constraints : tuple of ConstraintSpec
        What must be kept.
    chord : float
        Chord as built [m].
    panels : int
        Panels around a section.
    declared_reference : tuple of float or None
        Reference point of the study in true senses.
    solver : callable
        Makes the evaluator of a section from its nodes.
    """

    name: str
    space: DesignSpace
    conditions: tuple[Condition, ...]
    objectives: tuple[ObjectiveSpec, ...]
    constraints: tuple[ConstraintSpec, ...]
    chord: float
    panels: int
    declared_reference: tuple[float, ...] | None = None
    solver: MakeSolver = coupled_solver

    @classmethod
    def from_study(cls, study: Study, solver: MakeSolver = coupled_solver) -> Problem:
        """Return the problem of a study; equal studies make equal problems.

        Parameters
        ----------
        study : Study
            A loaded study.
        solver : callable
            Makes the evaluator of a section from its nodes.

        Returns
        -------
        Problem
            Nothing has been flown yet.

        Raises
        ------
        StudyError
            With all that disagrees, each with its path in the study.
        """
        wrong: list[Fault] = []
        conditions = _collect(wrong, lambda: resolve(study))
        space = _collect(wrong, lambda: design_space(study))
        if conditions is None or space is None:
            raise StudyError(wrong)
        return cls(
            name=study.study,
            space=space,
            conditions=conditions,
            objectives=objective_specs(study),
            constraints=constraint_specs(study),
            chord=study.chord,
            panels=study.evaluator.panels,
            declared_reference=study.search.reference_point,
            solver=solver,
        )

    @property
    def variable_names(self) -> tuple[str, ...]:
        """Names of the design variables."""
        return self.space.names

    @property
    def lower(self) -> FloatArray:
        """Lower bounds, (n_variables,)."""
        return self.space.lower

    @property
    def upper(self) -> FloatArray:
        """Upper bounds, (n_variables,)."""
        return self.space.upper

    @property
    def baseline_design(self) -> FloatArray:
        """The fitted baseline, (n_variables,)."""
        return self.space.fit.design

    @property
    def condition_names(self) -> tuple[str, ...]:
        """Names of the conditions."""
        return tuple(condition.name for condition in self.conditions)

    @property
    def condition_quantities(self) -> tuple[str, ...]:
        """Names of what is recorded of each condition."""
        return RECORDED_OF_A_CONDITION

    @property
    def condition_quantity_units(self) -> tuple[str, ...]:
        """Units of `condition_quantities`; codes and counts are pure numbers."""
        return tuple(
            QUANTITIES[name].unit if name in QUANTITIES else "1" for name in RECORDED_OF_A_CONDITION
        )

    @cached_property
    def _depths(self) -> dict[str, float]:
        """Recorded name -> place of every depth that the study asks for."""
        asked = [(spec.quantity, spec.at) for spec in self.objectives]
        asked += [(spec.quantity, spec.at) for spec in self.constraints]
        return {judge.recorded_name(name, at): at for name, at in asked if at is not None}

    @property
    def section_quantities(self) -> tuple[str, ...]:
        """Names of what is recorded of the section, depths at the places asked for last."""
        return (*RECORDED_OF_A_SECTION, *self._depths)

    @property
    def section_quantity_units(self) -> tuple[str, ...]:
        """Units of `section_quantities`."""
        units = [QUANTITIES[name].unit for name in RECORDED_OF_A_SECTION]
        return (*units, *[QUANTITIES["depth"].unit for _ in self._depths])

    @property
    def n_search_constraints(self) -> int:
        """How many constraints a search is told: the study's, and how incomplete a design is."""
        return len(self.constraints) + 1

    @cached_property
    def reference_point(self) -> FloatArray:
        """Reference point of the hypervolume, minimised, (n_objectives,).

        Declared by the study, or half as bad again as the fitted baseline, which is flown for it;
        StudyError if it then has no value.
        """
        if self.declared_reference is not None:
            pairs = zip(self.objectives, self.declared_reference, strict=True)
            return frozen(np.array([spec.minimised(value) for spec, value in pairs]))
        found = self._objectives(self._table(self._attempt(self.baseline_design)))
        missing = [s.name for s, v in zip(self.objectives, found, strict=True) if np.isnan(v)]
        if missing:
            message = (
                f"the baseline has no {' and no '.join(missing)} to deduce the reference point "
                f"from; accepted is search: {{reference_point: ...}} with a value for each "
                f"objective, or another baseline."
            )
            raise StudyError([Fault(message, ("section", "baseline"))])
        return frozen(judge.reference_point(self.objectives, found))

    def section(self, design: FloatArray) -> Section:
        """Return the section of a design, (n_variables,); its contour may have faults."""
        check_shape("design", design, {"n_variables": len(self.variable_names)})
        check_finite("design", design)
        return self.space.parameterisation.section(design)

    def measures(self, section: Section) -> dict[str, float]:
        """Return what is recorded of a section without faults, by name."""
        return {
            name: section_quantity(section, name.partition("@")[0], self._depths.get(name))
            for name in self.section_quantities
        }

    def evaluate(self, design: FloatArray) -> Evaluation:
        """Return what is known of a design once all its conditions have been flown.

        Parameters
        ----------
        design : (n_variables,) array
            Design variables, finite.

        Returns
        -------
        Evaluation
            A function of the design alone, but for `seconds`.

        Raises
        ------
        ValueError
            If the design has another length or is not finite.
        StudyError
            If the reference point follows from a baseline that has no value.
        """
        started = time.perf_counter()
        attempt = self._attempt(design)
        table = self._table(attempt)
        objectives = self._objectives(table)
        values = np.array(
            [judge.constraint_value(spec, table, self.chord) for spec in self.constraints]
        )
        margins = np.array([s.margin(v) for s, v in zip(self.constraints, values, strict=True)])
        told = self._told(attempt, margins, objectives)
        outcomes = np.array([flow.outcome for flow in attempt.flows], dtype=np.int8)
        return Evaluation(
            design=frozen(design),
            objectives=objectives,
            constraint_values=values,
            margins=margins,
            violation=judge.violation_of(told),
            quantities=np.array([table.conditions[name] for name in self.condition_names]),
            section_quantities=np.array(
                [table.of_section(name) for name in self.section_quantities]
            ),
            outcomes=outcomes,
            design_outcome=judge.design_outcome(outcomes),
            search_objectives=judge.search_objectives(
                self.objectives, objectives, self.reference_point
            ),
            search_constraints=told,
            points=attempt.points,
            iterations=sum(flow.iterations for flow in attempt.flows),
            seconds=time.perf_counter() - started,
        )

    def analyse(self, design: FloatArray, condition: str) -> SectionFlow:
        """Return the flow of a design at one condition, with its surface if it converged.

        Parameters
        ----------
        design : (n_variables,) array
            Design variables, finite.
        condition : str
            One of `condition_names`.

        Returns
        -------
        SectionFlow
            The numbers that `evaluate` records: all conditions are flown on the way.

        Raises
        ------
        ValueError
            If there is no such condition, or the design has another length or is not finite.
        """
        if condition not in self.condition_names:
            known = ", ".join(self.condition_names)
            raise ValueError(f"no condition is called {condition}; there are {known}.")
        return self._attempt(design).flows[self.condition_names.index(condition)]

    def _attempt(self, design: FloatArray) -> _Attempt:
        """Fly a design as far as it is worth."""
        section = self.section(design)
        if faults(section):
            violation = contour_violation(section, self.space.distance(design))
            return _Attempt(
                {}, not_flown(self.conditions, Outcome.NOT_A_SECTION, self.panels), violation
            )
        measures = self.measures(section)
        if self._shape_violation(measures) > GIVE_UP_AT:
            return _Attempt(
                measures, not_flown(self.conditions, Outcome.NOT_EVALUATED, self.panels)
            )
        solver = self.solver(panel_nodes(section, self.panels))
        flows = fly(solver, self.conditions)
        return _Attempt(measures, flows, points=solver.solves)

    def _shape_violation(self, measures: dict[str, float]) -> float:
        """Sum of the violations of the limits that need no flow."""
        table = judge.Table(measures, {}, {})
        of_shape = [spec for spec in self.constraints if spec.condition is None]
        return sum(
            shortfall(spec.margin(judge.constraint_value(spec, table, self.chord)))
            for spec in of_shape
        )

    def _table(self, attempt: _Attempt) -> judge.Table:
        """Return what is recorded of a design, by name."""
        pairs = list(zip(self.conditions, attempt.flows, strict=True))
        return judge.Table(
            section=attempt.section,
            conditions={c.name: flow_quantities(f, at_maximum=c.maximum) for c, f in pairs},
            converged={c.name: f.converged for c, f in pairs},
        )

    def _objectives(self, table: judge.Table) -> FloatArray:
        """Objectives in their true senses, (n_objectives,)."""
        return np.array([judge.objective_value(spec, table) for spec in self.objectives])

    def _told(self, attempt: _Attempt, margins: FloatArray, objectives: FloatArray) -> FloatArray:
        """Return the constraints that a search is told, (n_constraints + 1,)."""
        reached = lift_reached(attempt.flows)
        shortfalls = [condition_shortfall(flow, reached) for flow in attempt.flows]
        told = judge.search_constraints(margins, shortfalls, objectives)
        if attempt.contour_violation:
            told[-1] = attempt.contour_violation
        return told


def _collect(wrong: list[Fault], step: Callable[[], Step]) -> Step | None:
    """Return the result of a step, or None after adding its faults to `wrong`."""
    try:
        return step()
    except StudyError as error:
        wrong.extend(error.faults)
        return None
