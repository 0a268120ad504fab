"""Memory does not grow with the run."""

import tracemalloc

import pytest
from archive_sample import make_header, make_record

from optim.archive.journal import Journal
from optim.archive.reader import open_run
from optim.archive.writer import finish

POPULATION = 100
EVALUATIONS = 10_000
BOUND = 800_000
"""Bytes. The run below is some 3 MB of numbers, 30 kB a generation."""


def peak_of(work) -> int:
    """Return the largest memory that Python and NumPy took while `work` went on [bytes]."""
    tracemalloc.start()
    try:
        work()
        return tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()


@pytest.fixture
def written(run):
    """Ten thousand evaluations, archived, and the peaks on the way."""
    journal = Journal.create(run, make_header())

    def record():
        for generation in range(EVALUATIONS // POPULATION):
            journal.append(make_record(generation, POPULATION))

    peaks = {"record": peak_of(record), "archive": peak_of(lambda: finish(journal))}
    return run, peaks


def test_ten_thousand_evaluations_are_written_and_read_in_little_memory(written):
    run, peaks = written

    def read():
        with open_run(run) as opened:
            for block in opened.blocks("designs", "quantities", "margins", rows=500):
                assert len(block) == 3
            opened.status()

    peaks["read"] = peak_of(read)
    assert run.stat().st_size > BOUND
    assert max(peaks.values()) < BOUND, peaks
