"""What two keys of a study can disagree about.

Every rule looks at a draft: whatever part of the study could be read. So a wrong unit in one place
does not hide a wrong name in another, and all faults are told at once. A rule that needs a part
which could not be read says nothing: that part has its own fault.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from optim.errors import Fault
from optim.study.draft import Draft
from optim.study.limits import BUILT_UNITS, DIMENSIONS_OF_UNITS
from optim.study.schema import (
    FEWEST_CONDITIONS,
    FEWEST_OBJECTIVES,
    LARGEST_GAP,
    Condition,
    Constraint,
    Objective,
    SectionSettings,
)
from optim.study.units import legible, shown
from optim.study.values import CONDITION_NAME, did_you_mean
from optim.study.vocabulary import QUANTITIES, Quantity
from optim.study.yaml_text import Path

NACA = re.compile(r"naca:(?:\d{4}(?:-\d{2})?|\d{5})")
"""A baseline of the 4-digit, modified 4-digit or 5-digit families."""

Found = Iterator[tuple[Path, str]]


def faults(draft: Draft) -> list[Fault]:
    """Return everything that does not fit together, each with its path.

    Parameters
    ----------
    draft : Draft
        As much of the study as could be read.
    """
    rules = (_enough, _sources, _conditions, _objectives, _constraints, _section, _search)
    return [Fault(message, path) for rule in rules for path, message in rule(draft)]


def _enough(draft: Draft) -> Found:
    """Ask for a condition, and for two objectives to trade against each other."""
    fewest = (("conditions", dict, FEWEST_CONDITIONS), ("objectives", list, FEWEST_OBJECTIVES))
    for key, form, least in fewest:
        found = draft.data.get(key)
        if isinstance(found, form) and len(found) < least:
            yield (key,), f"{len(found)} are too few; give at least {least}."


def _sources(draft: Draft) -> Found:
    """Things given twice in two ways."""
    if draft.written("air") and draft.written("water"):
        yield ("water",), "the study gives air and water; give the one it is for."
    if draft.written("n_factor") and draft.written("turbulence"):
        yield ("turbulence",), "turbulence and n_factor say the same thing; give one of the two."


def _conditions(draft: Draft) -> Found:
    for name, condition in draft.conditions.items():
        for key, message in _condition(draft, name, condition):
            yield ("conditions", name, *key), message


def _condition(draft: Draft, name: str, condition: Condition) -> Iterator[tuple[Path, str]]:
    def has(*keys: str) -> bool:
        return any(draft.written("conditions", name, key) for key in keys)

    if not has("speed", "reynolds"):
        yield (), "the condition has neither speed nor reynolds; give one of the two."
    if has("lift") and has("alpha"):
        yield ("alpha",), "lift and alpha both set the flow; give one of the two."
    if has("air") and draft.written("water"):
        yield ("air",), "the study is in water; leave air out."
    has_medium = draft.written("air") or draft.written("water") or has("air")
    yield from _level_flight(draft, name, condition, has_medium=has_medium)
    if has("speed") and not has_medium:
        yield (
            ("speed",),
            "a speed makes no Reynolds number without a medium; give the study air, such as "
            "air: {altitude: 0 m}, or water.",
        )


def _level_flight(
    draft: Draft, name: str, condition: Condition, *, has_medium: bool
) -> Iterator[tuple[Path, str]]:
    """Ask level flight for a craft, and for a medium to know its speed and density in."""
    unread = any(
        draft.written("conditions", name, key) and getattr(condition, key) is None
        for key in ("lift", "alpha")
    )
    if unread or condition.lift_or_level != "level":
        return
    key: Path = ("lift",) if condition.lift == "level" else ()
    if not draft.written("craft"):
        yield (
            key,
            "level flight takes a craft with mass and wing_area; give the study a craft, or the "
            "condition a lift coefficient, lift: maximum or alpha.",
        )
    elif not has_medium and not draft.written("conditions", name, "speed"):
        yield key, "level flight takes a medium; give the study air or water."


def _objectives(draft: Draft) -> Found:
    names: dict[str, int] = {}
    for index, objective in draft.objectives.items():
        path = ("objectives", index)
        senses = [key for key in ("maximise", "minimise") if draft.written(*path, key)]
        if len(senses) != 1:
            yield path, "an objective takes one of maximise and minimise, with a quantity."
            continue
        yield from _unknown_references(draft, path)
        if not objective.quantity:
            continue
        quantity = QUANTITIES[objective.quantity]
        if quantity.of == "condition":
            yield from _flow_objective(draft, objective, quantity, path)
        else:
            yield from _section_objective(draft, objective, quantity, path)
        if names.setdefault(objective.name, index) != index:
            first = names[objective.name]
            yield path, f"{objective.name} is objectives.{first} already; leave one out."


def _flow_objective(draft: Draft, objective: Objective, quantity: Quantity, path: Path) -> Found:
    if not draft.written(*path, "at"):
        yield path, f"{quantity.name} belongs to a condition; name it with at: {_names(draft)}."
    elif objective.place is not None:
        message = f"{quantity.name} belongs to a condition; accepted is {_names(draft)}."
        yield (*path, "at"), message
    elif objective.at == {}:
        yield (*path, "at"), "no weight is given; give each condition that counts its weight."
    for name in objective.weights:
        mismatch = _peak_mismatch(draft, quantity, name)
        if mismatch:
            yield _reference(objective, path, name), mismatch


def _unknown_references(draft: Draft, path: Path) -> Found:
    """Conditions that an objective names, as written, and that do not exist."""
    at = draft.data["objectives"][path[-1]].get("at")
    if isinstance(at, str) and re.fullmatch(CONDITION_NAME.pattern, at):
        named: list[Path] = [(at,)]
        places = [(*path, "at")]
    else:
        named = [(name,) for name in at] if isinstance(at, dict) else []
        places = [(*path, "at", *name) for name in named]
    for (name,), place in zip(named, places, strict=True):
        if name not in draft.condition_names:
            yield place, _no_condition(draft, str(name))


def _reference(objective: Objective, path: Path, name: str) -> Path:
    return (*path, "at", name) if isinstance(objective.at, dict) else (*path, "at")


def _section_objective(draft: Draft, objective: Objective, quantity: Quantity, path: Path) -> Found:
    written = draft.written(*path, "at")
    if quantity.needs_at and not written:
        yield path, f"{quantity.name} takes a place x/c, such as at: 30 %."
    elif quantity.needs_at and objective.weights:
        yield (*path, "at"), f"{quantity.name} takes a place x/c, such as 30 %."
    elif written and not quantity.needs_at:
        yield (*path, "at"), f"{quantity.name} belongs to the section alone; leave at out."


def _constraints(draft: Draft) -> Found:
    names: dict[str, int] = {}
    for index, constraint in draft.constraints.items():
        path = ("constraints", index)
        if not draft.written(*path, "min") and not draft.written(*path, "max"):
            yield path, "the constraint limits nothing; give min, max or both."
        if constraint.condition and constraint.condition not in draft.condition_names:
            yield (*path, "condition"), _no_condition(draft, constraint.condition)
        if constraint.quantity not in QUANTITIES:
            continue
        quantity = QUANTITIES[constraint.quantity]
        yield from _where(draft, constraint, quantity, path)
        yield from _limits(draft, constraint, quantity, path)
        if names.setdefault(constraint.name, index) != index:
            first = names[constraint.name]
            message = f"constraints.{first} limits {constraint.name} already; make them one."
            yield path, message


def _where(draft: Draft, constraint: Constraint, quantity: Quantity, path: Path) -> Found:
    """Ask for the condition or the place that a quantity needs, and for no other."""
    named, placed = draft.written(*path, "condition"), draft.written(*path, "at")
    flow = quantity.of == "condition"
    if flow and not named:
        message = f"{quantity.name} belongs to a condition; give condition: {_names(draft)}."
        yield path, message
    if named and not flow:
        message = f"{quantity.name} belongs to the section alone; leave condition out."
        yield (*path, "condition"), message
    if quantity.needs_at and not placed:
        yield path, f"{quantity.name} takes a place x/c, such as at: 30 %."
    if placed and not quantity.needs_at:
        hint = "; a condition is named by condition" if flow else ""
        yield (*path, "at"), f"{quantity.name} takes no place x/c; leave at out{hint}."
    if flow and constraint.condition:
        mismatch = _peak_mismatch(draft, quantity, constraint.condition)
        if mismatch:
            yield (*path, "condition"), mismatch


def _limits(draft: Draft, constraint: Constraint, quantity: Quantity, path: Path) -> Found:
    """Limits are of the quantity's kind, in its range and in order."""
    if constraint.unit not in {quantity.unit, BUILT_UNITS.get(quantity.unit)}:
        accepted = " or ".join(filter(None, (quantity.unit, BUILT_UNITS.get(quantity.unit))))
        message = f"{quantity.name} is not in {constraint.unit}; accepted is {accepted}."
        yield (*path, "unit"), message
        return
    size = _chord_power(draft, constraint.unit)
    low, high = constraint.min, constraint.max
    for key, limit in (("min", low), ("max", high)):
        if limit is None or size is None or quantity.lowest <= limit / size <= quantity.highest:
            continue
        dimension = DIMENSIONS_OF_UNITS[constraint.unit]
        ends = (dimension.stated(end * size) for end in (quantity.lowest, quantity.highest))
        message = (
            f"{quantity.name} cannot be limited to {dimension.stated(limit)}; "
            f"accepted is {' to '.join(ends)}."
        )
        yield (*path, key), message
    if low is not None and high is not None and low > high:
        yield (*path, "max"), f"the largest value {high:g} is below the least one {low:g}."
    if constraint.scale is not None and constraint.scale <= 0.0:
        message = f"a scale of {constraint.scale:g} measures nothing; give one above 0."
        yield (*path, "scale"), message


