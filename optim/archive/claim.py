"""One writer a run: a lock that dies with its process, and a note of who holds it.

The lock is a BSD `flock` on a file of its own beside the journal. It is not on the journal itself:
SQLite keeps POSIX locks on that file, and a process that closes any descriptor of a file loses all
its POSIX locks on it, so looking whether a run is alive could cost the writer its locks.
A file left behind by a killed process carries no lock and is no obstacle.
"""

from __future__ import annotations

import fcntl
import json
import os
import platform
import time
from dataclasses import asdict, dataclass
from datetime import UTC, datetime
from pathlib import Path

from optim.errors import Fault, InputError

PATIENCE = 0.5
"""How long a writer asks again [s]: a reader that looks holds the lock for microseconds."""

_NETWORK = ("nfs", "nfs4", "cifs", "smb3", "smbfs", "9p", "afs", "lustre", "beegfs", "fuse.sshfs")
"""File systems on which neither locks nor a write-ahead file are to be trusted."""


@dataclass(frozen=True, slots=True)
class Writer:
    """Who writes a run.

    Attributes
    ----------
    pid : int
        Process.
    host : str
        Machine.
    since : str
        When it began, UTC, ISO 8601.
    """

    pid: int
    host: str
    since: str

    def __str__(self) -> str:
        return f"process {self.pid} on {self.host} since {self.since}"


def claim_path(run: Path) -> Path:
    """Return where the claim of a run is kept."""
    return run.with_name(run.name + ".journal-claim")


class Claim:
    """The right to write one run, held until released or until the process ends."""

    def __init__(self, run: Path) -> None:
        """Claim `run`.

        Raises
        ------
        InputError
            If another process holds it; its process and machine are named.
        """
        self.path = claim_path(run)
        self.writer = Writer(
            os.getpid(), platform.node(), datetime.now(UTC).isoformat(timespec="seconds")
        )
        self._descriptor = _locked(self.path, run)
        os.ftruncate(self._descriptor, 0)
        os.pwrite(self._descriptor, json.dumps(asdict(self.writer)).encode(), 0)

    def release(self) -> None:
        """Give the claim back; a second time does nothing."""
        if self._descriptor >= 0:
            # Unlinked before the lock goes: whoever waits on this file finds it gone and
            # opens the new one.
            self.path.unlink(missing_ok=True)
            os.close(self._descriptor)
            self._descriptor = -1


def _locked(path: Path, run: Path) -> int:
    deadline = time.monotonic() + PATIENCE
    while True:
        descriptor = os.open(path, os.O_RDWR | os.O_CREAT, 0o644)
        if _lock(descriptor, fcntl.LOCK_EX) and _still_there(descriptor, path):
            return descriptor
        os.close(descriptor)
        if time.monotonic() > deadline:
            raise _refusal(path, run)
        time.sleep(0.01)


def _refusal(path: Path, run: Path) -> InputError:
    who = _noted(path) or "another process"
    return InputError(
        [Fault(f"{who} is writing this run; stop it first, or wait for it to end.", file=str(run))]
    )


def _lock(descriptor: int, kind: int) -> bool:
    try:
        fcntl.flock(descriptor, kind | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    return True


def _still_there(descriptor: int, path: Path) -> bool:
    try:
        return os.path.samestat(os.fstat(descriptor), path.stat())
    except FileNotFoundError:
        return False


def _noted(path: Path) -> Writer | None:
    try:
        return Writer(**json.loads(path.read_text(encoding="utf-8")))
    except (OSError, ValueError, TypeError):
        return None


def holder(run: Path) -> Writer | None:
    """Return who writes `run` at this moment, None if nobody does."""
    path = claim_path(run)
    try:
        descriptor = os.open(path, os.O_RDONLY)
    except FileNotFoundError:
        return None
    try:
        free = _lock(descriptor, fcntl.LOCK_SH)
    finally:
        os.close(descriptor)
    return None if free else _noted(path) or Writer(0, "unknown", "unknown")


def network_file_system(path: Path) -> str | None:
    """Return the kind of network file system that `path` is on, None if it is local."""
    best, kind = "", None
    target = str(path.resolve())
    for line in _mounts():
        point, fs = line.split()[1:3]
        inside = target == point or target.startswith(point.rstrip("/") + "/")
        if inside and len(point) >= len(best):
            best, kind = point, fs
    return kind if kind in _NETWORK else None


def _mounts() -> list[str]:
    table = Path("/proc/mounts")
    return table.read_text(encoding="utf-8").splitlines() if table.exists() else []
