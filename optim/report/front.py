"""The front of a run: the feasible designs that no other feasible design beats in everything.

In: an open `Run` and a `Judgement` of it. Out: the document of ``front --json``. Everything in it
is read from the archive.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping
from typing import Any

import numpy as np

from optim.archive.reader import Run
from optim.arrays import FloatArray
from optim.outcomes import Outcome
from optim.report.archived import RecordedConditions, picked
from optim.report.fields import Document, point_fields
from optim.report.judgement import Judgement
from optim.study.load import parse_study

BASELINE = 0
"""The evaluation that is the baseline: a search begins with it."""

ACTIVE_MARGIN = 0.01
"""A limit is called active if it is kept by less than this part of its scale: closer than that,
the limit and not the objectives holds the design where it is (rule of thumb)."""


def front_document(run: Run, judgement: Judgement) -> Document:
    """Return the front with all that is recorded of its designs.

    Parameters
    ----------
    run : Run
        Open.
    judgement : Judgement
        Of its evaluations.

    Returns
    -------
    dict
        The fields of ``front --json``; ``baseline`` is None and ``designs`` is empty as long as
        there is nothing.
    """
    rows = judgement.front().tolist()
    shown = ([BASELINE] if run.evaluations else []) + rows
    entries = [one | {"band": _bands(one)} for one in design_entries(run, judgement, shown)]
    failed = _endings(run)
    return {
        "study": judgement.study,
        **wanted(judgement),
        "evaluated": run.evaluations,
        "feasible": int(np.count_nonzero(judgement.violation == 0.0)),
        "failed": {name: n for name, n in failed.items() if name != Outcome.CONVERGED.label},
        "outcomes": failed,
        "hypervolume": judgement.hypervolume,
        "reference_point": _named(
            [aim.name for aim in judgement.aims], judgement.reference_point * judgement.signs
        ),
        "baseline": entries[0] if entries else None,
        "designs": entries[1:],
    }


def wanted(judgement: Judgement) -> dict[str, list[Document]]:
    """Return what is asked of a design: ``objectives`` and ``constraints``."""
    return {
        "objectives": [
            {"name": aim.name, "sense": aim.sense, "unit": aim.unit} for aim in judgement.aims
        ],
        "constraints": [
            {"name": one.name, "limit": one.limit, "unit": one.unit, "kind": one.kind}
            for one in judgement.limits
        ],
    }


def _endings(run: Run) -> dict[str, int]:
    """How many designs ended in each way, by the label of the outcome."""
    counts = Counter(run.design_outcomes.tolist())
    return {Outcome(code).label: counts[code] for code in sorted(counts)}


def design_entries(run: Run, judgement: Judgement, rows: list[int]) -> list[Document]:
    """Return all that is recorded of some evaluations, one entry of ``designs`` each."""
    if not rows:
        return []
    panels = parse_study(run.header.resolved_text).evaluator.panels
    recorded = RecordedConditions.of_header(run.header, panels)
    found = picked(run, rows, "designs", "generation_of", "quantities", "outcomes")
    return [
        {
            "id": row,
            "generation": int(found["generation_of"][k]),
            "variables": _named(run.header.variable_names, found["designs"][k]),
            "objectives": _named([aim.name for aim in judgement.aims], judgement.objectives[row]),
            "constraints": _limits(judgement, row),
            "conditions": _flows(judgement, recorded, found["quantities"][k], found["outcomes"][k]),
            "outcomes": dict(Counter(Outcome(code).label for code in found["outcomes"][k])),
        }
        for k, row in enumerate(rows)
    ]


def _named(names: list[str] | tuple[str, ...], values: FloatArray) -> dict[str, float]:
    return dict(zip(names, values.tolist(), strict=True))


BANDED_AS = {"cl_max": "cl", "nose_down_moment": "cm_quarter"}
"""Quantity -> the one of a flow whose band it has, where the names differ."""


def _bands(entry: Document) -> dict[str, float]:
    """Return the half-widths of the bands of a design's objectives and limits, by name.

    What is not stated of flows alone has none. Of several conditions the widest, as a share, is
    taken: the errors of one section at neighbouring conditions are alike.
    """
    values = {name: one["value"] for name, one in entry["constraints"].items()}
    found = {}
    for name, value in (values | entry["objectives"]).items():
        quantity, _, where = name.partition("@")
        quantity = BANDED_AS.get(quantity, quantity)
        names = where.partition(":")[0].split("+")
        points = [entry["conditions"].get(one) for one in names]
        widths = [_width(point, quantity, value, len(points) > 1) for point in points]
        if not any(math.isnan(width) for width in widths):
            found[name] = max(widths)
    return found


def _width(point: Document | None, quantity: str, value: float, several: bool) -> float:  # noqa: FBT001
    """Half-width of a quantity's band; of a mean of several conditions, by one's share of it."""
    band = None if point is None else point["band"]
    if point is None or band is None or quantity not in band:
        return math.nan
    width = float(band[quantity])
    return width * abs(value / point[quantity]) if several else width


def _limits(judgement: Judgement, row: int) -> dict[str, Document]:
    found = zip(
        judgement.limits,
        judgement.values[row].tolist(),
        judgement.margins[row].tolist(),
        strict=True,
    )
    return {
        limit.name: {"value": value, "margin": margin, "active": 0.0 <= margin < ACTIVE_MARGIN}
        for limit, value, margin in found
    }


def _flows(
    judgement: Judgement, recorded: RecordedConditions, quantities: FloatArray, codes: FloatArray
) -> Mapping[str, dict[str, Any]]:
    order = list(recorded.points)
    return {
        name: point_fields(
            recorded.flow(name, quantities[order.index(name)], int(codes[order.index(name)]))
        )
        for name in judgement.conditions
    }
