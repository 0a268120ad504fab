"""Headers and records as named arrays, checked at the door: what both stores actually hold."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optim.archive.layout import (
    BY_FIELD,
    EVALUATION,
    HEADER,
    RECORD,
    STATE_ARRAYS,
    STATE_JSON,
    Dataset,
)
from optim.archive.records import GenerationRecord, RunHeader

Array = NDArray[Any]
Items = dict[str, Array]

_STORED: dict[str, np.dtype[Any]] = {
    "f8": np.dtype("<f8"),
    "i8": np.dtype("<i8"),
    "i1": np.dtype("i1"),
}
_PLAIN_DTYPE = re.compile(r"[<|]([fiu][1248]|b1|S[1-9][0-9]{0,9})")
_ARRAY_NAME = re.compile(r"[^/\x00]+")


def plain_dtype(text: str) -> np.dtype[Any]:
    """Return the type of that name, if it is one of plain numbers or bytes.

    Raises
    ------
    ValueError
        If it is any other type; objects in particular are never read.
    """
    if not _PLAIN_DTYPE.fullmatch(text):
        raise ValueError(f"An archive holds numbers and texts only; found the type {text!r}.")
    return np.dtype(text)


def text_array(value: str | Sequence[str]) -> Array:
    """Return one text or a list of texts as fixed-length UTF-8.

    Raises
    ------
    ValueError
        If a text has a zero character or cannot be written as UTF-8.
    """
    texts = [value] if isinstance(value, str) else list(value)
    if any("\x00" in text for text in texts):
        raise ValueError(f"A text in an archive must have no zero character; found {value!r}.")
    encoded = [text.encode("utf-8") for text in texts]
    width = max([1, *map(len, encoded)])
    array = np.array(encoded, dtype=f"S{width}")
    return array.reshape(()) if isinstance(value, str) else array


def texts_of(array: Array) -> tuple[str, ...]:
    """Return the texts of a one-dimensional text array."""
    return tuple(bytes(item).decode("utf-8") for item in array)


def text_of(array: Array) -> str:
    """Return the text of a text array of no dimension."""
    return bytes(array[()]).decode("utf-8")


def header_items(header: RunHeader) -> Items:
    """Return the header's items by path, its shapes and types checked.

    Raises
    ------
    ValueError
        If lengths disagree, a number is not finite, or a text cannot be stored.
    """
    items = {dataset.path: _header_item(dataset, header) for dataset in HEADER}
    lengths = axis_lengths(items)
    for dataset in HEADER:
        _check_shape(dataset, items[dataset.path], lengths)
    return items


def _header_item(dataset: Dataset, header: RunHeader) -> Array:
    value = getattr(header, dataset.field)
    if dataset.field == "provenance":
        value = json.dumps(value, sort_keys=True, allow_nan=False)
    return text_array(value) if dataset.dtype == "text" else _numbers(dataset, value)


def header_from(items: Mapping[str, Array]) -> RunHeader:
    """Return the header that the items came from."""
    values: dict[str, Any] = {}
    for dataset in HEADER:
        array = items[dataset.path]
        if dataset.dtype == "text":
            values[dataset.field] = texts_of(array) if dataset.axes else text_of(array)
        else:
            values[dataset.field] = array if dataset.axes else array.item()
    values["provenance"] = json.loads(values["provenance"])
    return RunHeader(**values)


def axis_lengths(items: Mapping[str, Array]) -> dict[str, int]:
    """Return the length of every axis that the header fixes."""
    named = [dataset for dataset in HEADER if dataset.axes and dataset.path.endswith("/name")]
    return {dataset.axes[0]: len(items[dataset.path]) for dataset in named}


def record_items(record: GenerationRecord, lengths: Mapping[str, int]) -> Items:
    """Return the items of one generation by path, each with one row more an evaluation.

    Parameters
    ----------
    record : GenerationRecord
        The generation.
    lengths : mapping
        Length of every axis but that of the evaluations.

    Raises
    ------
    ValueError
        If a shape disagrees with `lengths`, or a number is not finite where it must be.
    """
    count = len(record.designs)
    if count == 0:
        raise ValueError("A generation must have at least one evaluation; found none.")
    derived = {
        "generation_of": np.full(count, record.generation),
        "evaluations": [count],
        "hypervolume": [record.hypervolume],
        "elapsed": [record.elapsed],
    }
    items = {}
    for dataset in RECORD:
        value = derived.get(dataset.field)
        array = _numbers(dataset, getattr(record, dataset.field) if value is None else value)
        rows = count if dataset.along == EVALUATION else 1
        _check_shape(dataset, array, {**lengths, dataset.along: rows})
        items[dataset.path] = array
    return items


def state_items(record: GenerationRecord) -> Items:
    """Return the items of the search's state.

    Raises
    ------
    ValueError
        If the text is no JSON or an array is not one of plain numbers.
    """
    json.loads(record.state_json)
    items = {STATE_JSON.path: text_array(record.state_json)}
    for name, array in record.state_arrays.items():
        if not _ARRAY_NAME.fullmatch(name) or name.strip(".") == "":
            raise ValueError(f"An array of the state must have a plain name; found {name!r}.")
        items[STATE_ARRAYS + name] = _plain(np.asarray(array))
    return items


def state_from(items: Mapping[str, Array]) -> tuple[str, dict[str, Array]]:
    """Return the state's JSON and its arrays by name."""
    arrays = {
        path.removeprefix(STATE_ARRAYS): array
        for path, array in items.items()
        if path.startswith(STATE_ARRAYS)
    }
    return text_of(items[STATE_JSON.path]), arrays


