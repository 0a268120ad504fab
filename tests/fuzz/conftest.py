"""The command in this process, given one text after another."""

import importlib
import sys
import time
from collections import Counter
from dataclasses import dataclass, field
from functools import partial
from pathlib import Path
from types import SimpleNamespace

import pytest

from optim.cli import app
from optim.problem.reachable import reachable

# Test modules are no packages: what they share is found by its folder.
sys.path.insert(0, str(Path(__file__).parent))


@dataclass
class Tried:
    """How the command ended for each kind of text, and the longest it took, processor time [s]."""

    endings: Counter = field(default_factory=Counter)
    slowest: tuple[float, str] = (0.0, "")
    memory: int = 0

    def add(self, kind, code, seconds, what):
        self.endings[kind, code] += 1
        self.slowest = max(self.slowest, (seconds, what))


@pytest.fixture
def tried():
    return Tried()


@pytest.fixture
def typed(capsys, monkeypatch, tmp_path):
    """Return what runs a command line in an empty folder: code, streams, processor time."""
    monkeypatch.chdir(tmp_path)
    # What a valid study comes to is looked at elsewhere and takes seconds.
    monkeypatch.setattr("optim.report.preview.reachable", partial(reachable, designs=2))

    def command(*words):
        capsys.readouterr()
        began = time.process_time()
        code = app.run(words)
        seconds = time.process_time() - began
        streams = capsys.readouterr()
        return SimpleNamespace(code=code, out=streams.out, err=streams.err, seconds=seconds)

    return command


@pytest.fixture
def closed_form(monkeypatch):
    """Let analyses fly closed-form flows: the files are tried here, not the solver."""
    importable = str(Path(__file__).parents[1] / "report" / "importable")
    monkeypatch.syspath_prepend(importable)
    flows = importlib.import_module("recorded_run").ClosedForm
    evaluator = SimpleNamespace(SectionEvaluator=flows)
    monkeypatch.setitem(sys.modules, "optim.aerodynamics.evaluator", evaluator)
    monkeypatch.setattr("optim.cli.sections.prepare_kernels", lambda: None)
