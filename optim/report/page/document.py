"""Everything that the page states, as plain data; what is absent is not-a-number or None."""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from optim.archive.digest import combined_digest
from optim.archive.reader import Run
from optim.arrays import BoolArray
from optim.errors import Fault, InputError
from optim.problem.flying import MakeSolver, coupled_solver
from optim.problem.problem import Problem
from optim.report.archived import picked
from optim.report.cautions import CAUTION, CAUTION_FRONT, CAUTION_LIFT, NOT_MODELLED
from optim.report.fields import Document
from optim.report.front import ACTIVE_MARGIN, BASELINE
from optim.report.judgement import Judgement
from optim.report.page.choice import RULES, Choice, choice
from optim.report.page.columns import columns
from optim.report.page.flown import (
    ANGLES,
    CONTAMINATED_LOWER,
    CONTAMINATED_UPPER,
    LAYER,
    SWEPT,
    Flown,
)
from optim.report.page.health import ending_fields, limit_fields, progress_fields, reason
from optim.report.page.outlines import outlines
from optim.report.page.packing import packed
from optim.report.page.shown import Shown, shown
from optim.report.page.words import plain, readable
from optim.report.units import as_read
from optim.study.load import parse_study

Listener = Callable[[int, int], None]
"""Is told how many finalists are flown, and of how many."""

TRAY = 6
"""Designs that stand beside the baseline."""


def page_document(
    run: Run,
    judgement: Judgement,
    *,
    finalists: tuple[int, ...] = (),
    solver: MakeSolver = coupled_solver,
    listener: Listener = lambda _done, _all: None,
) -> Document:
    """Return everything that the page states of a run.

    Parameters
    ----------
    run : Run
        Open.
    judgement : Judgement
        Of its evaluations.
    finalists : tuple of int
        Evaluations to be flown again; chosen by rule if there are none.
    solver : callable
        Makes the evaluator of a section from its nodes.
    listener : callable
        Is told of every finalist flown.

    Raises
    ------
    InputError
        If a finalist is not among the designs of the page.
    """
    study = parse_study(run.header.resolved_text)
    problem = Problem.from_study(study, solver)
    designs = shown(judgement, _sections(run))
    _check_finalists(run, designs, finalists)
    chosen = choice(judgement, designs, finalists)
    limits, endings = limit_fields(judgement), ending_fields(run)
    return {
        "study": judgement.study,
        "run": run.path.name,
        "state": run.state,
        "digest": combined_digest(run.digests().items()),
        "evaluated": run.evaluations,
        "generations": run.generations,
        "feasible": int(np.count_nonzero(judgement.violation == 0.0)),
        "front_size": designs.front_size,
        "conditions": _conditions(run),
        "chord": problem.chord,
        "baseline": study.section.baseline,
        "progress": progress_fields(run),
        "endings": endings,
        "limits": [_limit_words(one) for one in limits],
        "reason": "" if designs.front_size else reason(limits, endings, run.evaluations),
        "aims": [
            {"key": f"objective:{a.name}", "name": readable(a.name), "sense": a.sense}
            for a in judgement.aims
        ],
        "bounds": [_bound(one) for one in limits],
        "active_margin": ACTIVE_MARGIN,
        "designs": _designs(run, judgement, designs, chosen),
        "columns": [one.document() for one in columns(run, judgement, designs.rows.tolist())],
        "outlines": packed(_contours(run, problem, designs)),
        "flown": _flown(run, problem, designs, chosen, listener),
        "layer_columns": list(LAYER),
        "sweep_columns": list(SWEPT),
        "rules": dict(RULES),
        "tray": TRAY,
        "sweep": {
            "angles_deg": list(ANGLES),
            "trip_upper": CONTAMINATED_UPPER,
            "trip_lower": CONTAMINATED_LOWER,
        },
        "provenance": _provenance(run, problem),
        "cautions": _cautions(judgement),
    }


