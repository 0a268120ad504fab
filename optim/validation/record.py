"""What is known of a source: where its numbers are from, and how far they are to be believed."""

from __future__ import annotations

import csv
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import Any

import numpy as np

from optim.arrays import FloatArray, frozen
from optim.geometry.section import Section, section_from_coordinates
from optim.validation.case import Allowance


@dataclass(frozen=True)
class Record:
    """The record of a source.

    Attributes
    ----------
    name : str
        Of the record and of its module.
    title, report, place, read_in, status, terms, conditions, scatter : str
        What was measured; report; table, figure or page; whose copy was read; one of STATUSES;
        terms of use; conditions of the test; scatter and error of reading.
    section : str
        The section measured.
    allowances : dict
        Key of a quantity -> the error allowed.
    reasons : dict
        Key of a quantity -> why it is not reproduced.
    files : tuple of str
        Files of its columns.
    """

    name: str
    title: str
    report: str
    place: str
    read_in: str
    status: str
    terms: str
    section: str
    conditions: str
    scatter: str
    files: tuple[str, ...]
    allowances: Mapping[str, Allowance]
    reasons: Mapping[str, str]

    def columns(self, suffix: str = "") -> dict[str, FloatArray]:
        """Return the columns of numbers of one of its files; an empty cell is not-a-number."""
        rows = _rows(self._file(suffix))
        numbers = {
            name: [row[name] for row in rows]
            for name in rows[0]
            if all(_is_number(row[name]) for row in rows)
        }
        return {
            name: frozen(np.array([float(cell or "nan") for cell in cells]))
            for name, cells in numbers.items()
        }

    def words(self, column: str, suffix: str = "") -> list[str]:
        """Return a column as it is written."""
        return [row[column] for row in _rows(self._file(suffix))]

    def sides(self, suffix: str = "ordinates") -> Section:
        """Return the section through the ordinates of two sides, each from the nose."""
        at, side = self.columns(suffix), np.array(self.words("surface", suffix))
        points = np.column_stack([at["x_c"], at["y_c"]])
        upper = points[side == "upper"]
        lower = points[side == "lower"]
        upper = upper[np.argsort(-upper[:, 0], kind="stable")]
        lower = lower[np.argsort(lower[:, 0], kind="stable")]
        return section_from_coordinates(_one_nose(upper, lower), self.section)[0]

    def _file(self, suffix: str) -> str:
        return f"{self.name}_{suffix}.csv" if suffix else f"{self.name}.csv"


def _one_nose(upper: FloatArray, lower: FloatArray) -> FloatArray:
    """Join two sides at the nose, where both may have the same point."""
    again = 1 if np.array_equal(upper[-1], lower[0]) else 0
    return np.concatenate([upper, lower[again:]])


@cache
def read_record(name: str) -> Record:
    """Return the record of a source.

    Parameters
    ----------
    name : str
        One of `optim.validation.suite.SOURCES`.
    """
    held: dict[str, Any] = tomllib.loads(_text(f"{name}.toml"))
    allowances = {key: Allowance(key=key, **one) for key, one in held.pop("allowances").items()}
    reasons = held.pop("not_reproduced", {})
    files = tuple(held.pop("files"))
    return Record(name=name, files=files, allowances=allowances, reasons=reasons, **held)


def left_out() -> list[dict[str, str]]:
    """Return the sets that are not here: each with its name, report and the reason."""
    sets: list[dict[str, str]] = tomllib.loads(_text("left_out.toml"))["sets"]
    return sets


def _text(file: str) -> str:
    return (resources.files("optim.validation") / "data" / file).read_text(encoding="utf-8")


@cache
def _rows(file: str) -> list[dict[str, str]]:
    return list(csv.DictReader(_text(file).splitlines()))


def _is_number(cell: str) -> bool:
    try:
        float(cell or "nan")
    except ValueError:
        return False
    return True
