"""Documents to JSON, CSV and plain tables."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Mapping, Sequence
from typing import Any

from optim.cli.console import show
from optim.report.plain import plain


def write_json(document: Mapping[str, Any]) -> None:
    """Write one JSON document to standard output; what is not a finite number is null."""
    show(json.dumps(plain(document), indent=1, allow_nan=False, ensure_ascii=False))


def write_csv(rows: Sequence[Mapping[str, Any]]) -> None:
    """Write rows of the same keys to standard output, with a header; what is absent is empty."""
    if not rows:
        return
    text = io.StringIO()
    writer = csv.DictWriter(text, list(rows[0]), lineterminator="\n")
    writer.writeheader()
    for row in rows:
        writer.writerow({key: _cell(value) for key, value in row.items()})
    show(text.getvalue())


def _cell(value: Any) -> Any:  # noqa: ANN401  any part of a document
    known = plain(value)
    return "" if known is None else repr(known) if isinstance(known, float) else known


def table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """Return rows of cells as text: columns as wide as their widest cell, set to the right.

    >>> print(table(["id", "cl"], [["#7", "0.61"], ["#112", "1.2"]]), end="")
      id    cl
      #7  0.61
    #112   1.2
    """
    lines = [list(head), *[list(row) for row in rows]]
    widths = [max(len(cell) for cell in column) for column in zip(*lines, strict=True)]
    return "".join(
        "  ".join(cell.rjust(width) for cell, width in zip(line, widths, strict=True)).rstrip()
        + "\n"
        for line in lines
    )


def banded(value: float | None, width: float | None, form: str) -> str:
    """Return a number with the half-width of its band, if it has one.

    >>> banded(0.6644, 0.0522, ".3f"), banded(0.6644, None, ".3f")
    ('0.664 ±0.052', '0.664')
    """
    told = number(value, form)
    return told if width is None or told == "-" else f"{told} ±{width:{form}}"


def number(value: float | None, form: str = ".4g") -> str:
    """Return a number for a table, a dash where there is none."""
    return "-" if value is None or math.isnan(value) else f"{value:{form}}"
