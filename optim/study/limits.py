"""The limits of a constraint: their unit follows from the quantity that they limit."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from pydantic import GetCoreSchemaHandler
from pydantic_core import CoreSchema, core_schema

from optim.study.units import (
    ANGLE,
    AREA,
    DIMENSIONS,
    FRACTION,
    LENGTH,
    NUMBER,
    Dimension,
    UnitError,
    read,
    read_either,
    shown,
)
from optim.study.values import MEASURE_PATTERN, Value, refusal
from optim.study.vocabulary import QUANTITIES, Unit

DIMENSIONS_OF_UNITS: dict[str, Dimension] = {
    "1": NUMBER,
    "chord": FRACTION,
    "chord^2": FRACTION,
    "rad": ANGLE,
    "m": LENGTH,
    "m^2": AREA,
}
"""Unit of a quantity or limit -> what a limit in it may be written as."""

BUILT_UNITS: dict[str, Unit] = {"chord": "m", "chord^2": "m^2"}
"""Unit of a quantity -> unit of a limit that is given at the real chord."""


def unit_of_limits(quantity: object, limits: list[object]) -> Unit | None:
    """Return the unit that a constraint's limits are in, None if the quantity is unknown.

    Parameters
    ----------
    quantity : object
        What the study names.
    limits : list
        The limits as written; all of them lengths (or areas) make the unit "m" (or "m^2").
    """
    if not isinstance(quantity, str) or quantity not in QUANTITIES:
        return None
    unit = QUANTITIES[quantity].unit
    built = BUILT_UNITS.get(unit)
    if built and limits and all(_is_a(limit, DIMENSIONS_OF_UNITS[built]) for limit in limits):
        return built
    return unit


def _is_a(limit: object, dimension: Dimension) -> bool:
    try:
        return isinstance(limit, str) and read_either(limit, (NUMBER, dimension))[1] is dimension
    except UnitError:
        return False


@dataclass(frozen=True)
class Limit(Value):
    """A limit in the unit of the constraint, read after its quantity and unit."""

    @property
    def accepted(self) -> str:
        """What decides."""
        return (
            'a number or a text with a unit that fits the quantity, such as "10 %" or "17 mm" '
            "for a depth; all limits of one constraint in one unit"
        )

    def read(self, value: object) -> float:
        """Return a limit of any dimension, while the quantity is not known."""
        try:
            return read_either(value, DIMENSIONS)[0]
        except UnitError as error:
            sentence = f"{shown(value)} is not accepted; accepted is {self.accepted}."
            raise UnitError(sentence) from error

    def read_in(self, value: object, unit: str) -> float:
        """Return a limit in `unit`."""
        try:
            return read(value, DIMENSIONS_OF_UNITS[unit])
        except UnitError as error:
            built = BUILT_UNITS.get(unit)
            if built is None:
                raise
            lengths = DIMENSIONS_OF_UNITS[built].accepted
            sentence = f"{str(error)[:-1]}, or all limits of the constraint as {lengths}."
            raise UnitError(sentence) from error

    def json_schema(self) -> dict[str, Any]:
        """Accept a number or a text with a unit."""
        return {"anyOf": [{"type": "number"}, {"type": "string", "pattern": MEASURE_PATTERN}]}

    def _read_with_unit(self, value: object, info: core_schema.ValidationInfo) -> float:
        unit = info.data.get("unit")
        try:
            return self.read_in(value, unit) if unit else self.read(value)
        except UnitError as error:
            raise refusal(error) from error

    def __get_pydantic_core_schema__(
        self, source: object, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        """Read after the fields `quantity` and `unit` of the same constraint."""
        return core_schema.with_info_plain_validator_function(self._read_with_unit)


@dataclass(frozen=True)
class UnitOfLimits(Value):
    """The unit that limits are in; deduced from them unless given."""

    @property
    def accepted(self) -> str:
        """The units."""
        return (
            "the unit of the quantity, or m (m^2 for an area) for limits at the real chord; "
            "deduced from the limits unless they are plain numbers"
        )

    def read(self, value: object) -> str:
        """Return the unit."""
        if not isinstance(value, str) or value not in DIMENSIONS_OF_UNITS:
            raise UnitError(f"{shown(value)} is not accepted; accepted is {self.accepted}.")
        return value

    def json_schema(self) -> dict[str, Any]:
        """Accept one of the units."""
        return {"enum": list(DIMENSIONS_OF_UNITS)}
