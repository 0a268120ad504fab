"""The published measurements beside the computed values: what ``validate --json`` says."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from optim.validation.case import Case, Comparison
from optim.validation.record import Record, left_out

Document = dict[str, Any]


def validation_document(comparisons: Sequence[Comparison]) -> Document:
    """Return the document of all comparisons.

    Parameters
    ----------
    comparisons : sequence of Comparison
        One a source, in the order in which they are told.

    Returns
    -------
    dict
        summary (count of each verdict), sources, cases, left_out (sets whose terms are not plainly
        free, and others that are not here). A case that has no computed value has none and no
        error, and is not reproduced.
    """
    cases = [case for one in comparisons for case in one.cases]
    return {
        "summary": summary(cases),
        "sources": [_source(one) for one in comparisons],
        "cases": [asdict(case) for case in cases],
        "left_out": left_out(),
    }


def summary(cases: Sequence[Case]) -> dict[str, int]:
    """Return how many cases there are of each verdict."""
    counts = Counter(case.verdict for case in cases)
    return {name: counts[name] for name in ("reproduced", "not reproduced", "shown")}


def _source(comparison: Comparison) -> Document:
    record: Record = comparison.record
    told = ("name", "title", "report", "place", "read_in", "status", "terms", "section")
    return {
        **{name: getattr(record, name) for name in (*told, "conditions", "scatter")},
        **summary(comparison.cases),
    }
