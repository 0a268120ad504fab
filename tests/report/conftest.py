"""A small run of closed-form flows, for whatever shows an archive."""

import importlib
from pathlib import Path

import pytest

from optim.archive.reader import open_run

IMPORTABLE = Path(__file__).parent / "importable"

collect_ignore = [IMPORTABLE.name]


@pytest.fixture(scope="session")
def recorded_run():
    """Return the module of the small run."""
    with pytest.MonkeyPatch.context() as patch:
        patch.syspath_prepend(str(IMPORTABLE))
        return importlib.import_module("recorded_run")


@pytest.fixture(scope="session")
def run_file(recorded_run, tmp_path_factory):
    """RUN.h5 of the small run."""
    return recorded_run.record(tmp_path_factory.mktemp("run") / "paper-plane.h5")


@pytest.fixture
def run(run_file):
    """The small run, open."""
    with open_run(run_file) as opened:
        yield opened


@pytest.fixture(scope="session")
def recorder(recorded_run):
    """Return what records a run of another study."""
    return recorded_run.record


@pytest.fixture(scope="session")
def closed_form(recorded_run):
    """Return the class of the closed-form flows."""
    return recorded_run.ClosedForm


@pytest.fixture(scope="session")
def study_text(recorded_run):
    """Return the text of the run's study."""
    return recorded_run.STUDY
