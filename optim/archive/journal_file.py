"""The journal's file: its tables, its seal, and reading it beside a living writer.

Every item carries its SHA-256, the generations are chained, and one row seals the whole: what is
read is what was written, or the damage is named.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
import sqlite3
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal
from urllib.parse import quote

import numpy as np

from optim.archive.digest import array_digest, combined_digest
from optim.archive.items import Array, Items, plain_dtype, text_array
from optim.archive.layout import BY_FIELD, FORMAT_VERSION, RECORD, STATE_JSON
from optim.errors import ArchiveDamagedError, ArchiveVersionError, Fault, StoppedEarlyError

Ending = Literal["running", "stopped", "finished"]

APPLICATION_ID = 0x53575254
"""SQLite's mark of the kind of file, the letters SWRT."""

BUSY_SECONDS = 10.0
"""How long a connection waits while another one recovers the write-ahead file [s]."""

_COUNT = BY_FIELD["evaluations"].path

_SCHEMA = """
CREATE TABLE header (path TEXT PRIMARY KEY, dtype TEXT, shape TEXT, sha256 TEXT, data BLOB);
CREATE TABLE state (path TEXT PRIMARY KEY, dtype TEXT, shape TEXT, sha256 TEXT, data BLOB);
CREATE TABLE block (generation INTEGER, path TEXT, dtype TEXT, shape TEXT, sha256 TEXT, data BLOB,
                    PRIMARY KEY (generation, path));
CREATE TABLE session (number INTEGER PRIMARY KEY, record TEXT);
CREATE TABLE seal (ending TEXT, generations INTEGER, evaluations INTEGER, chain TEXT, seal TEXT);
"""

_RECORD_PATHS = {dataset.path for dataset in RECORD}

_READABLE = (sqlite3.Error, ValueError, TypeError, KeyError, OverflowError, MemoryError)
"""What reading a damaged file can raise below us."""


def journal_path(run: Path) -> Path:
    """Return where the journal of RUN.h5 is."""
    return run.with_name(run.name + ".journal")


@dataclass(frozen=True, slots=True)
class Seal:
    """What the journal says of itself.

    Attributes
    ----------
    ending : str
        "running", "stopped" or "finished", as last recorded.
    generations, evaluations : int
        How much it holds.
    chain : str
        Digest of the header and all generations, each linked to the one before.
    """

    ending: Ending
    generations: int
    evaluations: int
    chain: str

    def digest(self, state: str, sessions: str) -> str:
        """Return the seal over this and the digests of the state and the sessions."""
        parts = [self.ending, self.generations, self.evaluations, self.chain, state, sessions]
        return hashlib.sha256(json.dumps(parts).encode()).hexdigest()


def items_digest(items: Mapping[str, Array]) -> str:
    """Return one digest of many items."""
    return combined_digest((path, array_digest(array)) for path, array in items.items())


def link(chain: str, generation: Mapping[str, Array]) -> str:
    """Return the chain with one generation more."""
    return hashlib.sha256(f"{chain}{items_digest(generation)}".encode()).hexdigest()


