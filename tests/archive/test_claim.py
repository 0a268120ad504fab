"""One writer a run."""

import json
import os
import platform
import signal
from pathlib import Path

import pytest
from archive_sample import make_header, make_record, start_writer, write_journal

from optim.archive.claim import Claim, Writer, claim_path, holder, network_file_system
from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path
from optim.archive.reader import open_run
from optim.archive.reopen import reopen
from optim.errors import InputError


def test_a_second_writer_is_refused_naming_the_first(run):
    with Journal.create(run, make_header()) as journal:
        said = rf"run.h5: process {os.getpid()} on {platform.node()} since .* is writing this run"
        with pytest.raises(InputError, match=said):
            reopen(run, {})
        journal.append(make_record(0))
    with reopen(run, {}) as journal:
        assert journal.generations == 1


def test_a_writer_in_another_process_is_named(run):
    child = start_writer(run, 10**6)
    try:
        assert child.stdout.readline() == "open\n"
        with pytest.raises(InputError, match=f"process {child.pid} on"):
            reopen(run, {})
        with open_run(run) as opened:
            assert opened.state == "running"
            assert opened.process.pid == child.pid
            assert opened.status().process.host == platform.node()
    finally:
        child.send_signal(signal.SIGKILL)
        child.wait()
        child.stdout.close()
    assert holder(run) is None
    assert claim_path(run).exists()


@pytest.mark.parametrize(
    "left",
    ["", "{", json.dumps({"pid": os.getpid(), "host": "x"})],
    ids=["empty", "cut", "of another"],
)
def test_a_claim_left_behind_is_no_obstacle(run, left):
    """Even one that names a process that is alive: the lock counts, not the note."""
    write_journal(run, 1)
    claim_path(run).write_text(left)
    assert holder(run) is None
    with reopen(run, {}) as journal:
        assert journal.generations == 1
        assert holder(run) == journal._claim.writer
    assert not claim_path(run).exists()


def test_a_claim_whose_note_cannot_be_read_is_still_a_claim(run):
    claim = Claim(run)
    claim_path(run).write_text("")
    assert holder(run) == Writer(0, "unknown", "unknown")
    with pytest.raises(InputError, match="another process is writing this run"):
        Claim(run)
    claim.release()
    claim.release()
    assert holder(run) is None


def test_a_reader_that_looks_does_not_turn_a_writer_away(run, monkeypatch):
    """A look holds a shared lock for a moment; a writer asks again."""
    real = os.close
    claims = []

    def claim_then_close(descriptor):
        monkeypatch.setattr(os, "close", real)
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr("optim.archive.claim.PATIENCE", 0.0)
            with pytest.raises(InputError):
                Claim(run)
        real(descriptor)
        claims.append(Claim(run))

    claim_path(run).touch()
    monkeypatch.setattr(os, "close", claim_then_close)
    assert holder(run) is None
    assert holder(run) == claims[0].writer
    claims[0].release()


def test_a_claim_on_a_file_that_has_just_gone_is_taken_anew(run, monkeypatch):
    """The holder lets go between another's opening of the file and its locking."""
    first = Claim(run)
    real = os.open

    def open_then_release(*arguments):
        descriptor = real(*arguments)
        first.release()
        return descriptor

    monkeypatch.setattr(os, "open", open_then_release)
    second = Claim(run)
    monkeypatch.setattr(os, "open", real)
    assert holder(run) == second.writer
    second.release()


def test_a_failed_opening_gives_the_claim_back(run):
    journal_path(run).write_bytes(b"no journal")
    for _ in range(2):
        with pytest.raises(Exception, match="nothing in it can be read"):
            reopen(run, {})
    assert holder(run) is None


@pytest.mark.parametrize(
    ("place", "kind"),
    [("/home/a/run.h5", "nfs4"), ("/homes/run.h5", None), ("/data/run.h5", None)],
)
def test_a_network_file_system_is_recognised(monkeypatch, place, kind):
    mounts = ["none / ext4 rw 0 0", "server:/home /home nfs4 rw 0 0", "none /data tmpfs rw 0 0"]
    monkeypatch.setattr("optim.archive.claim._mounts", lambda: mounts)
    assert network_file_system(Path(place)) == kind
