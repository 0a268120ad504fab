"""The HDF5 file as bytes: fixed-length texts, a digest a dataset, one digest over all of it.

Earliest format of the library, so that old readers open it; no variable-length types, no objects.
Each dataset has its SHA-256 as an attribute; the root attribute ``sha256`` covers these and every
other attribute of the file, so that a flipped bit anywhere is found or harmless.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

import h5py
import numpy as np

from optim.archive.digest import RowDigest, array_digest, combined_digest
from optim.archive.items import Array, plain_dtype
from optim.archive.journal_file import newer_format
from optim.archive.layout import BY_PATH, FORMAT, FORMAT_VERSION
from optim.errors import ArchiveDamagedError

LIBRARY_VERSIONS = ("earliest", "v108")
"""Bounds of the file format that HDF5 may use; its own default leaves the earliest out."""

ROWS_AT_A_TIME = 4096
"""Rows read in one piece where a whole dataset is gone through."""

DIGEST = "sha256"

READABLE = (OSError, KeyError, ValueError, TypeError, RuntimeError, AttributeError, MemoryError)
"""What reading a damaged file can raise below us."""


def set_text(target: h5py.Group | h5py.Dataset, name: str, text: str) -> None:
    """Set an attribute to a fixed-length UTF-8 text."""
    encoded = text.encode("utf-8")
    kind = h5py.string_dtype("utf-8", max(1, len(encoded)))
    target.attrs.create(name, np.array(encoded, dtype=kind), dtype=kind)


def attribute_text(target: h5py.Group | h5py.Dataset, name: str) -> str:
    """Return an attribute as text.

    Raises
    ------
    KeyError
        If there is none of that name.
    """
    value = target.attrs[name]
    return bytes(value).decode("utf-8") if isinstance(value, bytes | np.bytes_) else str(value)


def _objects(file: h5py.File) -> dict[str, h5py.Group | h5py.Dataset]:
    """Return all groups and datasets but the root by their paths."""
    found: dict[str, h5py.Group | h5py.Dataset] = {}
    file.visititems(lambda path, item: found.__setitem__(f"/{path}", item))
    return found


def read_plain(dataset: h5py.Dataset, rows: slice | None = None) -> Array:
    """Return a dataset, or some of its rows, as a read-only array of plain numbers or bytes.

    Raises
    ------
    ValueError
        If its type is any other.
    """
    plain = plain_dtype(dataset.dtype.newbyteorder("<").str)
    array = np.asarray(dataset[()] if rows is None else dataset[rows], dtype=plain)
    array.flags.writeable = False
    return array


def dataset_digest(dataset: h5py.Dataset) -> str:
    """Return the digest of what a dataset holds, read a few rows at a time."""
    if dataset.ndim == 0:
        return array_digest(read_plain(dataset))
    digest = RowDigest()
    for start in range(0, len(dataset), ROWS_AT_A_TIME):
        digest.update(read_plain(dataset, slice(start, start + ROWS_AT_A_TIME)))
    return digest.hexdigest(plain_dtype(dataset.dtype.str), dataset.shape[1:])


def manifest_digest(file: h5py.File) -> str:
    """Return the digest over every object and attribute of the file but the one that holds it."""
    return _manifest({"/": file, **_objects(file)})


def _manifest(objects: Mapping[str, h5py.Group | h5py.Dataset]) -> str:
    kinds = [(path, type(item).__name__) for path, item in objects.items()]
    attributes = [
        (f"{path}@{name}", np.asarray(value).tobytes().hex())
        for path, item in objects.items()
        for name, value in item.attrs.items()
        if (path, name) != ("/", DIGEST)
    ]
    return combined_digest(kinds + attributes)


def open_file(path: Path) -> h5py.File:
    """Open an archive for reading; its kind and format are checked, its content not yet.

    Raises
    ------
    FileNotFoundError
        If there is none.
    ArchiveVersionError
        If it has a newer format.
    ArchiveDamagedError
        If it is no archive of a run or cannot be opened.
    """
    try:
        file = h5py.File(path, "r", locking="best-effort")
    except FileNotFoundError:
        raise
    except READABLE as error:
        raise ArchiveDamagedError(
            f"{path}: is no HDF5 file or is cut short ({error}); nothing in it can be read."
        ) from error
    try:
        _check_kind(file, path)
    except BaseException:
        file.close()
        raise
    return file


def _check_kind(file: h5py.File, path: Path) -> None:
    try:
        kind = attribute_text(file, "format")
        version = int(file.attrs["format_version"])
    except READABLE as error:
        raise ArchiveDamagedError(
            f"{path}: does not say that it is the archive of a run ({error})."
        ) from error
    if kind != FORMAT:
        raise ArchiveDamagedError(f"{path}: is not the archive of a run, but {kind!r}.")
    if version > FORMAT_VERSION:
        raise newer_format(path, version)


def verified_digests(file: h5py.File, path_of_file: Path) -> dict[str, str]:
    """Read everything, compare it with its digests and return these by dataset.

    Raises
    ------
    ArchiveDamagedError
        If anything differs; what is intact is said.
    """
    try:
        objects = _objects(file)
        whole = _manifest({"/": file, **objects}) == attribute_text(file, DIGEST)
        paths = sorted(path for path, item in objects.items() if isinstance(item, h5py.Dataset))
    except READABLE:
        whole, paths = False, sorted(BY_PATH)
    digests = {path: _sound_digest(file, path) for path in paths}
    damaged = [path for path, digest in digests.items() if not digest]
    if damaged or not whole:
        raise ArchiveDamagedError(_what_is_left(path_of_file, damaged, len(paths) - len(damaged)))
    return digests


def _sound_digest(file: h5py.File, path: str) -> str:
    """Return the digest of a dataset if it is the stored one, else an empty text."""
    try:
        dataset = file[path]
        digest = dataset_digest(dataset)
        return digest if digest == attribute_text(dataset, DIGEST) else ""
    except READABLE:
        return ""


def _what_is_left(path: Path, damaged: list[str], intact: int) -> str:
    what = ", ".join(damaged) or "the description of its datasets"
    left = (
        f"{intact} datasets are intact and can be read with any HDF5 reader"
        if intact
        else "nothing in it is intact"
    )
    return f"{path}: the archive is damaged ({what}); {left}."
