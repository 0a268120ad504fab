"""RUN.h5 derived from the journal: another name, verify, fsync, rename in one step.

HDF5 promises nothing after a crash, so nothing is ever changed in place: a reader finds the old
file or the new one, whole. A few generations are in memory at a time, however long the run was.
"""

from __future__ import annotations

import os
import sys
from pathlib import Path
from typing import Any

import h5py
import numpy as np

from optim import __version__
from optim.archive.digest import RowDigest, array_digest
from optim.archive.hdf5_file import (
    DIGEST,
    LIBRARY_VERSIONS,
    manifest_digest,
    open_file,
    set_text,
    verified_digests,
)
from optim.archive.items import Array, Items, text_array
from optim.archive.journal import Journal
from optim.archive.journal_file import JournalView, Seal, fsync_folder
from optim.archive.layout import (
    BY_PATH,
    EVALUATION,
    FORMAT,
    FORMAT_VERSION,
    GROUPS,
    RECORD,
    SESSIONS,
    STATE_ARRAYS,
    Dataset,
)
from optim.errors import ArchiveDamagedError, StoppedEarlyError
from optim.outcomes import Outcome

LEAST_CHUNK_BYTES = 16384
"""A chunk is one generation, or as many whole ones as give it this size: a narrow dataset in
chunks of one generation would be mostly HDF5's own bookkeeping."""

MOST_CHUNK_BYTES = 1048576
"""A chunk stays below this, so that a few rows can be read without unpacking many."""

GZIP_LEVEL = 4
"""Levels above it take longer and gain less than 1 % on floating-point data (rule of thumb)."""

SPARE_BYTES = 1048576
"""Room on the disk beyond the journal's own size before RUN.h5 is begun."""


def finish(journal: Journal) -> None:
    """End a run: RUN.h5 holds everything, then the journal goes.

    Raises
    ------
    StoppedEarlyError
        If the disk is full; the journal stays and holds everything.
    """
    journal.end("finished")
    write_archive(journal, journal.run)
    journal.remove()


def stop(journal: Journal) -> None:
    """Leave a run that is not finished: RUN.h5 is written for reading, the journal stays.

    Raises
    ------
    StoppedEarlyError
        If the disk is full; the journal stays and holds everything.
    """
    journal.end("stopped")
    write_archive(journal, journal.run)
    journal.close()


def write_archive(view: JournalView, run: Path) -> None:
    """Write RUN.h5 from a journal under another name, verify it, then give it its own name.

    Raises
    ------
    StoppedEarlyError
        If it cannot be written (full disk); the journal is untouched.
    ArchiveDamagedError
        If the journal is damaged, or what was written does not read back the same.
    """
    temporary = run.with_name(run.name + ".tmp")
    try:
        expected = derive(view, temporary, lasting=True)
        _verify(temporary, expected)
        with temporary.open("rb") as written:
            os.fsync(written.fileno())
        temporary.replace(run)
        fsync_folder(run.parent)
    except OSError as error:
        raise StoppedEarlyError(
            f"{run}: cannot be written ({error}); its journal holds everything."
        ) from error
    finally:
        temporary.unlink(missing_ok=True)


def _check_room(view: JournalView, path: Path) -> None:
    """Stop unless the disk, and any quota, has room for a file as large as the journal."""
    # HDF5 that meets a full disk brings the whole process down when it ends, so it must not.
    if sys.platform != "linux":
        return
    needed = view.stored_bytes() + SPARE_BYTES
    try:
        with path.open("wb") as probe:
            os.posix_fallocate(probe.fileno(), 0, needed)
    except OSError as error:
        raise StoppedEarlyError(
            f"{path}: needs room for {needed // 1024} kB ({error.strerror}); the journal holds "
            "everything, make room and try again."
        ) from error


def _verify(path: Path, expected: dict[str, str]) -> None:
    with open_file(path) as file:
        found = verified_digests(file, path)
    if found != expected:
        raise ArchiveDamagedError(f"{path}: does not read back as it was written.")


def derive(view: JournalView, path: Path, *, lasting: bool) -> dict[str, str]:
    """Lay the journal's items end to end in an HDF5 file.

    Parameters
    ----------
    view : JournalView
        The journal; it is read as it was at one moment.
    path : Path
        The file to write.
    lasting : bool
        Packed, described and sealed to stay, or plain for a snapshot that is read once.

    Returns
    -------
    dict
        The digest of every dataset by its path.

    Raises
    ------
    StoppedEarlyError
        If there is no room for it on the disk.
    ArchiveDamagedError
        If the journal is damaged.
    """
    _check_room(view, path)
    with (
        view.at_one_moment(),
        h5py.File(path, "w", libver=LIBRARY_VERSIONS, rdcc_nbytes=MOST_CHUNK_BYTES) as file,
    ):
        seal = view.seal()
        sessions = text_array(f"[{', '.join(view.session_texts())}]")
        fixed = {**view.header_items(), **view.state_items(), SESSIONS.path: sessions}
        digests = {place: _put_fixed(file, place, array) for place, array in fixed.items()}
        digests |= _put_growing(file, view, seal, compressed=lasting)
        _identify(file, seal)
        if lasting:
            _describe(file, digests)
    return digests


