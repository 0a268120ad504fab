"""Which forms an exported section can have, and what is written beside it; loads nothing."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from types import MappingProxyType
from typing import Any

from optim.errors import Fault, InputError

FORMS: Mapping[str, str] = MappingProxyType(
    {
        ".csv": "points in mm",
        ".txt": "points in chords",
        ".dxf": "a spline in mm",
        ".svg": "a drawing at scale",
        ".json": "everything that is known of the design",
    }
)
"""Suffix -> what the file holds."""


def check_form(path: Path) -> None:
    """Raise InputError unless the suffix names a form."""
    if path.suffix.lower() not in FORMS:
        message = f"the form is told by the suffix; accepted is {', '.join(FORMS)}."
        raise InputError([Fault(message, file=str(path))])


@dataclass(frozen=True)
class Label:
    """What is written beside the contour.

    Attributes
    ----------
    title : str
        Which section it is.
    facts : mapping of str to str
        Chord, edge, digest, caution and the like.
    document : mapping
        All that is known of the design, for the form that has room for it.
    """

    title: str
    facts: Mapping[str, str]
    document: Mapping[str, Any] = field(default_factory=dict)

    def lines(self) -> list[str]:
        """Return title and facts, each in one line."""
        facts = [f"{name}: {value}" for name, value in self.facts.items()]
        return [" ".join(line.split()) for line in (self.title, *facts)]