class JournalView:
    """What can be read from an open journal; every item is checked against its digest.

    All methods raise ArchiveDamagedError where the content is not what was written.
    """

    def __init__(self, connection: sqlite3.Connection, path: Path) -> None:
        self._db = connection
        self.path = path

    @contextlib.contextmanager
    def _read(self) -> Iterator[sqlite3.Connection]:
        try:
            yield self._db
        except _READABLE as error:
            if getattr(error, "sqlite_errorcode", None) == sqlite3.SQLITE_BUSY:
                raise StoppedEarlyError(
                    f"{self.path}: another program is holding the journal; nothing is lost, "
                    "try again when it has let go."
                ) from error
            raise ArchiveDamagedError(f"{self.path}: the journal is damaged ({error}).") from error

    @contextlib.contextmanager
    def at_one_moment(self) -> Iterator[None]:
        """Read everything inside as it was at one moment, whatever the writer does meanwhile."""
        with self._read() as db:
            db.execute("BEGIN")
        try:
            yield
        finally:
            with contextlib.suppress(sqlite3.Error):
                self._db.execute("ROLLBACK")

    def seal(self) -> Seal:
        """Return what the journal says of itself, checked against its state and sessions."""
        with self._read() as db:
            rows = db.execute("SELECT ending, generations, evaluations, chain, seal FROM seal")
            ((*said, expected),) = rows.fetchall()
            seal = Seal(*said)
            if seal.digest(self._state_digest(), self._sessions_digest()) != expected:
                raise ValueError("its seal does not match its content")
        return seal

    def header_items(self) -> Items:
        """Return the header's items by path."""
        with self._read():
            return self._items("header", "SELECT * FROM header")

    def generation_items(self, generation: int) -> Items:
        """Return the items of one generation by path."""
        query = "SELECT path, dtype, shape, sha256, data FROM block WHERE generation = ?"
        with self._read():
            items = self._items(str(generation), query, generation)
            if items.keys() != _RECORD_PATHS:
                raise ValueError(f"generation {generation} is not complete")
        return items

    def state_items(self) -> Items:
        """Return the items of the search's state by path."""
        with self._read():
            return self._items("state", "SELECT * FROM state")

    def session_texts(self) -> tuple[str, ...]:
        """Return the record of every start and resume as JSON."""
        with self._read() as db:
            rows = db.execute("SELECT record FROM session ORDER BY number").fetchall()
            return tuple(str(record) for (record,) in rows)

    def history(self, field: str) -> Array:
        """Return one field of all generations, laid end to end.

        Parameters
        ----------
        field : str
            Attribute of `GenerationRecord`, such as "hypervolume".
        """
        query = (
            "SELECT generation, path, dtype, shape, sha256, data FROM block "
            "WHERE path = ? ORDER BY generation"
        )
        with self._read() as db:
            rows = db.execute(query, (BY_FIELD[field].path,)).fetchall()
            blocks = [_checked(str(generation), row) for generation, *row in rows]
        return np.concatenate(blocks) if blocks else np.empty(0)

    def each_generation(self) -> Iterator[Items]:
        """Yield the items of every generation, checked against its place in the chain at the end.

        Raises
        ------
        ArchiveDamagedError
            If anything differs from what was written; how much of it is intact is said.
        """
        seal = self.seal()
        chain, evaluations = items_digest(self.header_items()), 0
        for generation in range(seal.generations):
            items = self._intact(generation, seal)
            chain = link(chain, items)
            evaluations += int(items[_COUNT][0])
            yield items
        if (chain, evaluations) != (seal.chain, seal.evaluations):
            raise ArchiveDamagedError(
                f"{self.path}: the journal is damaged (its generations do not match its seal)."
            )

    def stored_bytes(self) -> int:
        """Return the size of the journal with its write-ahead file [bytes]."""
        waiting = self.path.with_name(self.path.name + "-wal")
        return self.path.stat().st_size + (waiting.stat().st_size if waiting.exists() else 0)

    def verify(self) -> Seal:
        """Read everything and compare it with the digests, the chain and the seal."""
        for _ in self.each_generation():
            pass
        self.state_items()
        return self.seal()

    def _intact(self, generation: int, seal: Seal) -> Items:
        try:
            return self.generation_items(generation)
        except ArchiveDamagedError as error:
            raise ArchiveDamagedError(
                f"{error} The first {generation} of {seal.generations} generations are intact."
            ) from error

    def _items(self, table: str, query: str, *arguments: int) -> Items:
        # Fetched whole: a query that an error leaves half way keeps the file locked.
        rows = self._db.execute(query, arguments).fetchall()
        return {row[0]: _checked(table, row) for row in rows}

    def _sessions_digest(self) -> str:
        return hashlib.sha256(json.dumps(self.session_texts()).encode()).hexdigest()

    def _state_digest(self) -> str:
        return combined_digest(self._db.execute("SELECT path, sha256 FROM state").fetchall())


def _place_digest(table: str, path: str, array: Array) -> str:
    """Return the digest of an item in its place: header, state or the number of a generation."""
    return combined_digest([(f"{table} {path}", array_digest(array))])


def _checked(table: str, row: Sequence[Any]) -> Array:
    path, dtype, shape, digest, data = row
    array = np.frombuffer(data, plain_dtype(dtype)).reshape(json.loads(shape))
    if _place_digest(table, path, array) != digest:
        raise ValueError(f"{path} does not match its digest")
    return array


def connect(path: Path, options: str) -> sqlite3.Connection:
    """Open a journal that exists; the kind and the version of the file are checked.

    Parameters
    ----------
    path : Path
        The journal.
    options : str
        SQLite's, such as "mode=ro".

    Raises
    ------
    ArchiveVersionError
        If it has a newer format.
    ArchiveDamagedError
        If it is no journal.
    """
    address = f"file:{quote(str(path.absolute()))}?{options}"
    with contextlib.ExitStack() as cleanup:
        try:
            db = sqlite3.connect(address, uri=True, isolation_level=None, timeout=BUSY_SECONDS)
            cleanup.callback(db.close)
            db.execute("PRAGMA trusted_schema = OFF")
            db.execute("PRAGMA cell_size_check = ON")
            kind = db.execute("PRAGMA application_id").fetchone()[0]
            version = db.execute("PRAGMA user_version").fetchone()[0]
        except sqlite3.Error as error:
            raise ArchiveDamagedError(
                f"{path}: cannot be read as a journal ({error}); nothing in it can be read."
            ) from error
        if kind != APPLICATION_ID:
            raise ArchiveDamagedError(f"{path}: is no journal of a run; nothing in it can be read.")
        if version > FORMAT_VERSION:
            raise newer_format(path, version)
        cleanup.pop_all()
    return db


