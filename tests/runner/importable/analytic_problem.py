"""A study whose flows are closed forms of the section, for checks of the machinery alone.

It lies in a folder of its own that the tests put on the path, because a spawned worker has to be
able to import what builds its problem.
"""

import hashlib
import multiprocessing
import os
import signal
import sys
import time
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import ClassVar

import numpy as np

from optim.aerodynamics.operating_point import SectionFlow
from optim.geometry.spacing import panel_nodes
from optim.outcomes import Outcome
from optim.problem.problem import Problem
from optim.runner.executors import THREADS
from optim.study.load import parse_study

STUDY = """
study: paper-kite
section:
  shape: cst
  coefficients: {upper: 4, lower: 4}
  baseline: naca:2412
  freedom: 0.15
  trailing_edge: 0.2 %
chord: 0.2
air: {altitude: 0.0}
conditions:
  survey: {speed: 20.0, lift: 0.5}
  loiter: {speed: 15.0, lift: 0.8}
  slow: {speed: 12.0, lift: maximum}
objectives:
  - {maximise: lift_to_drag, at: survey}
  - {minimise: nose_down_moment, at: loiter}
constraints:
  - {quantity: thickness, min: 9 %}
  - {quantity: cl_max, condition: slow, min: 1.3}
search: {algorithm: nsga3, population: 16, generations: 6, seed: 3}
"""

MARK = "PAPER_KITE_MARK"
"""Environment variable with a file that says that something has happened once."""

SECONDS_A_SECTION = 0.004
SPARED_LOT = 83
NOT_FOR_WORKERS = ("pymoo", "h5py", "sqlite3", "matplotlib", "typer", "rich", "pytest")


@dataclass(frozen=True)
class ClosedForm:
    """Flows that are smooth functions of a section's thickness and camber; one in seven fails.

    The baseline is spared from everything that befalls sections here.
    """

    nodes: np.ndarray
    spared: bytes
    solves: ClassVar[int] = 3

    @property
    def lot(self):
        """A number from 0 to 83 that is as good as random and belongs to the section."""
        if self.nodes.tobytes() == self.spared:
            return SPARED_LOT
        return hashlib.sha256(self.nodes.tobytes()).digest()[0] % 84

    def flows(self, points):
        thickness, camber = np.ptp(self.nodes[:, 1]), self.nodes[:, 1].mean()
        return [self._flow(p, p.cl, thickness, camber) for p in points]

    def maximum_lift(self, point):
        thickness, camber = np.ptp(self.nodes[:, 1]), self.nodes[:, 1].mean()
        return self._flow(point, 1.0 + 3.0 * thickness + 8.0 * camber, thickness, camber)

    def _flow(self, point, cl, thickness, camber):
        if self.lot % 7 == 0:
            return SectionFlow(
                point, Outcome.NOT_CONVERGED, len(self.nodes) - 1, iterations=40, residual=1e-3
            )
        return SectionFlow(
            point,
            Outcome.CONVERGED,
            len(self.nodes) - 1,
            alpha=float(cl / 6.3 - 3.0 * camber),
            cl=float(cl),
            cd=float(0.004 + 0.02 * thickness + 0.01 * (cl - 20.0 * camber) ** 2),
            cm_quarter=float(-2.0 * camber - 0.1 * thickness),
            iterations=5,
            residual=1e-9,
        )


class Slow(ClosedForm):
    """Takes as long as a short flow."""

    def flows(self, points):
        time.sleep(SECONDS_A_SECTION)
        return super().flows(points)


class Lethal(ClosedForm):
    """Kills its process on thick sections, every time: two of the first generation."""

    def flows(self, points):
        if np.ptp(self.nodes[:, 1]) > 0.157:
            os.kill(os.getpid(), signal.SIGKILL)
        return super().flows(points)


class LethalOnce(ClosedForm):
    """Kills its process on one of the first sections after the mark is named, and never again."""

    def flows(self, points):
        mark = Path(os.environ[MARK])
        if self.lot < 40 and not mark.exists():
            mark.touch()
            os.kill(os.getpid(), signal.SIGKILL)
        return super().flows(points)


class Mistaken(ClosedForm):
    """Has a programming error that some sections meet."""

    def flows(self, points):
        if 20 <= self.lot < 30:
            raise ZeroDivisionError("planted")
        return super().flows(points)


class Endless(ClosedForm):
    """Never comes back from a section of its own accord, once the mark is there."""

    def flows(self, points):
        if Path(os.environ[MARK]).exists():
            time.sleep(600.0)
        return super().flows(points)


def study(**search):
    """Return the study with other settings of its search."""
    text = STUDY
    for name, value in search.items():
        head, _, tail = text.partition(f"{name}: ")
        text = f"{head}{name}: {value}{tail[min(tail.find(c) for c in ',}' if c in tail) :]}"
    return parse_study(text)


def _problem(text, solver):
    problem = Problem.from_study(parse_study(text))
    baseline = panel_nodes(problem.section(problem.baseline_design), problem.panels)
    return replace(problem, solver=partial(solver, spared=baseline.tobytes()))


def build(text):
    return _problem(text, ClosedForm)


def build_slow(text):
    return _problem(text, Slow)


def build_lethal(text):
    return _problem(text, Lethal)


def build_lethal_once(text):
    return _problem(text, LethalOnce)


def build_mistaken(text):
    return _problem(text, Mistaken)


def build_endless(text):
    return _problem(text, Endless)


def build_dying_in_worker(text):
    """Build the problem in the parent and die in a worker while building it."""
    if multiprocessing.parent_process() is not None:
        os.kill(os.getpid(), signal.SIGKILL)
    return build(text)


class Hopeless(ClosedForm):
    """Never converges."""

    @property
    def lot(self):
        return 0


def build_failing(text):
    return _problem(text, Hopeless)


@dataclass(frozen=True)
class Reporting:
    """Says in place of its reference point how its process is set."""

    problem: Problem

    @property
    def reference_point(self):
        threads = sum(os.environ.get(name) == "1" for name in THREADS)
        imported = any(name in sys.modules for name in NOT_FOR_WORKERS)
        ignored = signal.getsignal(signal.SIGINT) is signal.SIG_IGN
        return np.array([threads, imported, ignored], dtype=float)

    def __getattr__(self, name):
        return getattr(self.problem, name)


def build_reporting(text):
    return Reporting(build(text))
