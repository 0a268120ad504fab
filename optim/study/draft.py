"""As much of a study as can be read, so that one fault does not hide another."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from functools import partial
from types import MappingProxyType
from typing import Any, TypeVar

from pydantic import BaseModel, ValidationError

from optim.study.schema import (
    CHORD,
    Condition,
    Constraint,
    Objective,
    SearchSettings,
    SectionSettings,
)
from optim.study.units import UnitError
from optim.study.vocabulary import coefficient_names

BlockT = TypeVar("BlockT", bound=BaseModel)

STAND_INS = MappingProxyType({"shape": "cst", "baseline": "naca:0012"})
"""Values for the required keys of a section that cannot be read, so that its others are judged."""


@dataclass
class Draft:
    """As much of a study as could be read.

    Attributes
    ----------
    data : dict
        The study as plain data, as written.
    section, search : or None
        None if that block could not be read.
    conditions, objectives, constraints : dict
        Key or index -> block; a block that could not be read is left out.
    chord : float or None
        Chord [m].
    """

    data: Mapping[str, Any]
    section: SectionSettings | None = None
    search: SearchSettings | None = None
    conditions: dict[str, Condition] = field(default_factory=dict)
    objectives: dict[int, Objective] = field(default_factory=dict)
    constraints: dict[int, Constraint] = field(default_factory=dict)
    chord: float | None = None

    def written(self, *path: str | int) -> bool:
        """Whether the study gives this key, rightly or wrongly."""
        block: Any = self.data
        for step in path:
            try:
                block = block[step]
            except (KeyError, IndexError, TypeError):
                return False
        return True

    @property
    def coefficient_names(self) -> tuple[str, ...]:
        """Names of the section's coefficients."""
        if self.section is None:
            return ()
        counts, term = self.section.coefficients, self.section.leading_edge_term
        return coefficient_names(
            self.section.shape, counts.upper, counts.lower, leading_edge_term=term
        )

    @property
    def condition_names(self) -> list[str]:
        """All conditions that are written, readable or not."""
        conditions = self.data.get("conditions")
        return list(conditions) if isinstance(conditions, dict) else []


def read_draft(data: dict[str, Any]) -> Draft:
    """Return as much of a study as can be read, block by block.

    Parameters
    ----------
    data : dict
        The study as plain data, as written.
    """
    return Draft(
        data,
        section=_readable(SectionSettings, data.get("section"), STAND_INS),
        search=_readable(SearchSettings, data.get("search", {})),
        conditions=_each(data.get("conditions"), partial(_readable, Condition)),
        objectives=_each(data.get("objectives"), partial(_readable, Objective)),
        constraints=_each(data.get("constraints"), _readable_constraint),
        chord=_chord(data.get("chord")),
    )


def _each(blocks: object, read: Callable[[object], BlockT | None]) -> dict[Any, BlockT]:
    """Return the readable blocks of a mapping or a list, by name or index."""
    named: Iterable[tuple[str | int, object]] = ()
    if isinstance(blocks, dict):
        named = blocks.items()
    elif isinstance(blocks, list):
        named = enumerate(blocks)
    return {name: block for name, data in named if (block := read(data)) is not None}


def _chord(value: object) -> float | None:
    try:
        return CHORD.read(value)
    except UnitError:
        return None


def _readable(
    block: type[BlockT], data: object, stand_ins: Mapping[str, object] = MappingProxyType({})
) -> BlockT | None:
    """Return a block without the keys that cannot be read; None if it needs one of them."""
    if not isinstance(data, dict):
        return None
    try:
        return block.model_validate(data)
    except ValidationError as error:
        broken = {detail["loc"][0] for detail in error.errors() if detail["loc"]}
    try:
        return block.model_validate(
            {**stand_ins, **{key: value for key, value in data.items() if key not in broken}}
        )
    except ValidationError:
        return None


def _readable_constraint(data: object) -> Constraint | None:
    """Return a constraint; of one with an unknown quantity, the condition that it names."""
    constraint = _readable(Constraint, data)
    if constraint is None and isinstance(data, dict):
        name = data.get("condition")
        condition = name if isinstance(name, str) else None
        return Constraint.model_construct(quantity="", condition=condition)
    return constraint
