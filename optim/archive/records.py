"""What a run hands to its archive: one header, then one record a generation.

Both are plain texts, numbers and arrays; nothing in them is ever executed. The archive checks
their shapes and types at the door (`optim.archive.items`) and stores them as they are.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from numpy.typing import NDArray

from optim.arrays import FloatArray, IntArray

Sense = Literal["maximise", "minimise"]
LimitKind = Literal["min", "max"]


@dataclass(frozen=True, slots=True, eq=False)
class RunHeader:
    """What is known before the first evaluation and never changes afterwards.

    Attributes
    ----------
    study_name, study_text, resolved_text : str
        The study's name, the file as it was written, and the study with every default and unit
        resolved.
    variable_names : (n_variables,) tuple of str
        Names of the design variables.
    lower, upper : (n_variables,) array
        Bounds of the search [in the variable's own unit].
    objective_names, objective_senses, objective_units : (n_objectives,) tuple of str
        Unique names such as ``lift_to_drag@survey``; "maximise" or "minimise"; unit.
    reference_point : (n_objectives,) array
        Reference point of the hypervolume, every objective minimised.
    constraint_names, constraint_kinds, constraint_units : (n_constraints,) tuple of str
        Unique names, "min" or "max", unit.
    constraint_limits, constraint_scales : (n_constraints,) array
        The limit and the size by which its margin is divided [in the constraint's unit].
    condition_names : (n_conditions,) tuple of str
        Names of the conditions.
    conditions_table : str
        The resolved conditions as JSON.
    condition_quantity_names, condition_quantity_units : (n_condition_quantities,) tuple of str
        What is recorded of every condition.
    section_quantity_names, section_quantity_units : (n_section_quantities,) tuple of str
        What is recorded of the section itself.
    algorithm : str
        Name of the search algorithm.
    seed : int
        Seed of the search.
    provenance : mapping
        Versions, processor, digests: see `optim.archive.provenance.collect`. Must be
        representable as JSON.
    """

    study_name: str
    study_text: str
    resolved_text: str
    variable_names: tuple[str, ...]
    lower: FloatArray
    upper: FloatArray
    objective_names: tuple[str, ...]
    objective_senses: tuple[Sense, ...]
    objective_units: tuple[str, ...]
    reference_point: FloatArray
    constraint_names: tuple[str, ...]
    constraint_kinds: tuple[LimitKind, ...]
    constraint_limits: FloatArray
    constraint_units: tuple[str, ...]
    constraint_scales: FloatArray
    condition_names: tuple[str, ...]
    conditions_table: str
    condition_quantity_names: tuple[str, ...]
    condition_quantity_units: tuple[str, ...]
    section_quantity_names: tuple[str, ...]
    section_quantity_units: tuple[str, ...]
    algorithm: str
    seed: int
    provenance: Mapping[str, Any]


@dataclass(frozen=True, slots=True, eq=False)
class GenerationRecord:
    """One generation: n evaluations, and the search's state after it was told of them.

    Attributes
    ----------
    generation : int
        Counted from 0, without a gap.
    designs : (n, n_variables) array
        Design variables.
    objectives : (n, n_objectives) array
        In their true sense; not-a-number where absent.
    constraint_values, margins : (n, n_constraints) array
        The constrained quantity [its unit] and its scaled margin [-], negative if violated;
        not-a-number where absent.
    violation : (n,) array
        Total violation [-]; 0 is feasible.
    quantities : (n, n_conditions, n_condition_quantities) array
        All quantities of all conditions; not-a-number where absent.
    section_quantities : (n, n_section_quantities) array
        Quantities of the section; not-a-number where absent.
    outcomes : (n, n_conditions) integer array
        How each condition ended, codes of `optim.outcomes.Outcome`.
    design_outcomes : (n,) integer array
        How the whole design ended, the same codes.
    search_objectives : (n, n_objectives) array
        What the search was told: minimised, finite.
    search_constraints : (n, m) array
        What the search was told: satisfied at or below zero, finite.
    points, iterations : (n,) integer array
        Coupled points solved and Newton iterations taken by each evaluation.
    seconds : (n,) array
        Time of each evaluation in its worker [s].
    hypervolume : float
        Of all feasible evaluations up to here against the reference point.
    elapsed : float
        Time the run had been going at the end of this generation, over all its sessions [s].
    state_json : str
        The search's state that is not an array, as JSON (the random state among it).
    state_arrays : mapping of str to array
        The search's state that is arrays of numbers.
    """

    generation: int
    designs: FloatArray
    objectives: FloatArray
    constraint_values: FloatArray
    margins: FloatArray
    violation: FloatArray
    quantities: FloatArray
    section_quantities: FloatArray
    outcomes: NDArray[Any]
    design_outcomes: NDArray[Any]
    search_objectives: FloatArray
    search_constraints: FloatArray
    points: IntArray
    iterations: IntArray
    seconds: FloatArray
    hypervolume: float
    elapsed: float
    state_json: str
    state_arrays: Mapping[str, NDArray[Any]] = field(default_factory=dict)
