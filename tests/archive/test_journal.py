"""What the journal accepts, and what it says when it does not."""

import sqlite3
from contextlib import closing

import numpy as np
import pytest
from archive_sample import make_header, make_record, write_journal

from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path
from optim.archive.reader import open_run
from optim.archive.reopen import reopen
from optim.archive.writer import finish, stop
from optim.errors import InputError, StoppedEarlyError


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"designs": np.zeros((12, 4))}, "designs must have the shape .* variable = 5"),
        ({"objectives": np.zeros((11, 2))}, "evaluation = 12"),
        ({"objectives": np.full((12, 2), np.inf)}, "objectives must be finite or not-a-number"),
        ({"designs": np.full((12, 5), np.nan)}, r"designs must be finite; found nan at \(0, 0\)"),
        ({"search_objectives": np.full((12, 2), np.nan)}, "search_objectives must be finite"),
        ({"violation": np.full(12, np.nan)}, "violation must be finite"),
        ({"outcomes": np.zeros((12, 2))}, "outcomes must be integers"),
        ({"outcomes": np.full((12, 2), 200)}, "outcomes must fit 1 bytes"),
        ({"designs": np.zeros((0, 5))}, "at least one evaluation"),
        ({"generation": 3}, "next generation must be 1; found 3"),
        ({"state_json": "{"}, "Expecting"),
        ({"state_arrays": {"a": np.array([{}])}}, "numbers and texts only"),
        ({"state_arrays": {"a/b": np.zeros(1)}}, "plain name"),
        ({"state_arrays": {"..": np.zeros(1)}}, "plain name"),
        ({"search_constraints": np.zeros((12, 9))}, "search_constraint = 4"),
    ],
)
def test_a_wrong_record_is_refused_and_leaves_no_trace(run, change, message):
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        with pytest.raises(ValueError, match=message):
            journal.append(make_record(1, **change))
        journal.append(make_record(1))
        finish(journal)
    with open_run(run) as opened:
        assert opened.generations == 2


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"lower": np.zeros(4)}, "lower must have the shape"),
        ({"upper": np.full(5, np.inf)}, "upper must be finite"),
        ({"objective_units": ("-",)}, "objective_units must have the shape"),
        ({"variable_names": ("a\x00b", "b", "c", "d", "e")}, "zero character"),
        ({"study_text": "\ud800"}, "surrogates"),
        ({"seed": 2**70}, "seed must fit|seed must be integers"),
        ({"provenance": {"x": float("nan")}}, "Out of range float"),
    ],
)
def test_a_wrong_header_is_refused_and_leaves_no_file(run, change, message):
    with pytest.raises(ValueError, match=message):
        Journal.create(run, make_header(**change))
    assert not list(run.parent.iterdir())


@pytest.mark.parametrize("ended", [finish, stop, Journal.close])
def test_a_run_is_never_overwritten(run, ended):
    ended(Journal.create(run, make_header()))
    before = sorted(run.parent.iterdir())
    with pytest.raises(InputError, match=r"run.h5: exists already.*resume.*--output"):
        Journal.create(run, make_header())
    assert sorted(run.parent.iterdir()) == before


def test_a_finished_run_is_one_file(run):
    write_journal(run, 2)
    with reopen(run, {}) as journal:
        finish(journal)
    assert list(run.parent.iterdir()) == [run]


def test_a_stopped_run_is_an_archive_and_a_journal(run):
    write_journal(run, 2)
    with reopen(run, {}) as journal:
        stop(journal)
    assert sorted(run.parent.iterdir()) == [run, journal_path(run)]
    with open_run(run) as opened:
        assert opened.state == "stopped"


def test_a_run_that_does_not_exist_cannot_be_reopened(run):
    with pytest.raises(InputError, match=r"run.h5: no such run"):
        reopen(run, {})
    with pytest.raises(InputError, match=r"no such run; neither it nor run.h5.journal is there"):
        open_run(run)


def test_the_folder_is_made(tmp_path):
    run = tmp_path / "results" / "deep" / "run.h5"
    with Journal.create(run, make_header()) as journal:
        finish(journal)
    assert run.exists()


def test_commits_are_synced_and_readers_do_not_hold_them_up(run):
    """Durability and concurrency rest on these two settings of SQLite."""
    with Journal.create(run, make_header()) as journal:
        assert journal._db.execute("PRAGMA synchronous").fetchone() == (2,)
        assert journal._db.execute("PRAGMA journal_mode").fetchone() == ("wal",)


def test_a_full_disk_stops_the_run_and_loses_nothing(run):
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        pages = journal._db.execute("PRAGMA page_count").fetchone()[0]
        journal._db.execute(f"PRAGMA max_page_count = {pages + 1}")
        with pytest.raises(StoppedEarlyError, match=r"full.*recorded before is safe"):
            journal.append(make_record(1, 500))
        journal._db.execute("PRAGMA max_page_count = 1000000")
        journal.append(make_record(1))
    with open_run(run) as opened:
        assert opened.generations == 2


def test_only_the_last_state_is_kept(run):
    write_journal(run, 9)
    with closing(sqlite3.connect(journal_path(run))) as db:
        paths = [path for (path,) in db.execute("SELECT path FROM state ORDER BY path")]
    assert paths == sorted(
        ["/state/json", *(f"/state/arrays/{name}" for name in make_record(8).state_arrays)]
    )


def test_the_history_of_a_field_is_at_hand_when_going_on(run):
    write_journal(run, 4)
    with reopen(run, {}) as journal:
        assert journal.history("hypervolume").tolist() == [0.0, 1.5, 3.0, 4.5]
        assert journal.history("elapsed")[-1] == 16.0
        assert (journal.generations, journal.evaluations) == (4, 48)
        assert journal.header.study_name == "tollgate-6-wing"


def test_before_the_first_generation_there_is_no_state(run):
    with Journal.create(run, make_header()) as journal:
        assert journal.last_state() is None
        assert journal.history("hypervolume").size == 0