def _chord_power(draft: Draft, unit: str) -> float | None:
    """How much one unit of the quantity is in the unit of the limit."""
    if unit not in BUILT_UNITS.values():
        return 1.0
    return None if draft.chord is None else draft.chord ** (2 if unit == "m^2" else 1)


def _peak_mismatch(draft: Draft, quantity: Quantity, name: str) -> str | None:
    condition = draft.conditions.get(name)
    if condition is None:
        return None
    unread = draft.written("conditions", name, "lift") and condition.lift is None
    if not quantity.maximum_only or unread or condition.lift == "maximum":
        return None
    return (
        f"{quantity.name} exists at a condition with lift: maximum only; "
        f"{legible(name)} has another."
    )


def _names(draft: Draft) -> str:
    return ", ".join(map(legible, draft.condition_names)) or "none is given"


def _no_condition(draft: Draft, name: str) -> str:
    near = did_you_mean(name, draft.condition_names)
    return f"there is no condition {shown(name)}; accepted is {_names(draft)}{near or '.'}"


def _section(draft: Draft) -> Found:
    section = draft.section
    if section is None:
        return
    baseline = section.baseline
    if baseline.startswith("naca") and NACA.fullmatch(baseline) is None:
        yield (
            ("section", "baseline"),
            f"{shown(baseline)} names no section; accepted is naca: with 4 digits (2412), "
            "4 digits and 2 (0012-64) or 5 digits (23012), or the name of a coordinate file.",
        )
    if NACA.fullmatch(baseline) and section.baseline_coordinates is not None:
        message = f"{baseline} needs no coordinates; leave one of the two out."
        yield ("section", "baseline_coordinates"), message
    known = list(draft.coefficient_names)
    for name in section.bounds:
        if name not in known and not _half_read(draft):
            near = did_you_mean(name, known)
            message = f"there is no coefficient {shown(name)}; accepted is {', '.join(known)}"
            yield ("section", "bounds", name), message + (near or ".")
    if section.trailing_edge.unit == "m" and draft.chord is not None:
        yield from _built_gap(section, draft.chord)


