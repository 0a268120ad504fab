"""A damaged file is found out: what is read is what was written, or nothing is."""

import contextlib
import sqlite3

import h5py
import numpy as np
import pytest
from archive_sample import make_header, make_record, write_journal

from optim.archive.hdf5_file import DIGEST, manifest_digest
from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path
from optim.archive.reader import open_finished, open_run
from optim.archive.reopen import reopen
from optim.archive.writer import finish, stop
from optim.errors import ArchiveDamagedError, ArchiveVersionError, InputError

FLIPS = 100


@pytest.fixture(scope="module")
def whole(tmp_path_factory):
    """A run of five generations: its journal, its archive, and its digests."""
    run = tmp_path_factory.mktemp("whole") / "run.h5"
    write_journal(run, 5)
    journal = journal_path(run).read_bytes()
    with reopen(run, {}) as opened:
        finish(opened)
    with open_run(run) as opened:
        digests = opened.digests()
    return {"run.h5": run.read_bytes(), "run.h5.journal": journal, "digests": digests}


def read_all(run):
    """Read the digests and the header, as texts that can be compared."""
    with open_run(run) as opened:
        return opened.digests(), header_texts(opened.header)


def header_texts(header):
    """Return every field of a header as text."""
    fields = {name: getattr(header, name) for name in header.__slots__}
    fields["provenance"] = sorted(fields["provenance"].items())
    return {name: repr(value) for name, value in fields.items()}


def is_found_or_harmless(run, whole, name, content) -> bool:
    """Put `content` in place and read it; return whether the damage was found."""
    for old in run.parent.iterdir():
        old.unlink()
    run.with_name(name).write_bytes(content)
    said = ""
    try:
        digests, header = read_all(run)
    except (ArchiveDamagedError, ArchiveVersionError) as error:
        said = str(error)
    if said:
        assert said.startswith(str(run))
        assert "\n" not in said
    else:
        assert digests == whole["digests"]
        assert header == header_texts(make_header())
    return bool(said)


@pytest.mark.parametrize("name", ["run.h5", "run.h5.journal"])
def test_a_flipped_bit_is_found_or_harmless(run, whole, name):
    rng = np.random.default_rng(20)
    found = 0
    for _ in range(FLIPS):
        content = bytearray(whole[name])
        content[rng.integers(len(content))] ^= 1 << rng.integers(8)
        found += is_found_or_harmless(run, whole, name, content)
    # About half of so small a file is in use; the rest is room that the libraries left.
    assert found > FLIPS // 4


