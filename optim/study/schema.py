"""Every key of a study: its unit, range, default and meaning. The one place where they are written.

The models are frozen and hold plain SI numbers, angles in radians. What one key alone can get
wrong is refused here; what two keys can disagree about is in `consistency`. `load` adds the places
in the file. The module is longer than others because a key that is written elsewhere would be
written twice.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Annotated, Any, Literal, Self

import numpy as np
from pydantic import BaseModel, ConfigDict, Field, PrivateAttr, model_validator

from optim.arrays import FloatArray
from optim.errors import Fault
from optim.study import yaml_text
from optim.study.composite import Extent, LengthOrFraction, Lift, Where
from optim.study.coordinate_file import CoordinateText
from optim.study.fingerprint import fingerprint
from optim.study.limits import Limit, UnitOfLimits, unit_of_limits
from optim.study.units import (
    ANGLE,
    AREA,
    FRACTION,
    LENGTH,
    MASS,
    SPEED,
    TEMPERATURE,
    TEMPERATURE_DIFFERENCE,
    TIME,
)
from optim.study.values import (
    CONDITION_NAME,
    STUDY_NAME,
    Choice,
    Count,
    Flag,
    Measure,
    Pair,
    Text,
)
from optim.study.vocabulary import QUANTITIES, Sense
from optim.study.yaml_text import Path, Place, Places, fault_at

DEFAULT_N_FACTOR = 9.0
"""Critical amplification exponent of a quiet tunnel; common practice."""

FEWEST_COEFFICIENTS, MOST_COEFFICIENTS = 4, 13
"""Bernstein polynomials of order 3 to 12 on each side."""

FEWEST_CONDITIONS, FEWEST_OBJECTIVES = 1, 2
"""Counted by `consistency`, as written: pydantic would count the readable ones only."""

LARGEST_GAP = 0.1
"""Trailing-edge gap [chords] beyond which a section has no edge; rule of thumb."""

QUANTITY_NAME = Choice(tuple(QUANTITIES))


WEIGHT_ROUNDING = 1e-9
"""Weights whose sum is this near to 1 are taken as they are."""


@dataclass(frozen=True)
class Source:
    """Where a study came from: its text, and the place of every value in it."""

    text: str = ""
    file: str = ""
    places: Places = field(default_factory=Places)
    warnings: tuple[Fault, ...] = ()


class Block(BaseModel):
    """A mapping of a study: frozen, and no key beyond those written here."""

    model_config = ConfigDict(frozen=True, extra="forbid")


def _one_of_keys(how: Literal["anyOf", "oneOf"], *keys: str) -> ConfigDict:
    """Let the JSON schema ask for one of several keys; `consistency` does so for a study."""
    return ConfigDict(json_schema_extra={how: [{"required": [key]} for key in keys]})


class Coefficients(Block):
    """How many coefficients shape each side."""

    upper: Annotated[int, Count(FEWEST_COEFFICIENTS, MOST_COEFFICIENTS)] = Field(
        default=6, description="Coefficients of the upper side: its Bernstein order plus one."
    )
    lower: Annotated[int, Count(FEWEST_COEFFICIENTS, MOST_COEFFICIENTS)] = Field(
        default=6, description="Coefficients of the lower side: its Bernstein order plus one."
    )


class SectionSettings(Block):
    """How a section is described and where the search for it starts."""

    shape: Annotated[Literal["cst", "bezier"], Choice(("cst", "bezier"))] = Field(
        description="The parameterisation: class and shape functions, or Bezier curves."
    )
    coefficients: Coefficients = Field(
        default=Coefficients(), description="How many coefficients shape each side."
    )
    leading_edge_term: Annotated[bool, Flag()] = Field(
        default=False,
        description="Whether a cst section has the term x (1 - x)^(n + 1/2), in exchange for one "
        "first coefficient that both sides share.",
    )
    class_exponents: Annotated[
        tuple[float, float],
        Pair(Measure(at_least=0.5, at_most=0.75), Measure(at_least=1.0, at_most=2.0)),
    ] = Field(
        default=(0.5, 1.0),
        description="Exponents of the class function x^a (1 - x)^b of a cst section; 0.5 and 1 "
        "make a round nose and a wedge at the edge.",
    )
    baseline: Annotated[
        str, Text(r"[^\x00-\x1f]{1,300}", "naca:DIGITS or the name of a coordinate file")
    ] = Field(
        description="The section that the search starts around and that the front is drawn "
        "against: naca:2412, or a coordinate file named relative to the study file."
    )
    baseline_coordinates: Annotated[tuple[tuple[float, float], ...] | None, CoordinateText()] = (
        Field(
            default=None,
            description="Text of a coordinate file, given here in place of reading the file that "
            "baseline names; written by the tool so that an archived study needs no other file.",
        )
    )
    freedom: Annotated[float, Measure(FRACTION, more_than=0.0, at_most=1.0)] = Field(
        default=0.1,
        description="How far each coefficient may move from its value in the baseline's fit.",
    )
    bounds: dict[str, Annotated[tuple[float, float], Pair(rising=True)]] = Field(
        default={},
        description="Lower and upper end of single coefficients by name, in place of freedom.",
    )
    trailing_edge: Annotated[Extent, LengthOrFraction(at_most=LARGEST_GAP)] = Field(
        default=Extent(0.0),
        description="Thickness of the trailing edge as it is built; 0 is sharp.",
    )


class Air(Block):
    """The standard atmosphere."""

    altitude: Annotated[float, Measure(LENGTH, at_least=-5000.0, at_most=32000.0)] = Field(
        default=0.0, description="Pressure altitude in the standard atmosphere."
    )
    warmer_than_standard: Annotated[
        float, Measure(TEMPERATURE_DIFFERENCE, at_least=-80.0, at_most=80.0)
    ] = Field(default=0.0, description="How much warmer the day is than standard.")


class Water(Block):
    """Fresh water or sea water."""

    temperature: Annotated[float, Measure(TEMPERATURE, at_least=273.15, at_most=313.15)] = Field(
        default=288.15, description="Temperature of the water."
    )
    salt: Annotated[bool, Flag()] = Field(
        default=False, description="Whether it is sea water of standard salinity."
    )
    immersion: Annotated[float, Measure(LENGTH, at_least=0.0, at_most=100.0)] = Field(
        default=0.0, description="Depth of the section below the surface."
    )


class Craft(Block):
    """What turns a speed into a lift coefficient in level flight."""

    mass: Annotated[float, Measure(MASS, more_than=0.0, at_most=1e6)] = Field(
        description="Mass in flight."
    )
    wing_area: Annotated[float, Measure(AREA, more_than=0.0, at_most=1e4)] = Field(
        description="Area of the wing that carries it."
    )


class Transition(Block):
    """Where transition is forced."""

    upper: Annotated[float, Measure(FRACTION, more_than=0.0, at_most=1.0)] = Field(
        default=1.0, description="Forced transition on the upper side, x/c; 100 % is free."
    )
    lower: Annotated[float, Measure(FRACTION, more_than=0.0, at_most=1.0)] = Field(
        default=1.0, description="Forced transition on the lower side, x/c; 100 % is free."
    )


CHORD = Measure(LENGTH, more_than=0.0, at_most=100.0)
N_FACTOR = Measure(at_least=1.0, at_most=20.0)


ALPHA = Measure(ANGLE, at_least=-math.pi / 6, at_most=math.pi / 6)


class Condition(Block):
    """One flight state that every section is evaluated at."""

    model_config = _one_of_keys("anyOf", "speed", "reynolds")

    speed: Annotated[float | None, Measure(SPEED, more_than=0.0, at_most=400.0)] = Field(
        default=None, description="True speed; with chord and medium it gives the Reynolds number."
    )
    reynolds: Annotated[float | None, Measure(at_least=1e4, at_most=1e8)] = Field(
        default=None,
        description="Reynolds number on the chord, in place of a speed; beside one it is checked.",
    )
    mach: Annotated[float | None, Measure(at_least=0.0, at_most=0.9)] = Field(
        default=None,
        description="Mach number; from speed and medium unless given, 0 if only reynolds is given.",
    )
    lift: Annotated[float | Literal["level", "maximum"] | None, Lift(-3.0, 5.0)] = Field(
        default=None,
        description="Lift coefficient; level: that of level flight of the craft; maximum: the "
        "peak of a sweep of the angle. level if a craft is given, unless alpha is.",
    )
    alpha: Annotated[float | None, ALPHA] = Field(
        default=None, description="Angle of attack from the chord line, in place of lift."
    )
    load_factor: Annotated[float, Measure(more_than=0.0, at_most=20.0)] = Field(
        default=1.0, description="Lift over weight of a level condition, such as 1.31 in a turn."
    )
    transition: Transition = Field(
        default=Transition(), description="Where transition is forced on each side."
    )
    n_factor: Annotated[float | None, N_FACTOR] = Field(
        default=None, description="Critical amplification exponent here, if not the study's."
    )
    air: Air | None = Field(default=None, description="Air of this condition, if not the study's.")

    @property
    def lift_or_level(self) -> float | Literal["level", "maximum"] | None:
        """The lift that is meant: level unless lift or alpha is given; None with alpha."""
        return "level" if self.lift is None and self.alpha is None else self.lift


class Objective(Block):
    """One figure to be made as large or as small as possible."""

    model_config = _one_of_keys("oneOf", "maximise", "minimise")

    maximise: Annotated[str | None, QUANTITY_NAME] = Field(
        default=None, description="The quantity, if more of it is better."
    )
    minimise: Annotated[str | None, QUANTITY_NAME] = Field(
        default=None, description="The quantity, if less of it is better."
    )
    at: Annotated[str | dict[str, float] | float | None, Where()] = Field(
        default=None,
        description="Where: a condition, or weights of several that add up to 1; for a depth "
        "the place x/c.",
    )

    @property
    def quantity(self) -> str:
        """Name of the quantity."""
        return self.maximise or self.minimise or ""

    @property
    def sense(self) -> Sense:
        """Which of maximise and minimise is given."""
        return "maximise" if self.maximise is not None else "minimise"

    @property
    def weights(self) -> dict[str, float]:
        """Condition -> weight; weights add up to 1. Empty for a quantity of the section."""
        if isinstance(self.at, str):
            return {self.at: 1.0}
        return _shares(self.at) if isinstance(self.at, dict) else {}

    @property
    def place(self) -> float | None:
        """Place x/c of a depth."""
        return self.at if isinstance(self.at, float) else None

    @property
    def name(self) -> str:
        """Unique name, such as ``lift_to_drag@survey+loiter``."""
        return _name(self.quantity, "+".join(self.weights) or self.place)


class Constraint(Block):
    """One limit that a design must keep."""

    model_config = _one_of_keys("anyOf", "min", "max")

    quantity: Annotated[str, QUANTITY_NAME] = Field(description="What is limited.")
    unit: Annotated[str, UnitOfLimits()] = Field(
        default="", description="Unit of min, max and scale when they are plain numbers."
    )
    min: Annotated[float | None, Limit()] = Field(
        default=None, description="Least value that is accepted."
    )
    max: Annotated[float | None, Limit()] = Field(
        default=None, description="Largest value that is accepted."
    )
    condition: Annotated[str | None, CONDITION_NAME] = Field(
        default=None, description="The condition, for a quantity of the flow."
    )
    at: Annotated[float | None, Measure(FRACTION, at_least=0.0, at_most=1.0)] = Field(
        default=None, description="The place x/c, for a depth."
    )
    scale: Annotated[float | None, Limit()] = Field(
        default=None,
        description="How large a violation counts as one; the size of the limit unless given.",
    )

    @model_validator(mode="before")
    @classmethod
    def _deduce_unit(cls, data: Any) -> Any:  # noqa: ANN401  anything may come from a file
        if not isinstance(data, dict) or "unit" in data:
            return data
        limits = [data[key] for key in ("min", "max", "scale") if data.get(key) is not None]
        unit = unit_of_limits(data.get("quantity"), limits)
        return data if unit is None else data | {"unit": unit}

    @property
    def name(self) -> str:
        """Unique name, such as ``cl_max@slow`` or ``depth@30%``."""
        return _name(self.quantity, self.condition or self.at)


class SearchSettings(Block):
    """How the designs are searched and when the search ends."""

    algorithm: Annotated[
        Literal["nsga2", "nsga3", "sms-emoa"], Choice(("nsga2", "nsga3", "sms-emoa"))
    ] = Field(default="nsga3", description="The evolutionary algorithm.")
    population: Annotated[int, Count(4, 10_000)] = Field(
        default=80, description="Designs in a generation."
    )
    generations: Annotated[int, Count(1, 100_000)] = Field(
        default=150, description="Generations, the first one included."
    )
    evaluations: Annotated[int | None, Count(1, 10**9)] = Field(
        default=None, description="The run ends once this many designs are evaluated."
    )
    wall_time: Annotated[float | None, Measure(TIME, more_than=0.0, at_most=3.2e7)] = Field(
        default=None, description="The run ends after this time."
    )
    until: Annotated[
        str | None,
        Text(r"(?:[01]?[0-9]|2[0-3]):[0-5][0-9]", "a time of day HH:MM from 00:00 to 23:59"),
    ] = Field(default=None, description="The run ends at this time of day.")
    stall: Annotated[int | None, Count(2, 100_000)] = Field(
        default=None,
        description="The run ends when the hypervolume has not grown over this many generations.",
    )
    seed: Annotated[int, Count(0, 2**63 - 1)] = Field(
        default=1, description="Seed of every random choice; equal seeds give equal archives."
    )
    reference_point: tuple[Annotated[float, Measure()], ...] | None = Field(
        default=None,
        description="The value of each objective, in their order and as they are stated, from "
        "which the hypervolume is measured; deduced from the baseline unless given.",
    )


class EvaluatorSettings(Block):
    """How finely a flow is computed."""

    panels: Annotated[int, Count(60, 600, even=True)] = Field(
        default=160, description="Panels around the section."
    )


class Study(Block):
    """A study: what is designed, where it flies, what is wanted and how it is searched."""

    study: Annotated[str, STUDY_NAME] = Field(description="Name of the study.")
    section: SectionSettings = Field(description="The section's description and baseline.")
    chord: Annotated[float, CHORD] = Field(description="Chord of the section as built.")
    air: Air | None = Field(default=None, description="The air that the conditions are flown in.")
    water: Water | None = Field(default=None, description="The water, in place of air.")
    craft: Craft | None = Field(default=None, description="The craft, for level flight.")
    n_factor: Annotated[float | None, N_FACTOR] = Field(
        default=None,
        description="Critical amplification exponent of e^N transition; 9 unless it or "
        "turbulence is given.",
    )
    turbulence: Annotated[float | None, Measure(FRACTION, at_least=0.0005, at_most=0.03)] = Field(
        default=None,
        description="Turbulence of the stream, rms over speed, in place of n_factor (Mack 1977).",
    )
    conditions: dict[Annotated[str, CONDITION_NAME], Condition] = Field(
        description="Flight states by name, evaluated in this order.",
        json_schema_extra={"minProperties": FEWEST_CONDITIONS},
    )
    objectives: tuple[Objective, ...] = Field(
        description="What is traded against what: two or more.",
        json_schema_extra={"minItems": FEWEST_OBJECTIVES},
    )
    constraints: tuple[Constraint, ...] = Field(
        default=(), description="Limits that every design of the front keeps."
    )
    search: SearchSettings = Field(
        default=SearchSettings(), description="How the designs are searched."
    )
    evaluator: EvaluatorSettings = Field(
        default=EvaluatorSettings(), description="How finely a flow is computed."
    )

    _source: Source = PrivateAttr(default=Source())

    @property
    def text(self) -> str:
        """The text as written; empty if the study was built without one."""
        return self._source.text

    @property
    def warnings(self) -> tuple[Fault, ...]:
        """What is accepted and probably not meant, such as settings without effect."""
        return self._source.warnings

    def place(self, path: Path) -> Place | None:
        """Return (line, column) of a value or of the nearest block around it, from 1."""
        return self._source.places.of(path)

    def located(self, fault: Fault) -> Fault:
        """Return a fault with its path in words and its place in the study's file."""
        if fault.file is not None or not self._source.file:
            return fault
        return fault_at(fault.path, fault.message, self._source.file, self.place(fault.path))

    def with_source(self, source: Source) -> Self:
        """Return the same study with the text it was read from."""
        study = self.model_copy()
        study._source = source
        return study

    def baseline_points(self) -> FloatArray | None:
        """Return the (n, 2) points of the baseline's coordinate file, None for a NACA section."""
        points = self.section.baseline_coordinates
        return None if points is None else np.array(points, dtype=np.float64)

    @property
    def trailing_edge_gap(self) -> float:
        """Thickness of the trailing edge [chords]."""
        return self.section.trailing_edge.chords(self.chord)

    def plain(self) -> dict[str, Any]:
        """Return the study as plain data in SI units, defaults included, absent keys left out."""
        return self.model_dump(mode="json", exclude_none=True)

    def fingerprint(self) -> str:
        """Return the SHA-256 of what the study asks for, however it is written."""
        return fingerprint(self.plain())

    def resolved_text(self) -> str:
        """Return the study as YAML in SI units that needs no other file and loads to its equal."""
        return yaml_text.dump(self.plain())

    def __eq__(self, other: object) -> bool:
        """Whether all settings are equal; texts and places do not matter."""
        return isinstance(other, Study) and self.plain() == other.plain()

    def __hash__(self) -> int:
        return hash(self.study)


def _shares(weights: dict[str, float]) -> dict[str, float]:
    """Weights over their sum; unchanged if they add up to 1 but for rounding."""
    total = math.fsum(weights.values())
    if abs(total - 1.0) <= WEIGHT_ROUNDING:
        return dict(weights)
    return {name: weight / total for name, weight in weights.items()}


def _name(quantity: str, where: str | float | None) -> str:
    """``quantity@where``, a place in per cent."""
    if where is None:
        return quantity
    place = where if isinstance(where, str) else f"{round(100.0 * where, 6):g}%"
    return f"{quantity}@{place}"
