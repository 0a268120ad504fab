"""What JSON can hold; apart from the rest, so that the edge may load it for nothing."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any


def plain(value: Any) -> Any:  # noqa: ANN401  any part of a document
    """Return a document with null in the place of every number that is not finite."""
    if isinstance(value, Mapping):
        return {str(key): plain(part) for key, part in value.items()}
    if isinstance(value, list | tuple):
        return [plain(part) for part in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
