"""A comparison as text: what is compared, then one table."""

from __future__ import annotations

from itertools import groupby
from typing import Any

from optim.cli.output import number, table
from optim.report.cautions import CAUTION, CAUTION_FRONT, CAUTION_LIFT
from optim.report.units import as_read

Document = dict[str, Any]

LETTERS = "ABCDEF"
"""Headings of the columns: names of files are too long for them."""


def comparison_text(document: Document) -> str:
    """Return the text of a comparison document (`optim.report.comparison`)."""
    columns = document["columns"]
    legend = [
        f"{letter}  {one['kind']} {one['name']}"
        for letter, one in zip(LETTERS, columns, strict=False)
    ]
    head = ["", *LETTERS[: len(columns)]]
    rows: list[list[str]] = []
    for condition, group in groupby(document["rows"], key=lambda row: row["condition"]):
        if condition is not None:
            rows.append([f"at {condition}", *[""] * len(columns)])
        rows += [[row["quantity"], *_cells(row)] for row in group]
    width = max([len(row[0]) for row in rows], default=0)
    lines = [[row[0].ljust(width), *row[1:]] for row in rows]
    return "\n".join(
        [
            *legend, "", table([head[0].ljust(width), *head[1:]], lines), *_volumes(document),
            *document["notes"], CAUTION, CAUTION_FRONT, CAUTION_LIFT,
        ]
    )  # fmt: skip


def _cells(row: Document) -> list[str]:
    return [_cell(value, row["unit"]) for value in row["values"]]


def _cell(value: Any, unit: str) -> str:  # noqa: ANN401  a number, a word or nothing
    if value is None or isinstance(value, str):
        return value or "-"
    if unit in {"designs", "-"} or isinstance(value, int):
        return number(value, ".6g")
    return as_read(value, unit)


def _volumes(document: Document) -> list[str]:
    found = document.get("hypervolume")
    if found is None:
        return []
    reference = ", ".join(f"{k} {number(v)}" for k, v in found["reference_point"].items())
    return [
        f"hypervolume of all fronts together {number(found['union'], '.6g')}, each from {reference}"
    ]
