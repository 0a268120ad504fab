"""An A4 page of plain text, tables and axes, placed in millimetres from its upper left corner.

Text is measured before it is set, so that a cell too broad for its column is broken and nothing
runs into its neighbour or off the page.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

import matplotlib as mpl
from matplotlib.axes import Axes
from matplotlib.backends.backend_pdf import PdfPages
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path

from optim.errors import Fault, InputError
from optim.report.figures import GREY, PALE, STYLE

WIDTH, HEIGHT = 210.0, 297.0
"""A4, upright [mm]."""

MARGIN = 10.0
"""Kept free at every edge [mm]."""

INCH = 25.4
"""[mm]"""

POINT = INCH / 72.0
"""[mm]"""

BODY, SMALL, HEADING, TITLE = 7.0, 6.2, 8.5, 14.0
"""Sizes of text [pt]."""

LEADING = 1.35
"""Distance of two lines over the size of their text."""

COLUMN_GAP = 3.0
"""Between two columns of a table [mm]."""

LEAST_FIRST = 18.0
"""Width that the first column of a table gets at the least [mm]."""

PRINT: Any = STYLE | {
    "font.size": BODY,
    "axes.linewidth": 0.6,
    "pdf.fonttype": 42,  # text stays text: it can be searched and copied
}
"""How a page looks."""


@lru_cache(maxsize=4096)
def text_width(text: str, size: float, weight: str = "normal") -> float:
    """Return the width of a line of text [mm]."""
    font = FontProperties(size=size, weight=weight)
    width, _, _ = text_to_path.get_text_width_height_descent(text, font, ismath=False)
    return float(width) * POINT


def wrapped(text: str, width: float, size: float) -> list[str]:
    """Return the lines of a text of a width [mm]; a word that is too long is broken.

    >>> wrapped("one two", 8.0, 7.0)
    ['one', 'two']
    """
    lines, line = [], ""
    for word in text.split():
        if line and text_width(f"{line} {word}", size) > width:
            lines.append(line)
            line = word
        else:
            line = f"{line} {word}".strip()
        while text_width(line, size) > width and len(line) > 1:
            fits = next(k for k in range(len(line) - 1, 0, -1) if _fits(line[:k], width, size))
            lines.append(line[:fits])
            line = line[fits:]
    return [*lines, line] if line else lines or [""]


def _fits(text: str, width: float, size: float) -> bool:
    return len(text) == 1 or text_width(text, size) <= width


@dataclass(frozen=True)
class Page:
    """One page; distances in mm from its upper left corner, y down.

    Attributes
    ----------
    figure : Figure
        What is drawn on.
    """

    figure: Figure

    @classmethod
    def new(cls) -> Page:
        """Return an empty page."""
        return cls(Figure(figsize=(WIDTH / INCH, HEIGHT / INCH)))

    def text(self, x: float, y: float, line: str, size: float = BODY, **look: Any) -> None:  # noqa: ANN401
        """Write one line whose base is at y; names are never taken as formulas."""
        self.figure.text(
            x / WIDTH, 1.0 - y / HEIGHT, line, size=size, parse_math=False,
            **{"va": "baseline"} | look,
        )  # fmt: skip

    def heading(self, x: float, y: float, line: str) -> float:
        """Write a heading below y and return where what follows begins."""
        self.text(x, y + HEADING * POINT, line, HEADING, weight="bold")
        return y + HEADING * POINT + 1.8

    def paragraph(self, x: float, y: float, width: float, text: str, size: float = BODY) -> float:
        """Write a paragraph below y, broken to a width, and return where it ends."""
        for line in wrapped(text, width, size):
            y += size * POINT * LEADING
            self.text(x, y, line, size)
        return y

    def rule(self, x: float, y: float, width: float) -> None:
        """Draw a thin line across."""
        self.figure.add_artist(
            mpl.lines.Line2D(
                [x / WIDTH, (x + width) / WIDTH], [1.0 - y / HEIGHT] * 2, color=PALE, linewidth=0.6
            )
        )

    def axes(self, x: float, y: float, width: float, height: float) -> Axes:
        """Return axes whose frame has its upper left corner at x, y."""
        return self.figure.add_axes(
            (x / WIDTH, 1.0 - (y + height) / HEIGHT, width / WIDTH, height / HEIGHT)
        )

    def table(
        self, x: float, y: float, width: float, head: Sequence[str], rows: Sequence[Sequence[str]]
    ) -> float:
        """Write a table below y and return where it ends.

        Parameters
        ----------
        x, y, width : float
            Where [mm].
        head : sequence of str
            Headings.
        rows : sequence of sequences of str
            Cells; those of the first column are set to the left and broken where they are too
            broad, all others to the right.
        """
        size, first, others = _columns(width, head, rows)
        ends, at = [], x + first
        for column in others:
            at += COLUMN_GAP + column
            ends.append(at)
        y = self._row(x, y, head, (size, first, ends), color=GREY)
        self.rule(x, y + 1.0, ends[-1] - x if ends else width)
        y += 1.0
        for row in rows:
            y = self._row(x, y, row, (size, first, ends), color="black")
        return y

    def _row(
        self,
        x: float,
        y: float,
        row: Sequence[str],
        columns: tuple[float, float, list[float]],
        **look: Any,  # noqa: ANN401
    ) -> float:
        size, first, ends = columns
        lines = wrapped(row[0], first, size)
        top = y + size * POINT * LEADING
        for cell, end in zip(row[1:], ends, strict=True):
            self.text(end, top, cell, size, ha="right", **look)
        for k, line in enumerate(lines):
            self.text(x, top + k * size * POINT * LEADING, line, size, **look)
        return top + (len(lines) - 1) * size * POINT * LEADING


def _columns(
    width: float, head: Sequence[str], rows: Sequence[Sequence[str]]
) -> tuple[float, float, list[float]]:
    """Return size of the text, width of the first column and of the others; it shrinks to fit."""
    cells = list(zip(head, *rows, strict=True))
    broadest = [max(text_width(cell, BODY) for cell in column) for column in cells]
    others = broadest[1:]
    taken = sum(others) + COLUMN_GAP * len(others)
    shrink = min(1.0, (width - LEAST_FIRST - COLUMN_GAP * len(others)) / max(sum(others), 1.0))
    if shrink < 1.0:
        return BODY * shrink, LEAST_FIRST, [one * shrink for one in others]
    return BODY, min(broadest[0], width - taken), others


def spread(wanted: Sequence[float], gap: float, low: float, high: float) -> list[float]:
    """Return places as near to the wanted ones as a least gap between them allows.

    Parameters
    ----------
    wanted : sequence of float
        Rising.
    gap : float
        Least distance of two places.
    low, high : float
        Ends, between which there is room for all.

    Examples
    --------
    >>> spread([1.0, 2.0, 9.5], 2.0, 0.0, 10.0)
    [1.0, 3.0, 9.5]
    """
    placed: list[float] = []
    for place in wanted:
        placed.append(max(place, placed[-1] + gap if placed else low))
    limit = high
    for k in range(len(placed) - 1, -1, -1):
        placed[k] = min(placed[k], limit)
        limit = placed[k] - gap
    return placed


def print_pages(pages: Sequence[Page], path: Path, title: str) -> None:
    """Write pages as PDF; equal pages make equal files.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    facts = {"Title": title, "Creator": "sectionwright", "CreationDate": None}
    try:
        with mpl.rc_context(PRINT), PdfPages(path, metadata=facts) as file:
            for page in pages:
                file.savefig(page.figure)
    except OSError as error:
        message = f"the file cannot be written ({error.strerror}); accepted is another place."
        raise InputError([Fault(message, file=str(path))]) from error
