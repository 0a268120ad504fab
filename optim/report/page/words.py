"""Names of the archive as a person reads them on the page."""

from __future__ import annotations

import re

from optim.report.units import factor_and_sign

FORMULA = re.compile(r"\$(?=\$)|\\(?=[(\[])")
"""What a plotting library takes for the beginning of a formula, which it would fetch a library to
set; a name that holds one is shown with a space in it."""


def readable(name: str) -> str:
    """Return a unique name in words.

    >>> readable("lift_to_drag@survey+loiter"), readable("depth@30%")
    ('lift to drag, survey + loiter', 'depth at 30 %')
    """
    quantity, _, place = name.partition("@")
    words = quantity.replace("_", " ")
    if not place:
        return plain(words)
    if place.partition(":")[0].endswith("%"):
        return plain(f"{words} at {place.replace('%', ' %')}")
    return plain(f"{words}, {place.replace('+', ' + ')}")


def plain(text: str) -> str:
    """Return a text that no library takes for a formula.

    >>> plain("$$x$$")
    '$ $x$ $'
    """
    return FORMULA.sub(lambda mark: f"{mark[0]} ", text)


def unit_as_read(unit: str) -> str:
    """Return the unit in which values of an archive's unit are shown, empty for pure numbers."""
    return factor_and_sign(unit)[1].strip()
