"""The guide to the study file, generated from the schema: ``python -m optim.study.guide``.

It writes studies/README.md to standard output; a test holds the file in step.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from typing import Any

from pydantic import BaseModel
from pydantic.fields import FieldInfo

from optim.study.composite import Extent
from optim.study.schema import (
    Air,
    Coefficients,
    Condition,
    Constraint,
    Craft,
    EvaluatorSettings,
    Objective,
    SearchSettings,
    SectionSettings,
    Study,
    Transition,
    Water,
)
from optim.study.units import DIMENSIONS, Dimension
from optim.study.values import Choice, Value
from optim.study.vocabulary import QUANTITIES, Quantity

_BLOCKS: tuple[tuple[str, type[BaseModel]], ...] = (
    ("section", SectionSettings),
    ("section.coefficients", Coefficients),
    ("air", Air),
    ("water", Water),
    ("craft", Craft),
    ("conditions.NAME", Condition),
    ("conditions.NAME.transition", Transition),
    ("objectives, each", Objective),
    ("constraints, each", Constraint),
    ("search", SearchSettings),
    ("evaluator", EvaluatorSettings),
)

_INTRODUCTION = """\
# Every key of a study

Generated from the code by `python -m optim.study.guide`; a test holds this file in step.
`sectionwright template` writes a commented study to start from, `sectionwright check STUDY.yaml`
tells everything that is wrong with one, and `sectionwright schema` writes what an editor needs to
complete and check it while you write.

A study is YAML (the core schema of 1.2: `1e6` is a number, `NO` and `06:30` are texts, only `true`
and `false` are truth values), in UTF-8, of at most 512 kB. A key given twice is an error, and so is
a key that is not listed here. `&name`, `*name` and `<<` save repeating a block.

A number with a unit is a text such as `212 mm`; a plain number is in the SI unit of its kind, an
angle in radians, a fraction as it is (0.1 is 10 %).

"""


def guide_text() -> str:
    """Return the guide as Markdown."""
    return "".join([_INTRODUCTION, _units(), *_keys(), _quantities()])


def _units() -> str:
    rows = [_unit_row(dimension) for dimension in DIMENSIONS if dimension.units]
    return (
        "## Units\n\n"
        + _table(("kind", "plain number", "common units"), rows)
        + "\nAny other unit that pint knows is accepted too, but not for fractions and angles.\n\n"
    )


def _unit_row(dimension: Dimension) -> tuple[str, ...]:
    name = dimension.name.split(" ", 1)[1]
    plain = "1" if dimension.unit == "1" else dimension.unit
    return name, plain, ", ".join(f"`{unit}`" for unit in dimension.units)


def _keys() -> Iterator[str]:
    yield "## The study\n\n" + _key_table(Study)
    for title, block in _BLOCKS:
        yield f"## `{title}`\n\n{block.__doc__}\n\n" + _key_table(block)


def _key_table(block: type[BaseModel]) -> str:
    rows = [_key_row(key, field) for key, field in block.model_fields.items()]
    return _table(("key", "accepted", "default", "meaning"), rows) + "\n"


def _key_row(key: str, field: FieldInfo) -> tuple[str, ...]:
    return f"`{key}`", _accepted(key, field), _default(field), field.description or ""


def _accepted(key: str, field: FieldInfo) -> str:
    values = [item for item in field.metadata if isinstance(item, Value)]
    if values and isinstance(values[0], Choice) and values[0].words == tuple(QUANTITIES):
        return "a quantity, see below"
    if values:
        return values[0].accepted
    forms = {
        "conditions": "name -> condition, at least one; a name is letters, digits, - and _",
        "objectives": "a list of two or more, see below",
        "constraints": "a list, see below",
        "bounds": "coefficient -> [lowest, highest]; cst has `upper_1`, ..., `lower_1`, ..., "
        "bezier `nose`, `upper_2`, ..., `lower_2`, ..., cst with the leading-edge term those of "
        "bezier and `leading_edge`",
        "reference_point": "a list of numbers, one for each objective",
    }
    return forms.get(key, f"keys, see `{key}`")


def _default(field: FieldInfo) -> str:
    if field.is_required():
        return "required"
    value: Any = field.default
    if isinstance(value, Extent):
        value = value.value
    if value is None or value == "":
        return "none"
    if isinstance(value, (BaseModel, dict)) or value == ():
        return "its defaults" if isinstance(value, BaseModel) else "none"
    return f"`{str(value).lower() if isinstance(value, bool) else value}`"


def _quantities() -> str:
    parts = [
        "## Quantities\n\n",
        "Lengths are in chords; a limit on one is a fraction (`10 %`) or, at the real chord, a "
        "length (`17 mm`) or area.\n\n",
    ]
    for of, title in (("condition", "Of a condition"), ("section", "Of the section alone")):
        rows = [_quantity_row(q) for q in QUANTITIES.values() if q.of == of]
        table = _table(("quantity", "unit", "usually", "meaning"), rows)
        parts.append(f"### {title}\n\n{table}" + ("\n" if of == "condition" else ""))
    return "".join(parts)


def _quantity_row(quantity: Quantity) -> tuple[str, ...]:
    sense = {"maximise": "maximised", "minimise": "minimised", None: ""}[quantity.sense]
    needs = " Takes a place: `at: 30 %`." if quantity.needs_at else ""
    return f"`{quantity.name}`", quantity.unit, sense, quantity.sentence + needs


def _table(head: tuple[str, ...], rows: list[tuple[str, ...]]) -> str:
    lines = [head, tuple("---" for _ in head), *rows]
    return "".join("| " + " | ".join(_cell(cell) for cell in line) + " |\n" for line in lines)


def _cell(text: str) -> str:
    return " ".join(text.split()).replace("|", "\\|")


if __name__ == "__main__":
    sys.stdout.write(guide_text())
