"""A study file to a Study, or to all of its faults at once.

The text is read in three passes that do not stop at each other's faults: the YAML itself, each key
on its own, and what keys say together. Every fault gets the line and column of the value, key or
block that it is about.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from dataclasses import replace
from pathlib import Path
from types import UnionType
from typing import Any, TypeGuard, Union, get_args, get_origin

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from optim.errors import Fault, SectionError, StudyError
from optim.study import consistency, without_effect, yaml_text
from optim.study.consistency import NACA
from optim.study.coordinate_file import coordinate_text, read_coordinates
from optim.study.draft import read_draft
from optim.study.schema import Source, Study
from optim.study.units import shown
from optim.study.values import did_you_mean
from optim.study.yaml_text import MOST_BYTES, Tree, fault_at

ACCEPTED = "accepted is a study in YAML, UTF-8; `sectionwright template` writes one"


def load_study(path: str | Path) -> Study:
    """Read a study file.

    Parameters
    ----------
    path : str or Path
        The file. A baseline's coordinate file is looked for relative to its folder.

    Returns
    -------
    Study
        Frozen and valid, in SI units.

    Raises
    ------
    StudyError
        With all faults, each with its place.
    """
    file = str(path)
    return parse_study(_file_text(Path(path), file), file, Path(path).parent)


def parse_study(text: str, name: str = "study", folder: Path | None = None) -> Study:
    """Read the text of a study.

    Parameters
    ----------
    text : str
        The text.
    name : str
        What it is called in faults.
    folder : Path or None
        Where the baseline's coordinate file is looked for; without one the study has to hold the
        coordinates itself, as `Study.resolved_text` does.

    Returns
    -------
    Study
        Frozen and valid, in SI units.

    Raises
    ------
    StudyError
        With all faults, each with its place.
    """
    tree = yaml_text.parse(text, name)
    if not isinstance(tree.data, dict):
        message = f"this is no study; {ACCEPTED}."
        raise StudyError(tree.faults or [fault_at((), message, name, tree.places.of(()))])
    _order_weights(tree.data)
    found = _read_baseline(tree, name, folder)
    study, faults = _validated(tree, name)
    draft = read_draft(tree.data)
    found += faults + _located(tree, name, consistency.faults(draft))
    faults = tree.faults + [fault for fault in found if fault.path not in tree.unread]
    if faults or study is None:
        raise StudyError(_in_order(set(faults), name))
    warnings = _located(tree, name, without_effect.warnings(draft))
    return study.with_source(Source(text, name, tree.places, _in_order(warnings, name)))


def _in_order(faults: Iterable[Fault], file: str) -> tuple[Fault, ...]:
    """Sort by place in the file; faults of another file come last."""

    def place(fault: Fault) -> tuple[bool, float, float, str]:
        line, column = fault.line or math.inf, fault.column or math.inf
        return fault.file != file, line, column, fault.message

    return tuple(sorted(faults, key=place))


def _file_text(path: Path, file: str) -> str:
    if path.exists() and not path.is_file():
        raise _refuse(file, "this is no file")
    try:
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
    except FileNotFoundError as error:
        raise _refuse(file, "there is no such file") from error
    except OSError as error:
        raise _refuse(file, f"the file cannot be read ({error.strerror})") from error
    if len(data) > MOST_BYTES:
        raise _refuse(file, f"the file is larger than {MOST_BYTES >> 10} kB")
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise _refuse(file, "the text is in UTF-16; save it as UTF-8")
    if b"\0" in data:
        raise _refuse(file, "the file is binary")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise _refuse(file, f"line {line} is not UTF-8 text; save the file as UTF-8") from error


def _refuse(file: str, what: str) -> StudyError:
    return StudyError([Fault(f"{what}; {ACCEPTED}.", file=file)])


def _located(tree: Tree, file: str, faults: list[Fault]) -> list[Fault]:
    return [fault_at(f.path, f.message, file, tree.places.of(f.path)) for f in faults]


def _order_weights(data: dict[str, Any]) -> None:
    """Put weights in the order of the conditions, so that equal studies sum in one order."""
    conditions, objectives = data.get("conditions"), data.get("objectives")
    if not isinstance(conditions, dict) or not isinstance(objectives, list):
        return
    for objective in objectives:
        at = objective.get("at") if isinstance(objective, dict) else None
        if isinstance(at, dict):
            objective["at"] = {name: at[name] for name in conditions if name in at} | at


def _read_baseline(tree: Tree, file: str, folder: Path | None) -> list[Fault]:
    """Put the points of the baseline's coordinate file into the study's data."""
    section = tree.data.get("section")
    baseline = section.get("baseline") if isinstance(section, dict) else None
    if (
        not isinstance(baseline, str)
        or baseline.startswith("naca:")
        or "baseline_coordinates" in section
    ):
        return []
    path: yaml_text.Path = ("section", "baseline")
    source = None if folder is None else folder / baseline
    if source is None or not _is_file(source):
        where = "" if folder is None else f" in {folder}"
        hint = re.sub(r"(?i)^naca[ _-]?", "naca:", baseline)
        hint = f"; did you mean {hint}?" if NACA.fullmatch(hint) else ""
        message = (
            f"there is no file {shown(baseline)}{where}; accepted is naca:DIGITS or a coordinate "
            f"file, named relative to the study{hint or '.'}"
        )
        return [fault_at(path, message, file, tree.places.of(path))]
    try:
        points = read_coordinates(source).points
    except SectionError as error:
        return [replace(fault, path=path) for fault in error.faults]
    section["baseline_coordinates"] = coordinate_text([(float(x), float(y)) for x, y in points])
    return []


def _is_file(path: Path) -> bool:
    try:
        return path.is_file()
    except OSError:  # a name that the system does not take
        return False


def _validated(tree: Tree, file: str) -> tuple[Study | None, list[Fault]]:
    """Return the study, or what is wrong with single keys."""
    try:
        return Study.model_validate(tree.data), []
    except ValidationError as error:
        return None, [_fault(tree, file, detail) for detail in error.errors(include_url=False)]


def _fault(tree: Tree, file: str, detail: ErrorDetails) -> Fault:
    """One of pydantic's findings as a fault with its place."""
    path = tuple(step for step in detail["loc"] if step != "[key]")
    kind = detail["type"]
    if kind == "value":
        context = detail.get("ctx", {})
        of_key = len(path) < len(detail["loc"])
        full = (*path, *context["below"])
        place = tree.places.keys.get(path) if of_key else tree.places.of(full)
        return fault_at(full, str(context["sentence"]), file, place)
    block, where = _block_at(path[:-1]), tree.places.of(path)
    if kind == "extra_forbidden" and block is not None:
        message = _unknown_key(str(path[-1]), block)
        return fault_at(path, message, file, tree.places.keys.get(path))
    if kind == "missing" and block is not None:
        described = _described(block, str(path[-1]))
        return fault_at(path, f"the key is missing; it gives {described}", file, where)
    return fault_at(path, _form(kind, path, detail["input"]), file, where)


