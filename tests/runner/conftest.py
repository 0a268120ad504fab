"""The analytic study, importable here and in the workers."""

import importlib
from pathlib import Path

import pytest

IMPORTABLE = Path(__file__).parent / "importable"

collect_ignore = [IMPORTABLE.name]


@pytest.fixture
def analytic(monkeypatch):
    """Return the module of the analytic study; a spawned worker inherits the path."""
    monkeypatch.syspath_prepend(str(IMPORTABLE))
    return importlib.import_module("analytic_problem")


@pytest.fixture
def script():
    return IMPORTABLE / "run_analytic.py"
