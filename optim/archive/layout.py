"""Every dataset of the archive: path, type, axes, unit, meaning. The one place where they stand.

The journal stores the same items under the same paths, so that RUN.h5 is the journal's items laid
end to end. `optim.archive.guide` writes results/README.md from here.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

FORMAT = "sectionwright run"
"""Root attribute ``format``: what kind of file this is."""

FORMAT_VERSION = 1
"""Raised by one whenever a reader of the previous version could misread a file."""

EVALUATION = "evaluation"
GENERATION = "generation"
CLOCK_GROUPS = ("timing", "provenance")
"""Groups that depend on the clock or the machine; all others are equal between equal runs."""

STATE_ARRAYS = "/state/arrays/"
"""Under here one dataset an array of the search's state, named by the algorithm."""

DType = Literal["f8", "i8", "i1", "text"]


@dataclass(frozen=True, slots=True)
class Dataset:
    """One dataset.

    Attributes
    ----------
    path : str
        Where it is in the archive.
    field : str
        The attribute of `RunHeader` or `GenerationRecord` that it holds.
    dtype : str
        f8, i8, i1 or text (fixed-length UTF-8, padded with zero bytes).
    axes : tuple of str
        What runs along each axis; empty for a single value.
    unit : str
        Unit; "-" is dimensionless, empty where a unit has no meaning.
    description : str
        One sentence.
    absent : str
        When a float may be not-a-number; empty if never.
    """

    path: str
    field: str
    dtype: DType
    axes: tuple[str, ...]
    unit: str
    description: str
    absent: str = ""

    @property
    def along(self) -> str:
        """The axis that grows while the run goes on, or an empty text."""
        grows = self.axes[:1] in ((EVALUATION,), (GENERATION,))
        return self.axes[0] if grows else ""


def group_of(path: str) -> str:
    """Return the first part of a dataset's path.

    >>> group_of("/timing/generation_elapsed")
    'timing'
    """
    return path.split("/")[1]


def depends_on_clock(path: str) -> bool:
    """Whether a dataset may differ between two equal runs."""
    return group_of(path) in CLOCK_GROUPS


GROUPS = {
    "study": "What was asked for.",
    "variables": "The design variables and the bounds of the search.",
    "objectives": "The objectives, in the order of the columns of /evaluations/objectives.",
    "constraints": "The constraints, in the order of the columns of /evaluations/constraints.",
    "conditions": "The conditions, in the order of the second axis of /evaluations/outcomes.",
    "condition_quantities": "What is recorded of every condition.",
    "section_quantities": "What is recorded of the section itself.",
    "search": "How the search was set.",
    "evaluations": "One row an evaluation, in the order of asking; the row is the ID of RUN.h5#ID.",
    "generations": "One row a generation.",
    "state": "The search after the last generation: what `resume` starts from.",
    "timing": "Durations. Never equal between two runs.",
    "provenance": "What computed the run. Not equal between two machines.",
}

_BY_OUTCOME = "where the outcome of the design or condition says why"

HEADER: tuple[Dataset, ...] = (
    Dataset("/study/name", "study_name", "text", (), "", "Name of the study."),
    Dataset("/study/text", "study_text", "text", (), "", "The study file as it was written."),
    Dataset(
        "/study/resolved",
        "resolved_text",
        "text",
        (),
        "",
        "The study with every default filled in and every number in SI units.",
    ),
    Dataset("/variables/name", "variable_names", "text", ("variable",), "", "Name."),
    Dataset(
        "/variables/lower",
        "lower",
        "f8",
        ("variable",),
        "of the variable",
        "Lower bound.",
    ),
    Dataset(
        "/variables/upper",
        "upper",
        "f8",
        ("variable",),
        "of the variable",
        "Upper bound.",
    ),
    Dataset(
        "/objectives/name",
        "objective_names",
        "text",
        ("objective",),
        "",
        "Unique name, such as lift_to_drag@survey.",
    ),
    Dataset(
        "/objectives/sense",
        "objective_senses",
        "text",
        ("objective",),
        "",
        "maximise or minimise.",
    ),
    Dataset("/objectives/unit", "objective_units", "text", ("objective",), "", "Unit."),
    Dataset(
        "/objectives/reference_point",
        "reference_point",
        "f8",
        ("objective",),
        "of the objective",
        "Reference point of the hypervolume, every objective minimised (maximised ones negated).",
    ),
    Dataset("/constraints/name", "constraint_names", "text", ("constraint",), "", "Unique name."),
    Dataset(
        "/constraints/kind",
        "constraint_kinds",
        "text",
        ("constraint",),
        "",
        "min or max: which side of the limit is wanted.",
    ),
    Dataset(
        "/constraints/limit",
        "constraint_limits",
        "f8",
        ("constraint",),
        "of the constraint",
        "The limit.",
    ),
    Dataset("/constraints/unit", "constraint_units", "text", ("constraint",), "", "Unit."),
    Dataset(
        "/constraints/scale",
        "constraint_scales",
        "f8",
        ("constraint",),
        "of the constraint",
        "The size by which a margin is divided.",
    ),
    Dataset("/conditions/name", "condition_names", "text", ("condition",), "", "Name."),
    Dataset(
        "/conditions/table",
        "conditions_table",
        "text",
        (),
        "",
        "The resolved conditions (speed, density, Reynolds number, lift ...) as JSON.",
    ),
    Dataset(
        "/condition_quantities/name",
        "condition_quantity_names",
        "text",
        ("condition_quantity",),
        "",
        "Name.",
    ),
    Dataset(
        "/condition_quantities/unit",
        "condition_quantity_units",
        "text",
        ("condition_quantity",),
        "",
        "Unit.",
    ),
    Dataset(
        "/section_quantities/name",
        "section_quantity_names",
        "text",
        ("section_quantity",),
        "",
        "Name.",
    ),
    Dataset(
        "/section_quantities/unit",
        "section_quantity_units",
        "text",
        ("section_quantity",),
        "",
        "Unit.",
    ),
    Dataset("/search/algorithm", "algorithm", "text", (), "", "Name of the algorithm."),
    Dataset("/search/seed", "seed", "i8", (), "", "Seed of every random choice of the run."),
    Dataset(
        "/provenance/record",
        "provenance",
        "text",
        (),
        "",
        "Versions, processor and digests when the run began, as JSON.",
    ),
)

