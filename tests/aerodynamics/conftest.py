"""Tables of tests/data, sections with exact solutions, and evaluators made once a session."""

import importlib.util
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from optim.aerodynamics.evaluator import SectionEvaluator
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes

HERE = Path(__file__).parent
IMPORTABLE = HERE / "importable"
DATA = HERE.parent / "data"

collect_ignore = [IMPORTABLE.name]


def load(name):
    """A module of importable/, by path: the folder is on nobody's path."""
    spec = importlib.util.spec_from_file_location(name, IMPORTABLE / f"{name}.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def exact_sections():
    """Name -> section with a closed-form flow, and the angles of its table [deg]."""
    return load("conformal").SECTIONS


@pytest.fixture(scope="session")
def table():
    """Columns by name of a file of tests/data; its comment lines say where it is from."""

    @cache
    def read(name, kind=float):
        lines = (DATA / name).read_text(encoding="utf-8").splitlines()
        rows = [line for line in lines if not line.startswith("#")]
        return np.genfromtxt(rows, delimiter=",", names=True, dtype=kind, encoding="utf-8")

    return read


@pytest.fixture(scope="session")
def naca():
    """Return the evaluator of a NACA section on so many panels."""

    @cache
    def make(number, panels=160):
        return SectionEvaluator(panel_nodes(naca_section(number), panels))

    return make


@pytest.fixture(scope="session")
def differences():
    """Slopes of a vector function by central differences, one column a variable."""

    def of(function, x, steps=1e-6):
        x = np.asarray(x, dtype=float)
        steps = np.broadcast_to(steps, x.shape)
        columns = []
        for k, h in enumerate(steps):
            e = np.zeros(len(x))
            e[k] = h
            rise = np.asarray(function(x + e)) - np.asarray(function(x - e))
            columns.append(rise / (2 * h))
        return np.array(columns).T

    return of
