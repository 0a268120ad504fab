"""YAML text in, a frozen and valid `Study` out.

`load_study` and `parse_study` give a study or all of its faults with their places; `vocabulary`
has every quantity a study may name, `schema` every key. Whatever the door names is loaded when it
is first used.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from optim.study.coordinate_file import read_coordinates
    from optim.study.json_schema import json_schema
    from optim.study.load import load_study, parse_study
    from optim.study.schema import Study
    from optim.study.template import template_text

__all__ = [
    "Study", "json_schema", "load_study", "parse_study", "read_coordinates", "template_text",
]  # fmt: skip

_ROOMS = {
    "Study": "schema",
    "json_schema": "json_schema",
    "load_study": "load",
    "parse_study": "load",
    "read_coordinates": "coordinate_file",
    "template_text": "template",
}


def __getattr__(name: str) -> Any:  # noqa: ANN401  whatever the room has under that name
    """Load a public name when it is first used: pydantic and yaml cost a few tenths of a second."""
    if name not in _ROOMS:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    module = import_module(f"{__name__}.{_ROOMS[name]}")
    return vars(module)[name]
