"""The JSON Schema of a study file, for editors that complete and check while one writes.

It knows every key, unit pattern, range and quantity name; what two keys say together is judged by
`load` only.
"""

from __future__ import annotations

from typing import Any

from optim.study.schema import Study

DIALECT = "https://json-schema.org/draft/2020-12/schema"


def json_schema() -> dict[str, Any]:
    """Return the JSON Schema of a study file.

    Returns
    -------
    dict
        Plain data that `json.dumps` writes.
    """
    schema: dict[str, Any] = _without_null(Study.model_json_schema())
    return {"$schema": DIALECT} | schema | {"title": "Sectionwright study"}


def _without_null(part: Any) -> Any:  # noqa: ANN401  any part of a schema
    """Drop what pydantic says of absent keys: a study leaves them out, it does not write null."""
    if isinstance(part, list):
        return [_without_null(item) for item in part]
    if not isinstance(part, dict):
        return part
    kept = {
        key: _without_null(value)
        for key, value in part.items()
        if not (key == "default" and value in (None, "")) and key != "title"
    }
    choices = kept.get("anyOf")
    if choices is not None:
        choices = [choice for choice in choices if choice != {"type": "null"}]
        kept["anyOf"] = choices
        if len(choices) == 1:
            del kept["anyOf"]
            kept = choices[0] | kept
    return kept
