"""Texts such as "212 mm", "80 kt", "5 deg", "10 %" or "15 degC" to plain SI numbers.

The common units stand in closed tables of exact rationals, so that "212 mm" is the float nearest
to 0.212 and a study in common units needs no unit library. Any other unit goes to pint, which is
imported only then: its registry costs a few tenths of a second. The tables are held to pint by a
test.

A plain number, or a text that is only a number, is taken in the SI unit of its dimension.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from functools import cache
from typing import Any, TypeGuard

LONGEST_TEXT = 60
"""A longer text is no number with a unit."""

_NUMBER_WITH_UNIT = re.compile(r"\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3})?)\s*(.*?)\s*")
_UNIT = re.compile(r"[A-Za-zµμ°%_]+(?:\^-?\d)?(?:[*/][A-Za-zµμ°_]+(?:\^-?\d)?)*")
"""Exponents are one digit: a text must not be able to ask for 10^10^10."""

POUND = Fraction("0.45359237")
"""International avoirdupois pound [kg], 1959 agreement."""

FOOT = Fraction("0.3048")
"""International foot [m], 1959 agreement."""

NAUTICAL_MILE = Fraction(1852)
"""International nautical mile [m], 1929."""

STATUTE_MILE = 5280 * FOOT
"""International mile [m]."""

ZERO_CELSIUS = Fraction("273.15")
"""0 degrees Celsius [K], by definition of the scale."""

ZERO_FAHRENHEIT = Fraction("459.67") * Fraction(5, 9)
"""0 degrees Fahrenheit [K], by definition of the scale."""


class UnitError(ValueError):
    """A value that is not what is asked for; the text is one sentence.

    Parameters
    ----------
    sentence : str
        What is wrong and what is accepted.
    below : tuple of str or int
        Which part of the value is wrong, if it has parts.
    """

    def __init__(self, sentence: str, below: tuple[str | int, ...] = ()) -> None:
        super().__init__(sentence)
        self.below = below


@dataclass(frozen=True, eq=False)
class Dimension:
    """One kind of measure that a study may give.

    Attributes
    ----------
    name : str
        With its article: "a length".
    unit : str
        SI unit, in which a plain number is read; empty for a pure number.
    example : str
        A text that is accepted.
    units : mapping
        Common unit -> its size in the SI unit.
    offsets : mapping
        Unit -> what is added after scaling, in the SI unit; zero if not named.
    range_unit : str
        Unit in which a sentence states a range; empty for the SI unit.
    """

    name: str
    unit: str
    example: str
    units: Mapping[str, Fraction] = field(repr=False)
    offsets: Mapping[str, Fraction] = field(default_factory=dict, repr=False)
    range_unit: str = ""

    @property
    def accepted(self) -> str:
        """What a study may write, such as ``a length in m such as "212 mm"``."""
        if not self.unit:
            return self.name
        plain = "as a plain number" if self is FRACTION else f"in {self.unit}"
        return f'{self.name} {plain} or with its unit, such as "{self.example}"'

    def stated(self, value: float) -> str:
        """Return an SI value as a range states it, such as ``40 degC``."""
        unit = self.range_unit or self.unit
        if unit not in self.units:
            return f"{value:g}"
        offset = self.offsets.get(unit, Fraction(0))
        number = float((Fraction(value) - offset) / self.units[unit])
        return f"{round(number, 9) + 0.0:g} {unit}"  # no -0


NUMBER = Dimension("a number without unit", "", "0.6", {})
FRACTION = Dimension("a fraction", "1", "10 %", {"%": Fraction(1, 100)}, range_unit="%")
LENGTH = Dimension(
    "a length",
    "m",
    "212 mm",
    {
        "m": Fraction(1),
        "mm": Fraction(1, 1000),
        "cm": Fraction(1, 100),
        "dm": Fraction(1, 10),
        "km": Fraction(1000),
        "um": Fraction(1, 10**6),
        "µm": Fraction(1, 10**6),
        "in": FOOT / 12,
        "ft": FOOT,
    },
)
AREA = Dimension(
    "an area",
    "m^2",
    "0.55 m^2",
    {
        "m^2": Fraction(1),
        "dm^2": Fraction(1, 100),
        "cm^2": Fraction(1, 10**4),
        "mm^2": Fraction(1, 10**6),
        "ft^2": FOOT**2,
        "in^2": (FOOT / 12) ** 2,
    },
)
SPEED = Dimension(
    "a speed",
    "m/s",
    "18 m/s",
    {
        "m/s": Fraction(1),
        "km/h": Fraction(1000, 3600),
        "kt": NAUTICAL_MILE / 3600,
        "mph": STATUTE_MILE / 3600,
        "ft/s": FOOT,
    },
)
MASS = Dimension(
    "a mass",
    "kg",
    "6 kg",
    {"kg": Fraction(1), "g": Fraction(1, 1000), "t": Fraction(1000), "lb": POUND, "oz": POUND / 16},
)
TEMPERATURE = Dimension(
    "a temperature",
    "K",
    "15 degC",
    {"K": Fraction(1), "degC": Fraction(1), "degF": Fraction(5, 9)},
    {"degC": ZERO_CELSIUS, "degF": ZERO_FAHRENHEIT},
    "degC",
)
TEMPERATURE_DIFFERENCE = Dimension(
    "a difference of temperature",
    "K",
    "10 K",
    {"K": Fraction(1), "degC": Fraction(1), "degF": Fraction(5, 9)},
)
ANGLE = Dimension(
    "an angle",
    "rad",
    "5 deg",
    {"rad": Fraction(1), "deg": Fraction(math.pi) / 180},
    range_unit="deg",
)
TIME = Dimension(
    "a time",
    "s",
    "8 h",
    {"s": Fraction(1), "min": Fraction(60), "h": Fraction(3600), "d": Fraction(86400)},
)

DIMENSIONS = (
    NUMBER, FRACTION, LENGTH, AREA, SPEED, MASS, TEMPERATURE, TEMPERATURE_DIFFERENCE, ANGLE, TIME,
)  # fmt: skip


def read(value: object, dimension: Dimension) -> float:
    """Return a measure in its SI unit.

    Parameters
    ----------
    value : object
        A number in the SI unit, or a text with a number and a unit.
    dimension : Dimension
        What is asked for.

    Returns
    -------
    float
        Finite, in ``dimension.unit``.

    Raises
    ------
    UnitError
        If it is no such measure.

    Examples
    --------
    >>> read("212 mm", LENGTH), read(0.212, LENGTH), read("15 degC", TEMPERATURE)
    (0.212, 0.212, 288.15)
    """
    return read_either(value, (dimension,))[0]


def read_either(value: object, dimensions: Sequence[Dimension]) -> tuple[float, Dimension]:
    """Return a measure of one of several dimensions, and of which it is.

    Parameters
    ----------
    value : object
        A number in the SI unit of the first dimension, or a text with a number and a unit.
    dimensions : sequence of Dimension
        What is accepted; a plain number is of the first.

    Raises
    ------
    UnitError
        If it is no measure of any of them.
    """
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        return _finite(_as_float(value), value, dimensions), dimensions[0]
    match = _NUMBER_WITH_UNIT.fullmatch(value) if _short_text(value) else None
    if match is None:
        raise UnitError(f"{shown(value)} is not accepted; {_accepted(dimensions)}.")
    number, unit = match.groups()
    if not unit:
        return _finite(float(number), value, dimensions), dimensions[0]
    found, dimension = _converted(Fraction(number), unit, value, dimensions)
    return _finite(found, value, dimensions), dimension


def shown(value: object) -> str:
    """Return a value as a sentence quotes it: short, on one line, as a study writes it."""
    if value is None:
        return "nothing"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, (Mapping, list, tuple)):
        return "a mapping of keys" if isinstance(value, Mapping) else "a list"
    return legible(f'"{value}"' if isinstance(value, str) else format(value))


def legible(text: str) -> str:
    """Return a text short and on one line, whatever it holds."""
    text = text.encode("unicode_escape").decode("ascii") if not text.isprintable() else text
    return text if len(text) <= LONGEST_TEXT else f"{text[:LONGEST_TEXT]}..."


def normal_unit(text: str) -> str:
    """Return a unit in the spelling of the tables: ``m²``, ``m**2`` and ``m2`` are ``m^2``."""
    text = text.replace("²", "^2").replace("³", "^3").replace("**", "^").replace("·", "*")
    text = re.sub(r"\s*([*/^])\s*", r"\1", text).replace("μ", "µ")
    text = re.sub(r"([A-Za-z])(-?\d)", r"\1^\2", text)
    return re.sub(r"^°(?=[CF]$)", "deg", text).replace("°", "deg")


def _short_text(value: object) -> TypeGuard[str]:
    return isinstance(value, str) and len(value) <= LONGEST_TEXT


def _as_float(value: float | Fraction) -> float:
    try:
        return float(value)
    except OverflowError:
        return math.inf


def _finite(number: float, value: object, dimensions: Sequence[Dimension]) -> float:
    if not math.isfinite(number):
        raise UnitError(f"{shown(value)} is not finite; {_accepted(dimensions)}.")
    return number


def _accepted(dimensions: Sequence[Dimension]) -> str:
    return "accepted is " + ", or ".join(d.accepted for d in dimensions)


def _converted(
    number: Fraction, unit: str, value: object, dimensions: Sequence[Dimension]
) -> tuple[float, Dimension]:
    """Convert by the tables if they know the unit, else by pint."""
    unit = normal_unit(unit)
    for dimension in dimensions:
        if unit in dimension.units:
            offset = dimension.offsets.get(unit, Fraction(0))
            return _as_float(number * dimension.units[unit] + offset), dimension
    for other in DIMENSIONS:
        if unit in other.units:
            raise UnitError(f"{shown(value)} is {other.name}; {_accepted(dimensions)}.")
    return _converted_by_pint(number, unit, value, dimensions)


def _converted_by_pint(
    number: Fraction, unit: str, value: object, dimensions: Sequence[Dimension]
) -> tuple[float, Dimension]:
    pint, registry = _registry()
    sentence = f"{shown(value)} has no unit that is known; {_accepted(dimensions)}."
    if _UNIT.fullmatch(unit) is None:
        raise UnitError(sentence)
    try:
        measure = registry.Quantity(_as_float(number), registry.Unit(unit.replace("µ", "u")))
    except (pint.errors.PintError, AttributeError, ValueError, TypeError) as error:
        raise UnitError(sentence) from error
    for dimension in dimensions:
        # Pint takes a radian, a count and a per cent for the same thing: those by the tables only.
        if dimension not in {NUMBER, FRACTION, ANGLE} and measure.check(dimension.unit):
            return float(measure.to(dimension.unit).magnitude), dimension
    raise UnitError(f"{shown(value)} has another dimension; {_accepted(dimensions)}.")


@cache
def _registry() -> tuple[Any, Any]:
    import pint  # noqa: PLC0415  its registry costs 0.4 s, and common units need none

    return pint, pint.UnitRegistry()
