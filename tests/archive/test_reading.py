"""Reading beside a living writer, after it was killed, and at the end."""

import os
import shutil

import numpy as np
import pytest
from archive_sample import assert_holds, make_header, make_record, start_writer, write_journal

from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path, view_journal
from optim.archive.reader import open_run
from optim.archive.reopen import reopen
from optim.archive.writer import finish, write_archive
from optim.errors import InputError


def test_a_reader_beside_a_living_writer_sees_whole_generations(run):
    """It looks as often as it can while the run is written, up to its end."""
    child = start_writer(run, 150)
    assert child.stdout.readline() == "open\n"
    seen = []
    state = "running"
    while state == "running":
        with open_run(run) as opened:
            assert_holds(opened, opened.generations)
            seen.append(opened.generations)
            state = opened.state
    assert child.communicate()[0].endswith("finished\n")
    assert child.returncode == 0
    assert seen == sorted(seen)
    assert len(set(seen)) > 2
    with open_run(run) as opened:
        assert opened.state == "finished"
        assert_holds(opened, 150)


def test_a_writer_is_not_held_up_by_a_reader(run):
    """Every append succeeds at once while a reader stays at an old moment."""
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        journal._db.execute("PRAGMA busy_timeout = 0")
        with view_journal(run) as view, view.at_one_moment():
            assert view.seal().generations == 1
            for generation in range(1, 6):
                journal.append(make_record(generation))
            assert view.seal().generations == 1
            assert len(list(view.each_generation())) == 1
    with open_run(run) as opened:
        assert_holds(opened, 6)


def test_an_open_run_outlives_its_journal(run):
    write_journal(run, 2)
    with open_run(run) as before:
        with reopen(run, {}) as journal:
            finish(journal)
        assert_holds(before, 2)


def test_a_run_that_finishes_while_it_is_opened_is_read(run, monkeypatch):
    """The journal is there when looked for and gone when opened."""
    write_journal(run, 2)
    with reopen(run, {}) as journal:
        finish(journal)
    journal_path(run).touch()
    real = os.access

    def gone_meanwhile(*arguments):
        journal_path(run).unlink()
        return real(*arguments)

    monkeypatch.setattr(os, "access", gone_meanwhile)
    with open_run(run) as opened:
        assert opened.state == "finished"


def test_looking_at_a_stopped_run_needs_no_right_to_write(run, monkeypatch):
    """On a read-only medium SQLite cannot make its own files beside the journal."""
    write_journal(run, 2)
    monkeypatch.setattr(os, "access", lambda *_: False)
    before = sorted(run.parent.iterdir())
    with open_run(run) as opened:
        assert_holds(opened, 2)
    assert sorted(run.parent.iterdir()) == before


def test_a_journal_moved_elsewhere_is_read(run, tmp_path):
    write_journal(run, 3)
    moved = tmp_path / "other" / "renamed.h5"
    moved.parent.mkdir()
    shutil.move(journal_path(run), journal_path(moved))
    with open_run(moved) as opened:
        assert_holds(opened, 3)


def test_the_journals_own_name_is_taken_as_the_runs(run):
    write_journal(run, 1)
    with open_run(journal_path(run)) as opened:
        assert opened.path == run


def test_the_journal_counts_where_an_older_archive_is_there(run):
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        write_archive(journal, run)
        journal.append(make_record(1))
        with open_run(run) as opened:
            assert_holds(opened, 2)
    with reopen(run, {}) as journal:
        assert journal.generations == 2


def test_the_status_is_that_of_the_record(run):
    with Journal.create(run, make_header()) as journal:
        empty = open_run(run).status()
        for generation in range(3):
            journal.append(make_record(generation))
        live = open_run(run).status()
    records = [make_record(g) for g in range(3)]
    failed = sum(int(np.count_nonzero(r.design_outcomes)) for r in records)
    feasible = np.concatenate([r.violation for r in records]) == 0.0
    assert (empty.state, empty.generation, empty.evaluated) == ("running", 0, 0)
    assert (empty.feasible_share, empty.hypervolume, empty.points_per_second) == (None, None, None)
    assert live.process.pid == os.getpid()
    assert (live.generation, live.evaluated, live.elapsed_s) == (3, 36, 12.0)
    assert live.failed == {"not_converged": failed}
    assert live.feasible_share == pytest.approx(feasible.mean())
    assert live.hypervolume == 3.0
    assert live.points_per_second == sum(int(r.points.sum()) for r in records) / 12.0
    assert open_run(run).status().state == "interrupted"


@pytest.mark.parametrize("row", [-1, 24, 10**9])
def test_a_row_that_is_not_there_is_refused(run, row):
    write_journal(run, 2)
    with (
        open_run(run) as opened,
        pytest.raises(InputError, match=f"has no evaluation {row}; it holds 0 to 23"),
    ):
        opened.evaluation(row)