def _form(kind: str, path: yaml_text.Path, found: object) -> str:
    """Say what form a value has to have: a mapping or a list."""
    if kind == "tuple_type":
        return f"{shown(found)} is not accepted; accepted is a list."
    block = _block_at(path)
    keys = f" {', '.join(block.model_fields)}" if block is not None else " by name"
    return f"{shown(found)} is not accepted; accepted is a mapping of keys{keys}."


def _unknown_key(key: str, block: type[BaseModel]) -> str:
    known = list(block.model_fields)
    near = _home_of(key) or did_you_mean(key, known) or "."
    return f"there is no such key; accepted is {', '.join(known)}{near}"


def _home_of(key: str) -> str:
    """Say which block of a study a key belongs in; empty if in none."""
    if key in Study.model_fields:
        return f"; {key} belongs to the study itself, at the left margin."
    for name in Study.model_fields:
        block = _block_at((name,)) or _block_at((name, 0))
        if block is not None and key in block.model_fields:
            return f"; {key} belongs in {name}."
    return ""


def _described(block: type[BaseModel], key: str) -> str:
    text = block.model_fields[key].description or ""
    return text[:1].lower() + text[1:]


def _block_at(path: yaml_text.Path) -> type[BaseModel] | None:
    """Return the block of a study that a path leads to, None if it leads to a value."""
    kind: object = Study
    for step in path:
        if isinstance(kind, type) and issubclass(kind, BaseModel):
            field = kind.model_fields.get(str(step))
            kind = None if field is None else field.annotation
        else:
            kind = next((a for a in get_args(kind) if _is_block(a)), None)
        kind = next((a for a in get_args(kind) if _is_block(a)), kind) if _optional(kind) else kind
    return kind if _is_block(kind) else None


def _is_block(kind: object) -> TypeGuard[type[BaseModel]]:
    return isinstance(kind, type) and issubclass(kind, BaseModel)


def _optional(kind: object) -> bool:
    return get_origin(kind) in {Union, UnionType}
