"""The command as a person types it, and a small run of closed-form flows to type it about."""

import importlib
import os
import subprocess
import sys
from pathlib import Path
from types import SimpleNamespace

import pytest

from optim.cli import app

IMPORTABLE = Path(__file__).parents[1] / "report" / "importable"


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
def closed_form(recorded_run, monkeypatch):
    """Let analyses fly the closed-form flows; return their class."""
    flows = recorded_run.ClosedForm
    evaluator = SimpleNamespace(SectionEvaluator=flows)
    monkeypatch.setitem(sys.modules, "optim.aerodynamics.evaluator", evaluator)
    monkeypatch.setattr("optim.cli.sections.prepare_kernels", lambda: None)
    return flows


@pytest.fixture
def command(capsys):
    """Return what runs a command line in this process: code, standard output, standard error."""

    def typed(*words):
        capsys.readouterr()
        code = app.run([str(word) for word in words])
        streams = capsys.readouterr()
        return SimpleNamespace(code=code, out=streams.out, err=streams.err)

    return typed


@pytest.fixture
def process(tmp_path):
    """Return what runs a command line in a process of its own, in an empty folder."""

    def typed(*words, program=("-m", "optim"), **changes):
        return subprocess.run(
            [sys.executable, *program, *[str(word) for word in words]],
            cwd=changes.pop("cwd", tmp_path),
            capture_output=True,
            text=True,
            check=False,
            timeout=120,
            env={**os.environ, "PYTHONPATH": str(Path(app.__file__).parents[2])},
            **changes,
        )

    return typed