@pytest.mark.parametrize("name", ["run.h5", "run.h5.journal"])
def test_a_file_cut_short_is_found(run, whole, name):
    size = len(whole[name])
    rng = np.random.default_rng(21)
    for length in [0, 1, 8, 100, 512, 4096, size // 2, size - 1, *rng.integers(size, size=30)]:
        assert is_found_or_harmless(run, whole, name, whole[name][:length]), length


@pytest.mark.parametrize("name", ["run.h5", "run.h5.journal"])
def test_a_block_overwritten_is_found_or_harmless(run, whole, name):
    rng = np.random.default_rng(22)
    for _ in range(30):
        content = bytearray(whole[name])
        start = rng.integers(len(content) - 512)
        content[start : start + 512] = rng.bytes(512)
        is_found_or_harmless(run, whole, name, content)


@pytest.mark.parametrize("content", [b"", b"x", b"study: not an archive\n" * 1000, bytes(5000)])
@pytest.mark.parametrize("name", ["run.h5", "run.h5.journal"])
def test_a_foreign_file_is_named(run, name, content):
    run.with_name(name).write_bytes(content)
    with pytest.raises(ArchiveDamagedError, match=r"run\.h5.*nothing in it can be read"):
        open_run(run)


def test_a_foreign_database_and_a_foreign_archive_are_named(run):
    with contextlib.closing(sqlite3.connect(journal_path(run))) as db:
        db.execute("CREATE TABLE t (a)")
    with pytest.raises(ArchiveDamagedError, match="is no journal of a run"):
        open_run(run)
    journal_path(run).unlink()
    with h5py.File(run, "w") as file:
        file["x"] = 1.0
    with pytest.raises(ArchiveDamagedError, match="does not say that it is the archive of a run"):
        open_run(run)
    with h5py.File(run, "w") as file:
        file.attrs["format"] = "something else"
        file.attrs["format_version"] = 1
    with pytest.raises(ArchiveDamagedError, match="is not the archive of a run"):
        open_run(run)


@pytest.mark.parametrize("use", [open_run, lambda run: reopen(run, {})])
@pytest.mark.parametrize("name", ["run.h5", "run.h5.journal"])
def test_a_newer_format_is_refused_in_one_sentence(run, whole, name, use):
    path = run.with_name(name)
    path.write_bytes(whole[name])
    if name == "run.h5":
        with h5py.File(path, "r+") as file:
            file.attrs["format_version"] = np.int64(2)
    else:
        with contextlib.closing(sqlite3.connect(path)) as db:
            db.execute("PRAGMA user_version = 2")
    said = rf"{name}: has format 2; this version reads formats up to 1, install a newer"
    with pytest.raises(ArchiveVersionError, match=said) as refusal:
        use(run)
    assert isinstance(refusal.value, InputError)
    assert "\n" not in str(refusal.value)


def test_what_is_left_of_an_archive_is_said(run, whole):
    run.write_bytes(whole["run.h5"])
    with h5py.File(run, "r+") as file:
        file["evaluations/objectives"][3, 0] = 99.0
        count = sum(isinstance(item, h5py.Dataset) for item in _items(file))
    said = rf"damaged \(/evaluations/objectives\); {count - 1} datasets are intact"
    with pytest.raises(ArchiveDamagedError, match=said):
        open_run(run)


def _items(file):
    found = []
    file.visititems(lambda _, item: found.append(item))
    return found


def test_what_is_left_of_a_journal_is_said(run):
    write_journal(run, 5)
    with contextlib.closing(sqlite3.connect(journal_path(run))) as db, db:
        db.execute(
            "UPDATE block SET data = zeroblob(length(data)) "
            "WHERE generation = 3 AND path = '/evaluations/design'"
        )
    said = r"/evaluations/design does not match.*The first 3 of 5 generations are intact"
    for use in (open_run, lambda run: reopen(run, {})):
        with pytest.raises(ArchiveDamagedError, match=said):
            use(run)


@pytest.mark.parametrize(
    "change",
    [
        "DELETE FROM block WHERE generation = 4",
        "DELETE FROM block WHERE path = '/generations/hypervolume'",
        "UPDATE seal SET generations = 4, evaluations = 48",
        "UPDATE block SET generation = generation - 5 WHERE generation < 2; "
        "UPDATE block SET generation = -4 - generation WHERE generation < 0",
        "UPDATE seal SET ending = 'finished'",
        "DELETE FROM seal",
        "DELETE FROM state WHERE path LIKE '%X'",
        "UPDATE session SET record = '{}'",
        "DROP TABLE state",
    ],
)
def test_rows_lost_moved_or_changed_are_found(run, change):
    """Each row alone is sound here; the chain and the seal find it."""
    write_journal(run, 5)
    with contextlib.closing(sqlite3.connect(journal_path(run))) as db, db:
        db.executescript(change)
    for use in (open_run, lambda run: reopen(run, {})):
        with pytest.raises(ArchiveDamagedError):
            use(run)


def test_a_generation_of_another_run_is_found(run, tmp_path):
    """Sound in itself and in its place; only the chain knows that it is not this run's."""
    write_journal(run, 5)
    other = tmp_path / "other.h5"
    with Journal.create(other, make_header()) as journal:
        for generation in range(5):
            journal.append(make_record(generation, hypervolume=0.25))
    with contextlib.closing(sqlite3.connect(journal_path(run))) as db:
        db.execute("ATTACH ? AS other", (str(journal_path(other)),))
        db.execute("DELETE FROM block WHERE generation = 2")
        db.execute("INSERT INTO block SELECT * FROM other.block WHERE generation = 2")
        db.commit()
    with pytest.raises(ArchiveDamagedError, match="its generations do not match its seal"):
        open_run(run)


def test_a_dataset_lost_is_found(run, whole):
    run.write_bytes(whole["run.h5"])
    with h5py.File(run, "r+") as file:
        del file["evaluations/margins"]
    with pytest.raises(ArchiveDamagedError):
        open_run(run)


def test_an_older_archive_beside_a_damaged_journal_is_named(run):
    write_journal(run, 2)
    with reopen(run, {}) as journal:
        stop(journal)
    with reopen(run, {}) as journal:
        journal.append(make_record(2))
    journal_path(run).write_bytes(journal_path(run).read_bytes()[:9000])
    with pytest.raises(ArchiveDamagedError, match=r"run\.h5 holds 2 generations, intact"):
        open_run(run)
    with open_finished(run) as opened:
        assert opened.generations == 2


def test_objects_in_an_archive_are_never_read(run, whole):
    """A dataset of a type that can hold objects is refused, however well it is sealed."""
    run.write_bytes(whole["run.h5"])
    with h5py.File(run, "r+") as file:
        del file["study/name"]
        file.create_dataset("study/name", data="x", dtype=h5py.string_dtype())
        file["study/name"].attrs[DIGEST] = "0" * 64
        file.attrs[DIGEST] = manifest_digest(file)
    with pytest.raises(ArchiveDamagedError, match="/study/name"):
        open_run(run)


def test_objects_in_a_journal_are_never_read(run):
    write_journal(run, 1)
    with contextlib.closing(sqlite3.connect(journal_path(run))) as db, db:
        db.execute("UPDATE state SET dtype = '|O'")
    with pytest.raises(ArchiveDamagedError, match="numbers and texts only"):
        open_run(run)
