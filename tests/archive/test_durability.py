"""What was acknowledged is there, whenever the writer was killed."""

import contextlib
import shutil
import signal
import time

import numpy as np
import pytest
from archive_sample import assert_holds, make_header, make_record, start_writer, write_journal

from optim.archive.claim import claim_path
from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path, view_journal
from optim.archive.reader import equality_digest, open_run
from optim.archive.reopen import reopen
from optim.archive.writer import finish

GENERATIONS = 40


@pytest.fixture(scope="module")
def uninterrupted(tmp_path_factory):
    """Digest of the run that was never killed."""
    run = tmp_path_factory.mktemp("whole") / "run.h5"
    with Journal.create(run, make_header()) as journal:
        for generation in range(GENERATIONS):
            journal.append(make_record(generation))
        finish(journal)
    return equality_digest(run)


@pytest.mark.parametrize("seed", range(4))
def test_acknowledged_is_durable_and_a_resumed_run_equals_the_uninterrupted_one(
    run, uninterrupted, seed
):
    """Killed three times at random moments, then left alone."""
    moments = np.random.default_rng(seed)
    for _ in range(3):
        child = start_writer(run, GENERATIONS)
        heard = 1 + moments.integers(GENERATIONS // 3)
        said = [child.stdout.readline() for _ in range(heard)]
        time.sleep(moments.random() * 0.01)
        child.send_signal(signal.SIGKILL)
        child.wait()
        said += child.stdout.readlines()
        child.stdout.close()
        acknowledged = [int(line) for line in said if line.strip().isdigit()]
        with open_run(run) as opened:
            assert opened.generations >= max(acknowledged, default=-1) + 1
            assert_holds(opened, opened.generations)
    child = start_writer(run, GENERATIONS)
    assert child.communicate()[0].endswith("finished\n")
    with open_run(run) as opened:
        assert opened.state == "finished"
    assert equality_digest(run) == uninterrupted


def test_a_torn_write_ahead_file_leaves_complete_generations(tmp_path):
    """A power cut may leave any part of the last append; what is before it stands."""
    origin = tmp_path / "origin" / "run.h5"
    states = tmp_path / "states"
    with Journal.create(origin, make_header()) as journal:
        journal.append(make_record(0))
        # A reader at its old moment keeps what follows in the write-ahead file.
        with open_run(origin) as older, reader_in_the_way(origin):
            journal.append(make_record(1))
            journal.append(make_record(2))
            shutil.copytree(origin.parent, states)
            assert older.generations == 1
    claim_path(states / "run.h5").unlink()
    waiting = states / "run.h5.journal-wal"
    content = waiting.read_bytes()
    assert len(content) > 20000
    found = set()
    for length in [*range(0, len(content), len(content) // 40), len(content)]:
        (states / "run.h5.journal-shm").unlink(missing_ok=True)
        waiting.write_bytes(content[:length])
        with open_run(states / "run.h5") as opened:
            assert_holds(opened, opened.generations)
            found.add(opened.generations)
    assert found == {1, 2, 3}


@contextlib.contextmanager
def reader_in_the_way(run):
    """A read-only connection that stays at one moment."""
    with view_journal(run) as view, view.at_one_moment():
        view.seal()
        yield


def test_a_kill_between_the_archive_and_the_journals_end_does_no_harm(run):
    """RUN.h5 is in place, the journal not yet gone."""
    write_journal(run, 3)
    kept = journal_path(run).read_bytes()
    with reopen(run, {}) as journal:
        journal.end("finished")
        kept = journal_path(run).read_bytes()
        finish(journal)
    expected = equality_digest(run)
    journal_path(run).write_bytes(kept)
    with open_run(run) as opened:
        assert opened.state == "finished"
    assert equality_digest(run) == expected
    with reopen(run, {}) as journal:
        finish(journal)
    assert equality_digest(run) == expected
    assert not journal_path(run).exists()


def test_a_kill_while_a_file_is_begun_does_no_harm(run):
    """Half a file under its temporary name is written anew."""
    (run.parent / "run.h5.journal.tmp").write_bytes(b"half")
    (run.parent / "run.h5.tmp").write_bytes(b"half")
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        finish(journal)
    with open_run(run) as opened:
        assert_holds(opened, 1)
    assert list(run.parent.iterdir()) == [run]