def plain_data(value: Any) -> Any:  # noqa: ANN401  any part of a document
    """Return a document as JSON can hold it: what is not a finite number becomes None."""
    if isinstance(value, Mapping):
        return {str(key): plain_data(part) for key, part in value.items()}
    if isinstance(value, list | tuple):
        return [plain_data(part) for part in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def _sections(run: Run) -> BoolArray:
    """Which evaluations are sections: those that have measures."""
    blocks = [block["section_quantities"] for block in run.blocks("section_quantities")]
    return np.concatenate(
        [np.isfinite(block[:, 0]) for block in blocks] or [np.empty(0, dtype=np.bool_)]
    )


def _check_finalists(run: Run, designs: Shown, asked: tuple[int, ...]) -> None:
    held = set(designs.rows.tolist())
    faults = [
        Fault(
            f"the page does not hold #{row}; accepted are designs of the front and those nearest "
            f"to it.",
            file=str(run.path),
        )
        for row in asked
        if row not in held
    ]
    if faults:
        raise InputError(faults)


def _conditions(run: Run) -> list[Document]:
    found: list[Document] = json.loads(run.header.conditions_table)
    for row in found:
        angle = row.pop("alpha")
        row["alpha_deg"] = None if angle is None else math.degrees(angle)
        row["label"] = plain(row["name"])
    return found


def _limit_words(one: Document) -> Document:
    return one | {
        "label": readable(one["name"]),
        "words": f"{'at least' if one['kind'] == 'min' else 'at most'} "
        f"{as_read(one['limit'], one['unit'])}",
    }


def _bound(one: Document) -> Document:
    """Return what ties a limit to its two columns."""
    return {
        "value": f"limit:{one['name']}",
        "margin": f"margin:{one['name']}",
        "label": readable(one["name"]),
        "words": _limit_words(one)["words"],
    }


def _designs(run: Run, judgement: Judgement, designs: Shown, chosen: Choice) -> Document:
    rows = designs.rows.tolist()
    born = picked(run, rows, "generation_of")["generation_of"].tolist() if rows else []
    marks: dict[int, list[str]] = {}
    for position, aim in zip(chosen.extremes, judgement.aims, strict=False):
        marks.setdefault(position, []).append(f"best {readable(aim.name)}")
    if chosen.knee is not None:
        marks.setdefault(chosen.knee, []).append("knee")
    return {
        "id": rows,
        "kind": list(designs.kinds),
        "generation": born,
        "violation": plain_data(judgement.violation[rows].tolist()),
        "marks": {str(position): words for position, words in marks.items()},
        "rule": chosen.rule,
    }


def _contours(run: Run, problem: Problem, designs: Shown) -> Any:  # noqa: ANN401
    rows = designs.rows.tolist()
    if not rows:
        return outlines(problem.space.parameterisation, np.empty((0, len(problem.lower))))
    return outlines(problem.space.parameterisation, picked(run, rows, "designs")["designs"])


def _flown(
    run: Run, problem: Problem, designs: Shown, chosen: Choice, listener: Listener
) -> Document:
    """Return the baseline and the finalists flown again, by their positions."""
    if not len(designs.rows):
        return {}
    flown = Flown(problem.conditions, problem.panels, problem.solver)
    positions = (0, *chosen.finalists)
    found = {}
    for done, position in enumerate(positions):
        listener(done, len(positions))
        design = run.evaluation(int(designs.rows[position]))["designs"]
        found[str(position)] = plain_data(flown.document(problem.section(design)))
    listener(len(positions), len(positions))
    return found


def _provenance(run: Run, problem: Problem) -> Document:
    header = run.header
    record = dict(header.provenance)
    libraries = record.get("libraries", {})
    asked = ("numpy", "scipy", "numba", "pymoo", "h5py")
    return {
        "sectionwright": record.get("sectionwright"),
        "began": record.get("time"),
        "platform": record.get("platform"),
        "processor": record.get("processor"),
        "python": str(record.get("python", "")).partition(" ")[0],
        "libraries": {name: libraries[name] for name in asked if name in libraries},
        "algorithm": header.algorithm,
        "seed": header.seed,
        "panels": problem.panels,
        "elapsed_s": run.status().elapsed_s,
        "sessions": len(run.sessions()),
        "study_text": header.study_text,
        "baseline_row": BASELINE,
    }


def _cautions(judgement: Judgement) -> list[str]:
    names = [aim.name for aim in judgement.aims] + [limit.name for limit in judgement.limits]
    peak = [CAUTION_LIFT] if any("cl_max" in name for name in names) else []
    return [CAUTION, CAUTION_FRONT, *peak, NOT_MODELLED]
