"""Equal runs have equal digests, whatever happened on the way; unequal ones have not."""

import hashlib

import h5py
import numpy as np
import pytest
from archive_sample import make_header, make_record, write_journal

from optim.archive.digest import RowDigest, array_digest
from optim.archive.journal import Journal
from optim.archive.layout import FIXED, depends_on_clock
from optim.archive.reader import equality_digest, open_run, run_digests
from optim.archive.reopen import reopen
from optim.archive.writer import finish, stop


def write_run(run, generations, header=None, **changes):
    """Write a run from beginning to end in one session."""
    with Journal.create(run, header or make_header()) as journal:
        for generation in range(generations):
            journal.append(make_record(generation, **changes))
        finish(journal)
    return run


def test_stopped_resumed_finished_and_extended_equals_uninterrupted(tmp_path):
    whole = write_run(tmp_path / "whole.h5", 9)
    pieces = tmp_path / "pieces.h5"
    write_journal(pieces, 2)
    for until, ending in ((4, stop), (6, finish), (9, finish)):
        with reopen(pieces, {}) as journal:
            for generation in range(journal.generations, until):
                journal.append(make_record(generation))
            ending(journal)
        assert run_digests(pieces).keys() == run_digests(whole).keys()
    assert run_digests(pieces) == run_digests(whole)
    assert equality_digest(pieces) == equality_digest(whole)


def test_clock_and_machine_do_not_count(tmp_path):
    slow = {"seconds": np.full(12, 9.0), "elapsed": 99.0}
    a = write_run(tmp_path / "a.h5", 2)
    b = write_run(tmp_path / "b.h5", 2, make_header(provenance={"host": "other"}), **slow)
    assert run_digests(a) == run_digests(b)
    with open_run(a) as one, open_run(b) as other:
        assert one.read("seconds").tolist() != other.read("seconds").tolist()


@pytest.mark.parametrize(
    ("header", "record", "place"),
    [
        ({"seed": 8}, {}, "/search/seed"),
        ({"study_text": "study: x"}, {}, "/study/text"),
        ({}, {"hypervolume": 1.0 + 2.0**-52}, "/generations/hypervolume"),
        ({}, {"points": np.arange(12)}, "/evaluations/points"),
        ({}, {"state_json": "{}"}, "/state/json"),
    ],
)
def test_a_difference_is_seen_and_named(tmp_path, header, record, place):
    a = run_digests(write_run(tmp_path / "a.h5", 2, hypervolume=1.0))
    b = run_digests(
        write_run(tmp_path / "b.h5", 2, make_header(**header), **{"hypervolume": 1.0, **record})
    )
    assert {path for path in a if a[path] != b[path]} == {place}


def test_every_dataset_but_those_of_the_clock_has_a_digest(run):
    digests = run_digests(write_run(run, 2))
    wanted = {dataset.path for dataset in FIXED if not depends_on_clock(dataset.path)}
    state = {f"/state/arrays/{name}" for name in make_record(1).state_arrays}
    assert digests.keys() == wanted | state


def test_the_digests_of_a_live_run_are_those_of_its_archive(run):
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0))
        live = run_digests(run)
        finish(journal)
    assert run_digests(run) == live


def test_a_digest_is_what_the_description_says(run):
    """SHA-256 of the bytes in C order, then type and shape: repeated here with hashlib alone."""
    write_run(run, 3)
    with h5py.File(run) as file:
        for path in ("evaluations/design", "evaluations/outcomes", "variables/name"):
            array = file[path][()]
            said = array.tobytes() + f"{array.dtype.str}{list(array.shape)}".encode()
            assert file[path].attrs["sha256"].decode() == hashlib.sha256(said).hexdigest()


@pytest.mark.parametrize("dtype", ["<f8", "<i8", "i1", "S5", "?"])
def test_a_digest_in_blocks_is_that_of_the_whole(dtype):
    array = np.arange(60).reshape(20, 3).astype(dtype)
    digest = RowDigest()
    for block in np.split(array, [3, 3, 11]):
        digest.update(block)
    assert digest.hexdigest(array.dtype, (3,)) == array_digest(array)
    assert array_digest(array) != array_digest(array.reshape(3, 20))