def _plain(array: Array) -> Array:
    little = array.dtype.newbyteorder("<")
    plain_dtype(little.str)
    return np.array(array, dtype=little, order="C")


def _numbers(dataset: Dataset, value: object) -> Array:
    found = np.asarray(value)
    stored = _STORED[dataset.dtype]
    if stored.kind == "i":
        _check_integers(dataset, found, stored)
    array: Array = found.astype(stored, order="C")
    if stored.kind == "f":
        _check_finite(dataset, array)
    return array


def _check_integers(dataset: Dataset, found: Array, stored: np.dtype[Any]) -> None:
    if found.size and found.dtype.kind not in "iu":
        raise ValueError(f"{dataset.field} must be integers; found {found.dtype}.")
    limits = np.iinfo(stored)
    if found.size and (found.min() < limits.min or found.max() > limits.max):
        raise ValueError(f"{dataset.field} must fit {stored.itemsize} bytes; found {found}.")


def _check_finite(dataset: Dataset, array: Array) -> None:
    bad = np.isinf(array) if dataset.absent else ~np.isfinite(array)
    if bad.any():
        place = tuple(int(i) for i in np.argwhere(bad)[0])
        wanted = "finite or not-a-number" if dataset.absent else "finite"
        raise ValueError(f"{dataset.field} must be {wanted}; found {array[place]} at {place}.")


def _check_shape(dataset: Dataset, array: Array, lengths: Mapping[str, int]) -> None:
    expected = tuple(lengths.get(axis) for axis in dataset.axes)
    fits = array.ndim == len(expected) and all(
        want in (None, have) for want, have in zip(expected, array.shape, strict=True)
    )
    if not fits:
        words = ", ".join(
            axis if length is None else f"{axis} = {length}"
            for axis, length in zip(dataset.axes, expected, strict=True)
        )
        raise ValueError(f"{dataset.field} must have the shape ({words}); found {array.shape}.")


def search_constraint_count(items: Mapping[str, Array]) -> int:
    """Return how many constraints the search is told of, from a generation's items."""
    return int(items[BY_FIELD["search_constraints"].path].shape[1])
