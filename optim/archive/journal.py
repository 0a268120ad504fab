"""The journal of a run: SQLite, one transaction a generation, durable when `append` returns.

Write-ahead logging with ``synchronous=FULL``. The rollback mode was weighed and left: a reader
there holds up the writer's commit, and a writer killed in a commit leaves a file that a read-only
connection may not open. With the write-ahead file a reader never stands in the way, a commit is
one append and one fsync, and what was committed is copied into the journal proper right after.

Only the last generation's search state is kept: an older one could only repeat what is recorded
already, and would make the journal several times as large.
"""

from __future__ import annotations

import contextlib
import json
import sqlite3
from collections.abc import Iterator, Mapping
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any, Self

from optim.archive.claim import Claim
from optim.archive.items import (
    Array,
    axis_lengths,
    header_from,
    header_items,
    record_items,
    search_constraint_count,
    state_from,
    state_items,
)
from optim.archive.journal_file import (
    Ending,
    JournalView,
    Seal,
    connect,
    fsync_folder,
    journal_path,
    link,
    put_generation,
    put_seal,
    put_state,
    remove_database,
    write_new_journal,
)
from optim.archive.records import GenerationRecord, RunHeader
from optim.errors import Fault, InputError, StoppedEarlyError


class Journal(JournalView):
    """The journal of a run, open for its one writer; made by `create` or `open`.

    Attributes
    ----------
    run : Path
        RUN.h5.
    path : Path
        The journal itself.
    header : RunHeader
        What was recorded first.
    """

    def __init__(self, connection: sqlite3.Connection, run: Path, claim: Claim) -> None:
        super().__init__(connection, journal_path(run))
        self.run = run
        self._claim = claim
        self._closed = False
        with self._read() as db:
            db.execute("PRAGMA synchronous = FULL")
        items = self.header_items()
        with self._read():
            self.header = header_from(items)
        self._lengths = axis_lengths(items)

    @classmethod
    def create(cls, run: Path, header: RunHeader) -> Self:
        """Begin a run; the header is durable when this returns.

        Parameters
        ----------
        run : Path
            RUN.h5; the journal is kept beside it.
        header : RunHeader
            What is known before the first evaluation.

        Raises
        ------
        InputError
            If the run exists already or another process is writing it.
        ValueError
            If the header's shapes or types are wrong.
        """
        items = header_items(header)
        run.parent.mkdir(parents=True, exist_ok=True)
        claim = Claim(run)
        with contextlib.ExitStack() as undo:
            undo.callback(claim.release)
            _refuse_to_overwrite(run)
            write_new_journal(run, items)
            journal = cls._begun(run, claim, header.provenance)
            undo.pop_all()
        return journal

    @classmethod
    def open(cls, run: Path, provenance: Mapping[str, Any], claim: Claim | None = None) -> Self:
        """Open a journal to go on with its run; everything in it is verified first.

        Parameters
        ----------
        run : Path
            RUN.h5.
        provenance : mapping
            Of this session, representable as JSON.
        claim : Claim, optional
            The right to write the run, if it is held already; it becomes the journal's.

        Raises
        ------
        InputError
            If another process is writing the run.
        ArchiveVersionError
            If the journal has a newer format.
        ArchiveDamagedError
            If anything in it is damaged.
        """
        claim = claim or Claim(run)
        with contextlib.ExitStack() as undo:
            undo.callback(claim.release)
            journal = cls._begun(run, claim, provenance)
            undo.pop_all()
        return journal

    @classmethod
    def _begun(cls, run: Path, claim: Claim, provenance: Mapping[str, Any]) -> Self:
        db = connect(journal_path(run), "mode=rw")
        with contextlib.ExitStack() as undo:
            undo.callback(db.close)
            journal = cls(db, run, claim)
            journal.verify()
            journal._check_integrity()
            if journal.generations:
                told = search_constraint_count(journal.generation_items(0))
                journal._lengths["search_constraint"] = told
            journal._begin_session(provenance)
            undo.pop_all()
        return journal

    @property
    def generations(self) -> int:
        """Number of generations recorded."""
        return self.seal().generations

    @property
    def evaluations(self) -> int:
        """Number of evaluations recorded."""
        return self.seal().evaluations

    def last_state(self) -> tuple[str, dict[str, Array]] | None:
        """Return JSON and arrays of the search after the last generation; None before the first."""
        return state_from(self.state_items()) if self.generations else None

    def append(self, record: GenerationRecord) -> None:
        """Record a generation; it is durable when this returns.

        Parameters
        ----------
        record : GenerationRecord
            The next one.

        Raises
        ------
        ValueError
            If it is not the next generation, or its shapes or types are wrong.
        StoppedEarlyError
            If it cannot be written (full disk); everything before it is safe.
        """
        seal = self.seal()
        if record.generation != seal.generations:
            raise ValueError(
                f"The next generation must be {seal.generations}; found {record.generation}."
            )
        items = record_items(record, self._lengths)
        state = state_items(record)
        with self._transaction() as db:
            put_generation(db, record.generation, items)
            put_state(db, state)
            put_seal(
                db,
                Seal(
                    "running",
                    seal.generations + 1,
                    seal.evaluations + len(record.designs),
                    link(seal.chain, items),
                ),
            )
        self._lengths["search_constraint"] = search_constraint_count(items)

    def end(self, ending: Ending) -> None:
        """Record how the run ended."""
        seal = self.seal()
        with self._transaction() as db:
            put_seal(db, replace(seal, ending=ending))

    def close(self) -> None:
        """Close the journal, keep it, and let another process write the run.

        A second time, or after `remove`, it does nothing.
        """
        if self._closed:
            return
        self._closed = True
        self._db.close()
        self._claim.release()

    def remove(self) -> None:
        """Close the journal and delete it: RUN.h5 has been verified to hold everything."""
        self._closed = True
        self._db.close()
        remove_database(self.path)
        fsync_folder(self.path.parent)
        self._claim.release()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def _begin_session(self, provenance: Mapping[str, Any]) -> None:
        seal = self.seal()
        session = {
            **asdict(self._claim.writer),
            "first_generation": seal.generations,
            "provenance": dict(provenance),
        }
        text = json.dumps(session, sort_keys=True, allow_nan=False)
        with self._transaction() as db:
            db.execute("INSERT INTO session (record) VALUES (?)", (text,))
            put_seal(db, replace(seal, ending="running"))

    def _check_integrity(self) -> None:
        with self._read() as db:
            (found,) = db.execute("PRAGMA integrity_check").fetchone()
            if found != "ok":
                raise ValueError(found)

    @contextlib.contextmanager
    def _transaction(self) -> Iterator[sqlite3.Connection]:
        try:
            self._db.execute("BEGIN IMMEDIATE")
            yield self._db
            self._db.execute("COMMIT")
        except sqlite3.Error as error:
            raise StoppedEarlyError(
                f"{self.path}: cannot be written ({error}); what was recorded before is safe, "
                "and the run can be resumed from there."
            ) from error
        finally:
            if self._db.in_transaction:
                self._db.execute("ROLLBACK")
        # Never waits for a reader, and what it leaves is copied after the next generation.
        with contextlib.suppress(sqlite3.OperationalError):
            self._db.execute("PRAGMA wal_checkpoint(PASSIVE)")


def _refuse_to_overwrite(run: Path) -> None:
    if run.exists() or journal_path(run).exists():
        raise InputError(
            [
                Fault(
                    "exists already and is never overwritten; go on with `sectionwright resume`, "
                    "or give another place with --output.",
                    file=str(run),
                )
            ]
        )
