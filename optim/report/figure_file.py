"""Which forms a figure can have; apart from the drawing, so that a question costs nothing."""

from __future__ import annotations

from pathlib import Path

from optim.errors import Fault, InputError

SUFFIXES = (".png", ".svg", ".pdf")
"""Forms of a figure."""


def check_suffix(path: Path) -> None:
    """Raise InputError unless the suffix names a form of a figure."""
    if path.suffix.lower() not in SUFFIXES:
        message = f"the form is told by the suffix; accepted is {', '.join(SUFFIXES)}."
        raise InputError([Fault(message, file=str(path))])