def newer_format(path: Path, version: int) -> ArchiveVersionError:
    """Return the refusal of a newer format."""
    return ArchiveVersionError(
        [
            Fault(
                f"has format {version}; this version reads formats up to {FORMAT_VERSION}, "
                "install a newer sectionwright to read it.",
                file=str(path),
            )
        ]
    )


@contextlib.contextmanager
def view_journal(run: Path) -> Iterator[JournalView]:
    """Open the journal of a run for reading; its writer is never held up.

    Parameters
    ----------
    run : Path
        RUN.h5.

    Raises
    ------
    FileNotFoundError
        If there is none, or it went away because the run finished at this moment.
    ArchiveVersionError
        If it has a newer format.
    ArchiveDamagedError
        If it cannot be read.
    """
    path = journal_path(run)
    if not path.exists():
        raise FileNotFoundError(path)
    try:
        db = connect(path, _reading_options(path))
    except ArchiveDamagedError:
        if not path.exists():
            raise FileNotFoundError(path) from None
        raise
    try:
        yield JournalView(db, path)
    finally:
        db.close()


def _reading_options(path: Path) -> str:
    """Return SQLite's options: on a read-only medium it must not look for a writer."""
    waiting = path.with_name(path.name + "-wal")
    settled = not waiting.exists() or waiting.stat().st_size == 0
    alone = settled and not os.access(path.parent, os.W_OK)
    return "mode=ro&immutable=1" if alone else "mode=ro"


def write_new_journal(
    run: Path,
    header: Items,
    generations: Iterable[Items] = (),
    state: Items | None = None,
    sessions: Iterable[str] = (),
) -> None:
    """Write a journal under another name, then give it its own in one step.

    Parameters
    ----------
    run : Path
        RUN.h5.
    header : items
        The header.
    generations : iterable of items
        The generations, in order.
    state : items, optional
        The search's state after the last one.
    sessions : iterable of str
        The sessions so far, as JSON.
    """
    path = journal_path(run)
    temporary = path.with_name(path.name + ".tmp")
    remove_database(temporary)
    db = sqlite3.connect(temporary, isolation_level=None)
    try:
        db.execute("PRAGMA synchronous = FULL")
        db.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        db.execute(f"PRAGMA user_version = {FORMAT_VERSION}")
        db.executescript(f"BEGIN; {_SCHEMA}")
        rows = _rows("header", header)
        db.executemany("INSERT INTO header VALUES (?, ?, ?, ?, ?)", rows)
        db.executemany("INSERT INTO session (record) VALUES (?)", [(text,) for text in sessions])
        put_state(db, state or {STATE_JSON.path: text_array("null")})
        put_seal(db, _put_generations(db, items_digest(header), generations))
        db.execute("COMMIT")
        # Here and never again: a writer killed in a change of mode would leave a file that a
        # read-only connection may not open.
        db.execute("PRAGMA journal_mode = WAL")
    finally:
        db.close()
    temporary.replace(path)
    fsync_folder(path.parent)


def _put_generations(db: sqlite3.Connection, chain: str, generations: Iterable[Items]) -> Seal:
    count, evaluations = 0, 0
    for items in generations:
        put_generation(db, count, items)
        chain, count = link(chain, items), count + 1
        evaluations += int(items[_COUNT][0])
    return Seal("running", count, evaluations, chain)


def put_generation(db: sqlite3.Connection, generation: int, items: Items) -> None:
    """Add the items of one generation."""
    rows = [(generation, *row) for row in _rows(str(generation), items)]
    db.executemany("INSERT INTO block VALUES (?, ?, ?, ?, ?, ?)", rows)


def put_state(db: sqlite3.Connection, state: Items) -> None:
    """Replace the search's state."""
    db.execute("DELETE FROM state")
    db.executemany("INSERT INTO state VALUES (?, ?, ?, ?, ?)", _rows("state", state))


def put_seal(db: sqlite3.Connection, seal: Seal) -> None:
    """Replace the seal; the state and the sessions must be in place."""
    view = JournalView(db, Path())
    digest = seal.digest(view._state_digest(), view._sessions_digest())
    db.execute("DELETE FROM seal")
    db.execute(
        "INSERT INTO seal VALUES (?, ?, ?, ?, ?)",
        (seal.ending, seal.generations, seal.evaluations, seal.chain, digest),
    )


def _rows(table: str, items: Items) -> list[tuple[str, str, str, str, bytes]]:
    return [
        (
            path,
            array.dtype.str,
            json.dumps(list(array.shape)),
            _place_digest(table, path, array),
            array.tobytes(),
        )
        for path, array in items.items()
    ]


def remove_database(path: Path) -> None:
    """Remove a database with what SQLite may have left beside it."""
    for suffix in ("", "-journal", "-wal", "-shm"):
        path.with_name(path.name + suffix).unlink(missing_ok=True)


def fsync_folder(folder: Path) -> None:
    """Make a new or renamed name in a folder durable."""
    descriptor = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
