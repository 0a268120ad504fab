"""The kinds of value a key of a study may hold: how each is read, what it accepts, its JSON schema.

A `Value` stands in the annotation of a field, so that type, unit and range of a key are written in
one place; pydantic, the JSON schema and the guide all read them from there.
"""

from __future__ import annotations

import re
from abc import ABC, abstractmethod
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from optim.study.units import NUMBER, Dimension, UnitError, legible, read, shown

MEASURE_PATTERN = r"^\s*[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]{1,3})?(\s*[A-Za-zµμ°%].*)?$"
"""A text with a number and a unit, for editors; the units themselves are in `units`."""

SMALLEST_LIKENESS = 0.6
"""How alike two names must be for "did you mean", of 1 (difflib's measure); chosen by use."""

NAMES_OF_DEVICES = frozenset(
    {"con", "prn", "aux", "nul"} | {f"{d}{n}" for d in ("com", "lpt") for n in range(1, 10)}
)
"""File names that Windows keeps for devices, with any suffix."""


def did_you_mean(name: str, known: list[str]) -> str:
    """Return "; did you mean x?" for the nearest known name, or nothing if none is near."""
    near = get_close_matches(name, known, n=1, cutoff=SMALLEST_LIKENESS)
    return f"; did you mean {legible(near[0])}?" if near else ""


def refusal(error: UnitError) -> PydanticCustomError:
    """Return what pydantic collects for a value that was refused."""
    context = {"sentence": str(error), "below": error.below}
    return PydanticCustomError("value", "{sentence}", context)


