"""Canonical form and hash of a study, which tell whether two texts are the same study.

Two texts that ask for the same thing have the same fingerprint, whatever their comments, units,
order of keys, and whether a default is written out. The order of conditions, objectives and
constraints counts: it is the order of the evaluations and of the archive's columns.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from typing import Any


def canonical_form(plain: Mapping[str, Any]) -> str:
    """Return a study as JSON on one line, in SI units, its keys sorted.

    Parameters
    ----------
    plain : mapping
        The study as plain data, as `Study.plain` gives it.
    """
    ordered = {**plain, "conditions": list(plain["conditions"].items())}
    return json.dumps(ordered, sort_keys=True, separators=(",", ":"), allow_nan=False)


def fingerprint(plain: Mapping[str, Any]) -> str:
    """Return the SHA-256 of the canonical form, 64 hexadecimal digits.

    Parameters
    ----------
    plain : mapping
        The study as plain data.
    """
    return hashlib.sha256(canonical_form(plain).encode()).hexdigest()