def _built_gap(section: SectionSettings, chord: float) -> Found:
    gap = section.trailing_edge.chords(chord)
    if gap > LARGEST_GAP:
        message = (
            f"the trailing edge is {gap:.0%} of the chord thick; "
            f"accepted is up to {LARGEST_GAP:.0%} of it."
        )
        yield ("section", "trailing_edge"), message


def _half_read(draft: Draft) -> bool:
    """Whether the keys that make the coefficient names were written but not read."""
    data, section = draft.data.get("section"), draft.section
    if section is None or not isinstance(data, dict) or data.get("shape") != section.shape:
        return True
    counts = data.get("coefficients", {})
    return not isinstance(counts, dict) or any(
        getattr(section.coefficients, side, None) != count for side, count in counts.items()
    )


def _search(draft: Draft) -> Found:
    search = draft.search
    objectives = draft.data.get("objectives")
    if search is None or not isinstance(objectives, list):
        return
    if search.reference_point is not None and len(search.reference_point) != len(objectives):
        yield (
            ("search", "reference_point"),
            f"the reference point has {len(search.reference_point)} values for "
            f"{len(objectives)} objectives; give one for each.",
        )
    if search.population < len(objectives):
        message = f"{search.population} designs are fewer than {len(objectives)} objectives."
        yield ("search", "population"), message
