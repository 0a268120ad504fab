"""What a study may say that has no effect or is probably not meant: warnings, no faults."""

from __future__ import annotations

from collections.abc import Iterator

from optim.errors import Fault
from optim.study.draft import Draft
from optim.study.schema import WEIGHT_ROUNDING, SectionSettings
from optim.study.vocabulary import QUANTITIES
from optim.study.yaml_text import Path

Found = Iterator[tuple[Path, str]]


def warnings(draft: Draft) -> list[Fault]:
    """Return what is accepted and has no effect or is probably not meant.

    Parameters
    ----------
    draft : Draft
        A study without faults.
    """
    rules = (_unread_conditions, _unused_blocks, _unused_section_keys, _odd_objectives, _odd_search)
    return [Fault(message, path) for rule in rules for path, message in rule(draft)]


def _unread_conditions(draft: Draft) -> Found:
    read = {name for objective in draft.objectives.values() for name in objective.weights}
    read |= {c.condition for c in draft.constraints.values() if c.condition}
    for name in draft.condition_names:
        if name not in read:
            message = (
                f"no objective or constraint reads {name}: it is evaluated for the record only."
            )
            yield ("conditions", name), message


def _unused_blocks(draft: Draft) -> Found:
    conditions = draft.conditions
    if draft.written("craft") and all(c.lift_or_level != "level" for c in conditions.values()):
        yield ("craft",), "no condition is level flight: the craft has no effect."
    for key in ("n_factor", "turbulence"):
        if draft.written(key) and all(c.n_factor is not None for c in conditions.values()):
            yield (key,), f"every condition has its own n_factor: {key} has no effect."
    if draft.written("water", "immersion"):
        message = "cavitation is not judged yet: immersion has no effect."
        yield ("water", "immersion"), message
    yield from _unused_medium(draft)
    for name, condition in conditions.items():
        if condition.load_factor != 1.0 and condition.lift_or_level != "level":
            message = "the condition is not level flight: load_factor has no effect."
            yield ("conditions", name, "load_factor"), message


def _unused_medium(draft: Draft) -> Found:
    conditions = draft.conditions.values()
    if draft.written("air") and all(c.air is not None for c in conditions):
        yield ("air",), "every condition has its own air: this one has no effect."
    needs_none = all(c.speed is None and c.lift_or_level != "level" for c in conditions)
    for key in ("air", "water"):
        if draft.written(key) and needs_none:
            message = f"every condition gives reynolds and its lift: {key} has no effect."
            yield (key,), message


def _unused_section_keys(draft: Draft) -> Found:
    section = draft.section
    if section is None:
        return
    for key in ("leading_edge_term", "class_exponents"):
        default = SectionSettings.model_fields[key].default
        if section.shape != "cst" and getattr(section, key) != default:
            yield ("section", key), f"a {section.shape} section has no {key}: it has no effect."
    every = set(section.bounds) == set(draft.coefficient_names)
    if every and draft.written("section", "freedom"):
        yield ("section", "freedom"), "every coefficient has its own bounds: freedom has no effect."


def _odd_objectives(draft: Draft) -> Found:
    for index, objective in draft.objectives.items():
        path: Path = ("objectives", index)
        usual = QUANTITIES[objective.quantity].sense
        if usual is not None and usual != objective.sense:
            message = f"the study is to {objective.sense} {objective.quantity}; usual is {usual}."
            yield (*path, objective.sense), message
        if isinstance(objective.at, dict):
            total = sum(objective.at.values())
            if abs(total - 1.0) > WEIGHT_ROUNDING:
                message = f"the weights add up to {total:g}: each is divided by it."
                yield (*path, "at"), message
        if objective.quantity == "cl" and all(
            isinstance(draft.conditions[name].lift_or_level, float | str)
            and draft.conditions[name].lift != "maximum"
            for name in objective.weights
        ):
            yield path, "the lift coefficient is given there: every design has the same."


def _odd_search(draft: Draft) -> Found:
    search = draft.search
    if search is None or search.evaluations is None:
        return
    if search.evaluations >= search.population * search.generations:
        message = "the generations end first: evaluations has no effect."
        yield ("search", "evaluations"), message