def _identify(file: h5py.File, seal: Seal) -> None:
    set_text(file, "format", FORMAT)
    file.attrs["format_version"] = np.int64(FORMAT_VERSION)
    set_text(file, "written_by", f"sectionwright {__version__}")
    set_text(file, "ending", seal.ending)
    file.attrs["generations"] = np.int64(seal.generations)
    file.attrs["evaluations"] = np.int64(seal.evaluations)


def _put_fixed(file: h5py.File, path: str, array: Array) -> str:
    data = array
    if array.dtype.kind == "S":
        data = array.astype(h5py.string_dtype("utf-8", array.dtype.itemsize))
    file.create_dataset(path, data=data, track_times=False)
    return array_digest(array)


def _describe(file: h5py.File, digests: dict[str, str]) -> None:
    """Say of every group and dataset what it is, then seal all of it."""
    for name, sentence in GROUPS.items():
        set_text(file.require_group(name), "description", sentence)
    for path, digest in digests.items():
        dataset = file[path]
        set_text(dataset, DIGEST, digest)
        _annotate(dataset, BY_PATH.get(path, _state_array(path)))
    set_text(file, DIGEST, manifest_digest(file))


def _state_array(path: str) -> Dataset:
    name = path.removeprefix(STATE_ARRAYS)
    return Dataset(path, name, "f8", (), "", "An array of the search's state.")


def _annotate(dataset: h5py.Dataset, described: Dataset) -> None:
    set_text(dataset, "description", described.description)
    set_text(dataset, "unit", described.unit)
    set_text(dataset, "axes", ", ".join(described.axes))
    if described.absent:
        set_text(dataset, "absent", described.absent)
    if described.field in {"outcomes", "design_outcomes"}:
        labels = [outcome.label.encode() for outcome in Outcome]
        dataset.attrs["outcome_names"] = np.array(labels, dtype=f"S{max(map(len, labels))}")


def _put_growing(
    file: h5py.File, view: JournalView, seal: Seal, *, compressed: bool
) -> dict[str, str]:
    columns: dict[str, _Column] = {}
    lengths = {EVALUATION: seal.evaluations}
    for items in view.each_generation():
        for described in RECORD:
            block = items[described.path]
            if described.path not in columns:
                rows = lengths.get(described.along, seal.generations)
                columns[described.path] = _Column(file, described, rows, block, compressed)
            columns[described.path].add(block)
    if not columns:
        return _put_empty(file)
    return {path: column.digest() for path, column in columns.items()}


def _put_empty(file: h5py.File) -> dict[str, str]:
    empty: Items = {
        described.path: np.empty([0] * len(described.axes), described.dtype) for described in RECORD
    }
    return {path: _put_fixed(file, path, array) for path, array in empty.items()}


class _Column:
    """A dataset that is filled block by block, a chunk at a time, and its digest."""

    def __init__(
        self,
        file: h5py.File,
        described: Dataset,
        rows: int,
        first: Array,
        compressed: bool,  # noqa: FBT001
    ) -> None:
        shape = (rows, *first.shape[1:])
        form: dict[str, Any] = {"dtype": first.dtype, "track_times": False}
        self._chunk = len(first)
        if first.size:
            self._chunk = _rows_a_chunk(len(first), first.nbytes // len(first))
            form |= {"maxshape": (None, *shape[1:]), "chunks": (self._chunk, *shape[1:])}
        if first.size and compressed:
            form |= {"compression": "gzip", "compression_opts": GZIP_LEVEL, "shuffle": True}
        self._dataset = file.create_dataset(described.path, shape, **form)
        self._filled = 0
        self._waiting: list[Array] = []
        self._digest = RowDigest()

    def add(self, block: Array) -> None:
        """Put a block below the last one."""
        self._digest.update(block)
        self._waiting.append(block)
        if sum(map(len, self._waiting)) >= self._chunk:
            self._put()

    def digest(self) -> str:
        """Write what is waiting and return the digest of all of it."""
        self._put()
        return self._digest.hexdigest(self._dataset.dtype, self._dataset.shape[1:])

    def _put(self) -> None:
        if self._waiting:
            rows = np.concatenate(self._waiting)
            if rows.size:
                self._dataset[self._filled : self._filled + len(rows)] = rows
            self._filled += len(rows)
            self._waiting.clear()


def _rows_a_chunk(rows: int, bytes_a_row: int) -> int:
    """Return how many rows make a chunk, from the first generation's rows.

    >>> _rows_a_chunk(80, 96)
    240
    """
    generations = -(-LEAST_CHUNK_BYTES // (rows * bytes_a_row))
    return max(1, min(rows * generations, MOST_CHUNK_BYTES // bytes_a_row))
