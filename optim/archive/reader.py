"""A run as it is read: from RUN.h5, or from its journal through a snapshot, the same either way.

Everything is compared with its digests before the first number is handed out; datasets are read
when they are asked for, whole or by rows. The journal counts where both exist: it goes only after
RUN.h5 has been verified to hold everything.
"""

from __future__ import annotations

import contextlib
import json
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal, Self

import h5py
import numpy as np

from optim.archive.claim import Writer, holder
from optim.archive.digest import combined_digest
from optim.archive.hdf5_file import (
    READABLE,
    ROWS_AT_A_TIME,
    attribute_text,
    open_file,
    read_plain,
    verified_digests,
)
from optim.archive.items import Array, Items, header_from, state_from, text_of
from optim.archive.journal_file import view_journal
from optim.archive.layout import (
    BY_FIELD,
    EVALUATION,
    HEADER,
    RECORD,
    SESSIONS,
    STATE_ARRAYS,
    STATE_JSON,
    depends_on_clock,
)
from optim.archive.records import RunHeader
from optim.archive.writer import derive
from optim.arrays import FloatArray, IntArray
from optim.errors import ArchiveDamagedError, Fault, InputError
from optim.outcomes import Outcome

State = Literal["running", "stopped", "finished", "interrupted"]

_JOURNAL = ".journal"
_OPENING_TRIES = 3
"""A run that finishes while it is opened has its journal, then RUN.h5: look again this often."""


@dataclass(frozen=True, slots=True)
class RunStatus:
    """How far a run is.

    Attributes
    ----------
    state : str
        running (a process writes it), stopped (on purpose, can be resumed), finished, or
        interrupted (its process died, can be resumed).
    process : Writer or None
        Who writes it now.
    generation, evaluated : int
        How many there are.
    failed : dict
        Outcome's label -> number of designs, converged left out.
    feasible_share : float or None
        Share of the evaluations without violation; None before the first.
    hypervolume : float or None
        After the last generation; None before the first.
    points_per_second : float or None
        Coupled points over the elapsed time; None before the first generation.
    elapsed_s : float
        Time the run has been going, over all its sessions [s].
    """

    state: State
    process: Writer | None
    generation: int
    evaluated: int
    failed: dict[str, int]
    feasible_share: float | None
    hypervolume: float | None
    points_per_second: float | None
    elapsed_s: float


