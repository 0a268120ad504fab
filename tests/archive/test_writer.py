"""RUN.h5 is written whole or not at all."""

import resource

import h5py
import pytest
from archive_sample import assert_holds, make_header, make_record, write_journal

from optim.archive.hdf5_file import verified_digests
from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path
from optim.archive.reader import open_run
from optim.archive.reopen import reopen
from optim.archive.writer import finish, write_archive
from optim.errors import ArchiveDamagedError, StoppedEarlyError


@pytest.fixture
def no_room():
    """Let no file of this process grow: what a full disk or a quota does."""
    before = resource.getrlimit(resource.RLIMIT_FSIZE)

    def limit(size):
        resource.setrlimit(resource.RLIMIT_FSIZE, (size, before[1]))

    yield limit
    resource.setrlimit(resource.RLIMIT_FSIZE, before)


def test_a_full_disk_at_the_end_leaves_the_journal(run, no_room):
    """HDF5 itself would bring this process down; it is never let loose on a full disk."""
    write_journal(run, 3)
    with reopen(run, {}) as journal:
        no_room(500_000)
        with pytest.raises(StoppedEarlyError, match=r"needs room for \d+ kB.*holds everything"):
            finish(journal)
    assert list(run.parent.iterdir()) == [journal_path(run)]
    no_room(-1)
    with open_run(run) as opened:
        assert_holds(opened, 3)
    with reopen(run, {}) as journal:
        finish(journal)
    with open_run(run) as opened:
        assert_holds(opened, 3)


def test_a_full_disk_keeps_a_journal_from_being_looked_at_and_does_no_harm(run, no_room):
    write_journal(run, 3)
    no_room(500_000)
    with pytest.raises(StoppedEarlyError, match="needs room"):
        open_run(run)
    no_room(-1)
    with open_run(run) as opened:
        assert_holds(opened, 3)


def test_what_does_not_read_back_is_not_kept(run, monkeypatch):
    """A disk that lies: what is read differs from what was written."""
    write_journal(run, 3)

    def one_wrong(file, path):
        return {**verified_digests(file, path), "/evaluations/design": "0" * 64}

    with reopen(run, {}) as journal:
        with monkeypatch.context() as patch:
            patch.setattr("optim.archive.writer.verified_digests", one_wrong)
            with pytest.raises(ArchiveDamagedError, match="does not read back as it was written"):
                finish(journal)
        assert not run.exists()
        finish(journal)
    with open_run(run) as opened:
        assert_holds(opened, 3)


def test_an_older_archive_stays_until_the_new_one_is_whole(run, no_room):
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        write_archive(journal, run)
        before = run.read_bytes()
        journal.append(make_record(1))
        no_room(500_000)
        with pytest.raises(StoppedEarlyError):
            write_archive(journal, run)
        assert run.read_bytes() == before


@pytest.mark.parametrize(
    ("population", "rows"),
    [(12, 12 * 35), (2000, 2000)],
)
def test_a_chunk_is_whole_generations_of_at_least_16_kilobytes(run, population, rows):
    """Five float64 a row: 12 designs are 480 bytes, 2000 designs are 80 kB."""
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0, population))
        finish(journal)
    with h5py.File(run) as file:
        assert file["evaluations/design"].chunks == (rows, 5)
