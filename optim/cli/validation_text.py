"""The validation as text: a table a source, then what is not reproduced and why."""

from __future__ import annotations

from itertools import groupby
from typing import Any

from optim.cli.output import number, table
from optim.report.cautions import CAUTION, CAUTION_LIFT

Document = dict[str, Any]

HEAD = ("quantity", "measured", "computed", "error", "scatter", "tolerance", "verdict")

SHARE = "relative"
"""Measure of errors that are told in per cent."""


def validation_text(document: Document) -> str:
    """Return the text of a validation document (`optim.report.validation`)."""
    sources = {one["name"]: one for one in document["sources"]}
    parts = []
    for name, cases in groupby(document["cases"], key=lambda case: str(case["source"])):
        parts += [_heading(sources[name]), _table(list(cases))]
    return "\n".join(
        [
            *parts,
            *_missed(document["cases"]),
            _overview(document["sources"]),
            _count(document["summary"]),
            f"{len(document['left_out'])} sets are left out, most for their terms of use; --json "
            "names them, and the terms of those that are here.",
            "Scatter includes the error of reading; tolerance adds the error granted to the "
            "method. Errors of several points are mean or largest sizes, as the quantity says.",
            "",
            CAUTION,
            CAUTION_LIFT,
        ]
    )


def _heading(source: Document) -> str:
    return (
        f"{source['title']}: {source['report']}; {source['place']}. {source['status']}.\n"
        f"{source['conditions']}"
    )


def _table(cases: list[Document]) -> str:
    rows = [_row(case) for case in cases]
    width = max(len(row[0]) for row in rows)
    return table(
        [HEAD[0].ljust(width), *HEAD[1:]], [[row[0].ljust(width), *row[1:]] for row in rows]
    )


def _row(case: Document) -> list[str]:
    unit = "" if case["unit"] == "-" else f" [{case['unit']}]"
    return [
        f"{case['quantity']}{unit}",
        number(case["measured"]),
        number(case["computed"]),
        _size(case, "error", "+"),
        _size(case, "scatter"),
        _size(case, "tolerance"),
        str(case["verdict"]),
    ]


def _size(case: Document, name: str, sign: str = "") -> str:
    value: float = case[name]
    if case["measure"] == SHARE:
        shown = number(100.0 * value, f"{sign}.1f")
        return shown if shown == "-" else f"{shown} %"
    return number(value, f"{sign}.2g")


def _missed(cases: list[Document]) -> list[str]:
    """Return the cases that are not reproduced, one line a reason."""
    missed = [case for case in cases if case["verdict"] == "not reproduced"]
    if not missed:
        return []
    reasons: dict[str, list[str]] = {}
    for case in missed:
        reasons.setdefault(case["reason"], []).append(f"{case['section']} {case['quantity']}")
    lines = [f"  {'; '.join(names)}:\n    {reason}" for reason, names in reasons.items()]
    return ["Not reproduced, and why:", *lines, ""]


def _overview(sources: list[Document]) -> str:
    rows = [
        [one["title"], *[str(one[name]) for name in ("reproduced", "not reproduced", "shown")]]
        for one in sources
    ]
    width = max(len(row[0]) for row in rows)
    head = ["source".ljust(width), "reproduced", "not reproduced", "shown"]
    return table(head, [[row[0].ljust(width), *row[1:]] for row in rows])


def _count(counts: dict[str, int]) -> str:
    decided = counts["reproduced"] + counts["not reproduced"]
    return (
        f"{counts['reproduced']} of {decided} cases are reproduced, {counts['not reproduced']} are "
        f"not; {counts['shown']} more are shown and decide nothing (from memory, or to compare)."
    )
