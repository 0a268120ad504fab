"""What a study wants more or less of, as one number a design.

An objective is a quantity of the section, or of the flow at one condition, or a weighted mean over
several. Weights are shares: they are divided by their sum. The mean of a lift-to-drag ratio is
harmonic, 1 / sum(w cd/cl), because shares of distance at constant lift add drags, not ratios.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

Sense = Literal["maximise", "minimise"]

HARMONIC = frozenset({"lift_to_drag"})
"""Quantities whose reciprocals are averaged."""


@dataclass(frozen=True, slots=True)
class ObjectiveSpec:
    """One objective.

    Attributes
    ----------
    name : str
        Unique name, such as ``lift_to_drag@survey+loiter``.
    sense : {"maximise", "minimise"}
        Which way is better.
    unit : str
        Unit of the value; empty for a plain number.
    quantity : str
        The quantity's name.
    shares : tuple of (str, float)
        Condition and share, the shares adding to one; empty for a quantity of the section.
    at : float or None
        Place along the chord of a quantity that needs one [x/c].
    """

    name: str
    sense: Sense
    unit: str
    quantity: str
    shares: tuple[tuple[str, float], ...] = ()
    at: float | None = None

    def value(self, by_condition: Mapping[str, float]) -> float:
        """Return the mean of the quantity over the shares, not-a-number if any part is missing."""
        return weighted_mean(
            [by_condition[condition] for condition, _ in self.shares],
            [share for _, share in self.shares],
            harmonic=self.quantity in HARMONIC,
        )

    def minimised(self, value: float) -> float:
        """Return the value as something to make smaller; the same turns it back."""
        return -value if self.sense == "maximise" else value


def weighted_mean(values: Sequence[float], shares: Sequence[float], *, harmonic: bool) -> float:
    """Return a mean by shares.

    Parameters
    ----------
    values, shares : sequence of float
        Numbers of one length; the shares add to one.
    harmonic : bool
        Average the reciprocals; a value of zero then makes the mean zero.

    Returns
    -------
    float
        The mean; not-a-number if a value is, or if the harmonic mean has no finite value.
    """
    if any(math.isnan(value) for value in values):
        return math.nan
    pairs = list(zip(values, shares, strict=True))
    if not harmonic:
        return sum(share * value for value, share in pairs)
    if any(value == 0.0 and share > 0.0 for value, share in pairs):
        return 0.0
    reciprocal = sum(share / value for value, share in pairs if share > 0.0)
    return 1.0 / reciprocal if reciprocal else math.nan
