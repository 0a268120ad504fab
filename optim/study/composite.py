"""Values of a study that may be written in more than one form."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

from optim.study.units import FRACTION, LENGTH, NUMBER, UnitError, read_either, shown
from optim.study.values import CONDITION_NAME, Measure, Value, did_you_mean


@dataclass(frozen=True)
class Extent:
    """A size that may be given as a length or as a fraction of the chord.

    Attributes
    ----------
    value : float
        In `unit`.
    unit : str
        "m" or "chord".
    """

    value: float
    unit: Literal["m", "chord"] = "chord"

    def chords(self, chord: float) -> float:
        """Return the size in chords, for a chord [m]."""
        return self.value / chord if self.unit == "m" else self.value

    def metres(self, chord: float) -> float:
        """Return the size [m], for a chord [m]."""
        return self.value if self.unit == "m" else self.value * chord


@dataclass(frozen=True)
class LengthOrFraction(Value):
    """A length, or a fraction of the chord; a plain number is a fraction."""

    at_most: float
    """Largest fraction of the chord."""

    @property
    def accepted(self) -> str:
        """Both forms."""
        most = FRACTION.stated(self.at_most)
        return f'a length such as "0.8 mm" or a fraction of the chord from 0 % to {most}'

    def read(self, value: object) -> Extent:
        """Return the extent."""
        if isinstance(value, Extent):
            return value
        number, dimension = read_either(value, (FRACTION, LENGTH))
        if number < 0.0 or (dimension is FRACTION and number > self.at_most):
            raise UnitError(f"{shown(value)} is out of range; accepted is {self.accepted}.")
        return Extent(number, "m" if dimension is LENGTH else "chord")

    def write(self, value: Extent) -> str | float:
        """Return the text or the number."""
        return f"{value.value!r} m" if value.unit == "m" else value.value

    def json_schema(self) -> dict[str, Any]:
        """Accept a number or a text with a unit."""
        return Measure(FRACTION, at_least=0.0, at_most=self.at_most).json_schema()


@dataclass(frozen=True)
class Lift(Value):
    """A lift coefficient, or how it follows from the flight."""

    lowest: float
    highest: float

    @property
    def accepted(self) -> str:
        """The two words and the range."""
        return f"level, maximum or a lift coefficient from {self.lowest:g} to {self.highest:g}"

    def read(self, value: object) -> float | str:
        """Return the word or the number."""
        if value in ("level", "maximum"):
            return str(value)
        try:
            return Measure(NUMBER, at_least=self.lowest, at_most=self.highest).read(value)
        except UnitError as error:
            near = did_you_mean(value, ["level", "maximum"]) if isinstance(value, str) else ""
            sentence = f"{shown(value)} is not accepted; accepted is {self.accepted}"
            raise UnitError(sentence + (near or ".")) from error

    def json_schema(self) -> dict[str, Any]:
        """Accept a word or a number."""
        number = Measure(NUMBER, at_least=self.lowest, at_most=self.highest).json_schema()
        return {"anyOf": [{"enum": ["level", "maximum"]}, number]}


@dataclass(frozen=True)
class Where(Value):
    """Where an objective is taken: a condition, weights of several, or a place x/c."""

    @property
    def accepted(self) -> str:
        """The three forms."""
        return (
            "the name of a condition, weights such as {cruise: 0.7, climb: 0.3}, "
            "or for a depth the place x/c"
        )

    def read(self, value: object) -> str | dict[str, float] | float:
        """Return the name, the weights or the place."""
        if isinstance(value, Mapping):
            return {str(name): self._weight(name, weight) for name, weight in value.items()}
        if isinstance(value, str) and re.fullmatch(CONDITION_NAME.pattern, value):
            return value
        try:
            return Measure(FRACTION, at_least=0.0, at_most=1.0).read(value)
        except UnitError as error:
            sentence = f"{shown(value)} is not accepted; accepted is {self.accepted}."
            raise UnitError(sentence) from error

    @staticmethod
    def _weight(name: str, weight: object) -> float:
        try:
            return Measure(FRACTION, more_than=0.0, at_most=1e6).read(weight)
        except UnitError as error:
            raise UnitError(str(error), (name,)) from error

    def json_schema(self) -> dict[str, Any]:
        """Accept any of the three forms."""
        weight = Measure(FRACTION, more_than=0.0).json_schema()
        return {
            "anyOf": [
                {"type": "string"},
                {"type": "number", "minimum": 0, "maximum": 1},
                {"type": "object", "additionalProperties": weight, "minProperties": 1},
            ]
        }
