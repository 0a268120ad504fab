"""What runs inside a worker process: build the problem once, then evaluate what is sent.

A worker imports the evaluator and the study's language and nothing else, so that many fit into
memory. It leaves Ctrl-C to its parent, and it never outlives it: a worker waits for tasks on a
pipe that its brothers keep open, so a parent that was killed would leave it waiting for ever.
"""

from __future__ import annotations

import os
import signal
import threading
from collections.abc import Callable
from dataclasses import dataclass
from multiprocessing import parent_process
from multiprocessing.connection import wait
from typing import TypeAlias

import numpy as np

from optim.arrays import FloatArray
from optim.errors import Fault, InputError
from optim.problem.evaluation import Evaluation
from optim.problem.problem import Problem
from optim.study.load import parse_study

LEFT_TO_PARENT = (signal.SIGINT,)
"""Signals of the terminal that reach every process of a run and are meant for one."""

BuildProblem: TypeAlias = Callable[[str], Problem]
"""Resolved text of a study -> its problem; a function of a module, so that it can be sent."""


def problem_of_text(text: str) -> Problem:
    """Return the problem of a study's resolved text, which needs no other file."""
    return Problem.from_study(parse_study(text))


@dataclass(frozen=True)
class Blueprint:
    """How any process builds the same problem.

    Attributes
    ----------
    build : callable
        A function of a module that a new process can import.
    text : str
        The study, resolved.
    """

    build: BuildProblem
    text: str


@dataclass(frozen=True)
class Ready:
    """A worker's first answer.

    Attributes
    ----------
    reference_point : (n_objectives,) array
        As the problem states it; empty if there are faults.
    faults : tuple of Fault
        What is wrong with the study, as values, for an exception of ours loses them on the way
        between processes.
    """

    reference_point: FloatArray
    faults: tuple[Fault, ...] = ()


_built: list[Problem] = []
"""The problem of this process, once it is built."""


def begin() -> None:
    """Prepare a new worker process: leave Ctrl-C to the parent, and leave with the parent."""
    for number in LEFT_TO_PARENT:
        signal.signal(number, signal.SIG_IGN)
    signal.pthread_sigmask(signal.SIG_UNBLOCK, LEFT_TO_PARENT)
    threading.Thread(target=_leave_with_parent, daemon=True).start()


def build(blueprint: Blueprint) -> Ready:
    """Build the problem, and load or compile the kernels by evaluating the baseline.

    Parameters
    ----------
    blueprint : Blueprint
        How.

    Returns
    -------
    Ready
        The reference point, or what is wrong with the study.
    """
    try:
        problem = blueprint.build(blueprint.text)
        reference = problem.reference_point
        problem.evaluate(problem.baseline_design)
    except InputError as error:
        return Ready(np.empty(0), error.faults)
    _built[:] = [problem]
    return Ready(reference)


def evaluate(designs: FloatArray) -> list[Evaluation]:
    """Evaluate designs, (n, n_variables), in their order."""
    (problem,) = _built
    return [problem.evaluate(design) for design in designs]


def _leave_with_parent() -> None:
    parent = parent_process()
    if parent is not None:
        wait([parent.sentinel])
    os._exit(1)
