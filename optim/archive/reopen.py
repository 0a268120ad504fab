"""Going on with a run: its journal verified, or rebuilt from RUN.h5 where the run was finished."""

from __future__ import annotations

import contextlib
import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from optim.archive.claim import Claim
from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path, write_new_journal
from optim.archive.reader import no_such_run, open_finished


def reopen(run: Path, provenance: Mapping[str, Any]) -> Journal:
    """Open a run to go on with it.

    Parameters
    ----------
    run : Path
        RUN.h5; it, its journal or both exist. The journal counts where both do.
    provenance : mapping
        Of this session, representable as JSON.

    Raises
    ------
    InputError
        If there is no such run, or another process is writing it.
    ArchiveVersionError
        If it has a newer format.
    ArchiveDamagedError
        If it is damaged.
    """
    if not (run.exists() or journal_path(run).exists()):
        raise no_such_run(run)
    claim = Claim(run)
    with contextlib.ExitStack() as undo:
        undo.callback(claim.release)
        if not journal_path(run).exists():
            _rebuild(run)
        journal = Journal.open(run, provenance, claim)
        undo.pop_all()
    return journal


def _rebuild(run: Path) -> None:
    with open_finished(run) as finished:
        sessions = [json.dumps(session, sort_keys=True) for session in finished.sessions()]
        write_new_journal(
            run,
            finished.header_items(),
            finished.each_generation(),
            finished.state_items(),
            sessions,
        )