RECORD: tuple[Dataset, ...] = (
    Dataset(
        "/evaluations/design",
        "designs",
        "f8",
        (EVALUATION, "variable"),
        "of the variable",
        "Design variables.",
    ),
    Dataset(
        "/evaluations/objectives",
        "objectives",
        "f8",
        (EVALUATION, "objective"),
        "of the objective",
        "Objectives in their true sense.",
        _BY_OUTCOME,
    ),
    Dataset(
        "/evaluations/constraints",
        "constraint_values",
        "f8",
        (EVALUATION, "constraint"),
        "of the constraint",
        "The constrained quantities.",
        _BY_OUTCOME,
    ),
    Dataset(
        "/evaluations/margins",
        "margins",
        "f8",
        (EVALUATION, "constraint"),
        "-",
        "Margin to the limit over its scale; negative is a violation.",
        _BY_OUTCOME,
    ),
    Dataset(
        "/evaluations/violation",
        "violation",
        "f8",
        (EVALUATION,),
        "-",
        "Total violation; 0 is feasible. A failed design has one graded by how far it got.",
    ),
    Dataset(
        "/evaluations/condition_quantities",
        "quantities",
        "f8",
        (EVALUATION, "condition", "condition_quantity"),
        "of the quantity",
        "All quantities of all conditions.",
        f"{_BY_OUTCOME}; x_cp for |cl| < 0.05; transition with kind none; "
        "separation and bubble where there is none",
    ),
    Dataset(
        "/evaluations/section_quantities",
        "section_quantities",
        "f8",
        (EVALUATION, "section_quantity"),
        "of the quantity",
        "Quantities of the section.",
        "where the design is no section",
    ),
    Dataset(
        "/evaluations/outcomes",
        "outcomes",
        "i1",
        (EVALUATION, "condition"),
        "",
        "How each condition ended; the attribute outcome_names gives the names of the codes.",
    ),
    Dataset(
        "/evaluations/design_outcome",
        "design_outcomes",
        "i1",
        (EVALUATION,),
        "",
        "How the whole design ended, the same codes.",
    ),
    Dataset(
        "/evaluations/search_objectives",
        "search_objectives",
        "f8",
        (EVALUATION, "objective"),
        "of the objective",
        "What the search was told: minimised, a finite stand-in for a failure.",
    ),
    Dataset(
        "/evaluations/search_constraints",
        "search_constraints",
        "f8",
        (EVALUATION, "search_constraint"),
        "-",
        "What the search was told: satisfied at or below zero, graded for a failure.",
    ),
    Dataset(
        "/evaluations/points",
        "points",
        "i8",
        (EVALUATION,),
        "-",
        "Coupled solutions attempted for this design.",
    ),
    Dataset(
        "/evaluations/iterations",
        "iterations",
        "i8",
        (EVALUATION,),
        "-",
        "Newton iterations taken for this design.",
    ),
    Dataset(
        "/evaluations/generation",
        "generation_of",
        "i8",
        (EVALUATION,),
        "-",
        "The generation it belongs to, counted from 0.",
    ),
    Dataset(
        "/generations/evaluations",
        "evaluations",
        "i8",
        (GENERATION,),
        "-",
        "Number of evaluations in the generation.",
    ),
    Dataset(
        "/generations/hypervolume",
        "hypervolume",
        "f8",
        (GENERATION,),
        "product of the objectives' units",
        "Hypervolume of all feasible evaluations so far against the reference point.",
    ),
    Dataset(
        "/timing/evaluation_seconds",
        "seconds",
        "f8",
        (EVALUATION,),
        "s",
        "Time of the evaluation in its worker.",
    ),
    Dataset(
        "/timing/generation_elapsed",
        "elapsed",
        "f8",
        (GENERATION,),
        "s",
        "Time the run had been going at the end of the generation, over all its sessions.",
    ),
)

STATE_JSON = Dataset(
    "/state/json",
    "state_json",
    "text",
    (),
    "",
    "State of the search that is not an array, as JSON; the random state is part of it.",
)

SESSIONS = Dataset(
    "/provenance/sessions",
    "sessions",
    "text",
    (),
    "",
    "Each start and resume as JSON: process, host, time, first generation, provenance.",
)

FIXED: tuple[Dataset, ...] = (*HEADER, *RECORD, STATE_JSON, SESSIONS)
"""All datasets but the state's arrays."""

BY_PATH = {dataset.path: dataset for dataset in FIXED}
BY_FIELD = {dataset.field: dataset for dataset in FIXED}