class Value(ABC):
    """How one kind of value is read."""

    @property
    @abstractmethod
    def accepted(self) -> str:
        """What may be written, for sentences and for the guide."""

    @abstractmethod
    def read(self, value: object) -> Any:  # noqa: ANN401  each kind has its own type
        """Return the value as the study keeps it; UnitError says what is wrong with it."""

    @abstractmethod
    def json_schema(self) -> dict[str, Any]:
        """Return the JSON Schema of what may be written."""

    def write(self, value: Any) -> Any:  # noqa: ANN401
        """Return plain data that `read` turns into `value` again."""
        return value

    def _read_for_pydantic(self, value: object) -> Any:  # noqa: ANN401
        try:
            return self.read(value)
        except UnitError as error:
            raise refusal(error) from error

    def __get_pydantic_core_schema__(
        self, source: object, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        """Let pydantic read and write by this object alone."""
        return core_schema.no_info_plain_validator_function(
            self._read_for_pydantic,
            serialization=core_schema.plain_serializer_function_ser_schema(self.write),
        )

    def __get_pydantic_json_schema__(
        self, core: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        """Let pydantic write the schema of this object."""
        return self.json_schema()


@dataclass(frozen=True)
class Measure(Value):
    """A number with a unit, kept in SI, within a range."""

    dimension: Dimension = NUMBER
    at_least: float | None = None
    more_than: float | None = None
    at_most: float | None = None

    @property
    def accepted(self) -> str:
        """Kind, unit and range."""
        return ", ".join(filter(None, (self.dimension.accepted, self.range)))

    @property
    def range(self) -> str:
        """The range in words; empty if every number is accepted."""
        words = (
            ("at least", self.at_least), ("more than", self.more_than), ("at most", self.at_most),
        )  # fmt: skip
        return " and ".join(f"{w} {self.dimension.stated(v)}" for w, v in words if v is not None)

    def read(self, value: object) -> float:
        """Return the SI value."""
        number = read(value, self.dimension)
        if not self._within(number):
            unit = self.dimension.unit
            taken = f" (taken in {unit})" if unit not in {"", "1"} and self._is_plain(value) else ""
            raise UnitError(f"{shown(value)}{taken} is out of range; accepted is {self.accepted}.")
        return number

    @staticmethod
    def _is_plain(value: object) -> bool:
        return not isinstance(value, str)

    def _within(self, number: float) -> bool:
        return not (
            (self.at_least is not None and number < self.at_least)
            or (self.more_than is not None and number <= self.more_than)
            or (self.at_most is not None and number > self.at_most)
        )

    def json_schema(self) -> dict[str, Any]:
        """Accept a number in range, or a text with a unit."""
        ends = (
            ("minimum", self.at_least), ("exclusiveMinimum", self.more_than),
            ("maximum", self.at_most),
        )  # fmt: skip
        number = {"type": "number"} | {key: end for key, end in ends if end is not None}
        if not self.dimension.unit:
            return number
        text = {"type": "string", "pattern": MEASURE_PATTERN, "examples": [self.dimension.example]}
        return {"anyOf": [number, text]}


@dataclass(frozen=True)
class Count(Value):
    """A whole number within a range."""

    at_least: int
    at_most: int
    even: bool = False

    @property
    def accepted(self) -> str:
        """Kind and range."""
        kind = "an even whole number" if self.even else "a whole number"
        return f"{kind} from {self.at_least} to {self.at_most}"

    def read(self, value: object) -> int:
        """Return the number."""
        if (
            not isinstance(value, int)
            or isinstance(value, bool)
            or not self.at_least <= value <= self.at_most
            or (self.even and value % 2)
        ):
            raise UnitError(f"{shown(value)} is not accepted; accepted is {self.accepted}.")
        return value

    def json_schema(self) -> dict[str, Any]:
        """Accept an integer in range."""
        schema: dict[str, Any] = {
            "type": "integer", "minimum": self.at_least, "maximum": self.at_most
        }  # fmt: skip
        return schema | ({"multipleOf": 2} if self.even else {})


@dataclass(frozen=True)
class Flag(Value):
    """true or false."""

    @property
    def accepted(self) -> str:
        """The two words."""
        return "true or false"

    def read(self, value: object) -> bool:
        """Return the flag."""
        if not isinstance(value, bool):
            raise UnitError(f"{shown(value)} is not accepted; accepted is {self.accepted}.")
        return value

    def json_schema(self) -> dict[str, Any]:
        """Accept a boolean."""
        return {"type": "boolean"}


@dataclass(frozen=True)
class Choice(Value):
    """One word of a closed list."""

    words: tuple[str, ...]

    @property
    def accepted(self) -> str:
        """The list."""
        return "one of " + ", ".join(self.words)

    def read(self, value: object) -> str:
        """Return the word."""
        if not isinstance(value, str) or value not in self.words:
            near = did_you_mean(value, list(self.words)) if isinstance(value, str) else ""
            sentence = f"{shown(value)} is not accepted; accepted is {self.accepted}"
            raise UnitError(sentence + (near or "."))
        return value

    def json_schema(self) -> dict[str, Any]:
        """Accept one of the words."""
        return {"enum": list(self.words)}


@dataclass(frozen=True)
class Text(Value):
    """A text of a given form."""

    pattern: str
    accepted_: str
    file_name: bool = False

    @property
    def accepted(self) -> str:
        """The form in words."""
        return self.accepted_

    def read(self, value: object) -> str:
        """Return the text."""
        if not isinstance(value, str) or re.fullmatch(self.pattern, value) is None:
            raise UnitError(f"{shown(value)} is not accepted; accepted is {self.accepted}.")
        if self.file_name and value.split(".")[0].lower() in NAMES_OF_DEVICES:
            raise UnitError(
                f"{shown(value)} is the name of a device on some systems and cannot name a file; "
                f"accepted is {self.accepted}."
            )
        return value

    def json_schema(self) -> dict[str, Any]:
        """Accept a string of the form."""
        return {"type": "string", "pattern": f"^(?:{self.pattern})$"}


STUDY_NAME = Text(
    r"[A-Za-z0-9](?:[A-Za-z0-9._-]{0,62}[A-Za-z0-9])?",
    "a name of 1 to 64 letters A-Z, digits, dots, underscores and hyphens that starts and ends "
    "with a letter or digit, because files are named after it",
    file_name=True,
)
CONDITION_NAME = Text(
    r"[A-Za-z][A-Za-z0-9_-]{0,39}",
    "a name of 1 to 40 letters A-Z, digits, underscores and hyphens that starts with a letter",
)


@dataclass(frozen=True)
class Pair(Value):
    """Two numbers, each within its range, rising if they are the ends of an interval."""

    first: Measure = Measure(NUMBER)
    second: Measure = Measure(NUMBER)
    rising: bool = False

    @property
    def accepted(self) -> str:
        """The form."""
        if self.rising:
            return "a list of two numbers, the lower one first"
        return f"a list of two numbers: {self.first.range}, and {self.second.range}"

    def read(self, value: object) -> tuple[float, float]:
        """Return the two numbers."""
        if not isinstance(value, (list, tuple)) or len(value) != 2:
            raise UnitError(f"{shown(value)} is not accepted; accepted is {self.accepted}.")
        first, second = self._read(value, 0), self._read(value, 1)
        if self.rising and not first < second:
            raise UnitError(
                f"the lower end {first:g} is not below the upper end {second:g}; "
                f"accepted is {self.accepted}."
            )
        return first, second

    def _read(self, value: list[object] | tuple[object, ...], index: int) -> float:
        try:
            return (self.first, self.second)[index].read(value[index])
        except UnitError as error:
            raise UnitError(str(error), (index,)) from error

    def write(self, value: tuple[float, float]) -> list[float]:
        """Return a list."""
        return list(value)

    def json_schema(self) -> dict[str, Any]:
        """Accept an array of two numbers."""
        return {"type": "array", "items": {"type": "number"}, "minItems": 2, "maxItems": 2}