class Run:
    """A run open for reading; made by `open_run`, closed by `close` or a with statement.

    Attributes
    ----------
    path : Path
        RUN.h5, whether or not it exists yet.
    state : str
        "running", "stopped", "finished" or "interrupted".
    process : Writer or None
        Who writes it now.
    header : RunHeader
        What is known before the first evaluation.
    generations, evaluations : int
        How many there are.
    """

    def __init__(
        self, file: h5py.File, path: Path, digests: dict[str, str], process: Writer | None
    ) -> None:
        self._file = file
        self._all_digests = digests
        self.path = path
        self.process = process
        self.generations = int(file.attrs["generations"])
        self.evaluations = int(file.attrs["evaluations"])
        self.state = _state(attribute_text(file, "ending"), process)
        self.header: RunHeader = header_from(self.header_items())

    def header_items(self) -> Items:
        """Return the header's items by path."""
        return {dataset.path: read_plain(self._file[dataset.path]) for dataset in HEADER}

    def state_items(self) -> Items:
        """Return the items of the search's state by path."""
        items = {STATE_JSON.path: read_plain(self._file[STATE_JSON.path])}
        for name in self._file.get(STATE_ARRAYS, ()):
            items[STATE_ARRAYS + name] = read_plain(self._file[STATE_ARRAYS + name])
        return items

    def each_generation(self) -> Iterator[Items]:
        """Yield the items of every generation."""
        start = 0
        for generation, count in enumerate(self.read("evaluations")):
            rows = {EVALUATION: slice(start, start + int(count))}
            only = slice(generation, generation + 1)
            yield {
                dataset.path: self.read(dataset.field, rows.get(dataset.along, only))
                for dataset in RECORD
            }
            start += int(count)

    def last_state(self) -> tuple[str, dict[str, Array]] | None:
        """Return JSON and arrays of the search after the last generation; None before the first."""
        return state_from(self.state_items()) if self.generations else None

    def sessions(self) -> list[dict[str, Any]]:
        """Return the record of every start and resume: process, host, time, provenance."""
        sessions: list[dict[str, Any]] = json.loads(text_of(read_plain(self._file[SESSIONS.path])))
        return sessions

    def read(self, field: str, rows: slice | None = None) -> Array:
        """Return one field of the record, all rows or some, read-only.

        Parameters
        ----------
        field : str
            Attribute of `GenerationRecord` such as "designs"; also "generation_of" (of each
            evaluation) and "evaluations" (of each generation).
        rows : slice, optional
            Evaluations, or generations for a field of theirs.
        """
        return read_plain(self._file[BY_FIELD[field].path], rows)

    def blocks(self, *fields: str, rows: int = ROWS_AT_A_TIME) -> Iterator[dict[str, Array]]:
        """Yield fields of all evaluations some rows at a time, in order.

        Parameters
        ----------
        fields : str
            As in `read`, of evaluations.
        rows : int
            How many at a time.
        """
        for start in range(0, self.evaluations, rows):
            yield {field: self.read(field, slice(start, start + rows)) for field in fields}

    def evaluation(self, row: int) -> dict[str, Array]:
        """Return every field of one evaluation, RUN.h5#`row`.

        Raises
        ------
        InputError
            If there is no such row.
        """
        if not 0 <= row < self.evaluations:
            held = f"0 to {self.evaluations - 1}" if self.evaluations else "no evaluations yet"
            raise InputError(
                [Fault(f"has no evaluation {row}; it holds {held}.", file=str(self.path))]
            )
        rows = slice(row, row + 1)
        along = [dataset.field for dataset in RECORD if dataset.along == EVALUATION]
        return {field: self.read(field, rows)[0] for field in along}

    @property
    def designs(self) -> FloatArray:
        """Design variables, (n, n_variables)."""
        return self.read("designs")

    @property
    def objectives(self) -> FloatArray:
        """Objectives in their true sense, (n, n_objectives)."""
        return self.read("objectives")

    @property
    def constraint_values(self) -> FloatArray:
        """Constrained quantities, (n, n_constraints)."""
        return self.read("constraint_values")

    @property
    def margins(self) -> FloatArray:
        """Scaled margins, negative is a violation, (n, n_constraints)."""
        return self.read("margins")

    @property
    def violation(self) -> FloatArray:
        """Total violation, 0 is feasible, (n,)."""
        return self.read("violation")

    @property
    def quantities(self) -> FloatArray:
        """Quantities of the conditions, (n, n_conditions, n_condition_quantities)."""
        return self.read("quantities")

    @property
    def section_quantities(self) -> FloatArray:
        """Quantities of the sections, (n, n_section_quantities)."""
        return self.read("section_quantities")

    @property
    def outcomes(self) -> IntArray:
        """Codes of how each condition ended, (n, n_conditions)."""
        return self.read("outcomes")

    @property
    def design_outcomes(self) -> IntArray:
        """Codes of how each design ended, (n,)."""
        return self.read("design_outcomes")

    def digests(self) -> dict[str, str]:
        """Return the SHA-256 of every dataset that two equal runs have in common."""
        return {
            path: digest for path, digest in self._all_digests.items() if not depends_on_clock(path)
        }

    def status(self) -> RunStatus:
        """Return how far the run is."""
        started = self.generations > 0
        elapsed = float(self.read("elapsed")[-1]) if started else 0.0
        points = int(self.read("points").sum())
        return RunStatus(
            state=self.state,
            process=self.process,
            generation=self.generations,
            evaluated=self.evaluations,
            failed=self._failures(),
            feasible_share=float(np.mean(self.violation == 0.0)) if started else None,
            hypervolume=float(self.read("hypervolume")[-1]) if started else None,
            points_per_second=points / elapsed if elapsed > 0.0 else None,
            elapsed_s=elapsed,
        )

    def _failures(self) -> dict[str, int]:
        codes, counts = np.unique(self.design_outcomes, return_counts=True)
        pairs = zip(codes.tolist(), counts.tolist(), strict=True)
        return {Outcome(code).label: n for code, n in pairs if code != Outcome.CONVERGED}

    def close(self) -> None:
        """Close the file."""
        self._file.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()


def _state(ending: str, process: Writer | None) -> State:
    if process is not None:
        return "running"
    states: dict[str, State] = {
        "running": "interrupted",
        "stopped": "stopped",
        "finished": "finished",
    }
    return states[ending]


def open_run(path: Path) -> Run:
    """Open a run for reading, live, stopped, killed or finished.

    Parameters
    ----------
    path : Path
        RUN.h5, whether or not it exists yet; RUN.h5.journal is taken as RUN.h5.

    Raises
    ------
    InputError
        If there is neither RUN.h5 nor its journal.
    ArchiveVersionError
        If it has a newer format.
    ArchiveDamagedError
        If it is damaged or no archive; what can still be read is said.
    StoppedEarlyError
        If a journal is read and the folder for temporary files has no room for its snapshot.
    """
    run = path.with_name(path.name.removesuffix(_JOURNAL))
    for _ in range(_OPENING_TRIES):
        for opener in (_open_journal, open_finished):
            with contextlib.suppress(FileNotFoundError):
                return opener(run)
    raise no_such_run(run)


def no_such_run(run: Path) -> InputError:
    """Return the refusal of a run that is not there."""
    said = f"no such run; neither it nor {run.name}{_JOURNAL} is there."
    return InputError([Fault(said, file=str(run))])


def open_finished(run: Path) -> Run:
    """Open RUN.h5 itself, whatever its journal says.

    Raises
    ------
    FileNotFoundError
        If there is none.
    ArchiveVersionError, ArchiveDamagedError
        As `open_run`.
    """
    with contextlib.ExitStack() as undo:
        file = undo.enter_context(open_file(run))
        opened = _opened(file, run, verified_digests(file, run), None)
        undo.pop_all()
    return opened


def _opened(file: h5py.File, run: Path, digests: dict[str, str], process: Writer | None) -> Run:
    try:
        return Run(file, run, digests, process)
    except READABLE as error:
        raise ArchiveDamagedError(
            f"{run}: the archive is damaged (its header cannot be understood: {error!r})."
        ) from error


def _open_journal(run: Path) -> Run:
    process = holder(run)
    try:
        with view_journal(run) as view, tempfile.TemporaryDirectory() as folder:
            snapshot = Path(folder) / run.name
            digests = derive(view, snapshot, lasting=False)
            with contextlib.ExitStack() as undo:
                # Once open, the file outlives its name.
                file = undo.enter_context(h5py.File(snapshot, "r"))
                opened = _opened(file, run, digests, process)
                undo.pop_all()
            return opened
    except ArchiveDamagedError as error:
        raise _with_older(error, run) from error


def _with_older(error: ArchiveDamagedError, run: Path) -> ArchiveDamagedError:
    """Add to what is damaged in a journal that an older RUN.h5 is intact."""
    try:
        with open_finished(run) as older:
            words = f"{error} {run} holds {older.generations} generations, intact."
    except (FileNotFoundError, ArchiveDamagedError):
        return error
    return ArchiveDamagedError(words)


def run_digests(path: Path) -> dict[str, str]:
    """Return the SHA-256 of every dataset of a run but those of /timing and /provenance.

    Equal for two runs of one study and seed on one machine, whatever their workers, and whether
    or not they were killed and resumed.

    Raises
    ------
    InputError, ArchiveDamagedError
        As `open_run`.
    """
    with open_run(path) as run:
        return run.digests()


def equality_digest(path: Path) -> str:
    """Return one digest of `run_digests`.

    Raises
    ------
    InputError, ArchiveDamagedError
        As `open_run`.
    """
    return combined_digest(run_digests(path).items())
