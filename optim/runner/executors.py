"""Worker processes on this machine: designs in, evaluations out, placed by index.

Each worker is a pool of one spawned process, and has one task at a time. So a process that dies
names the designs it died with, the others go on, and whatever the number of workers the results
are the same. Tasks hold several designs at the start of a generation and one at its end, so that
nobody waits long for the slowest.
"""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import signal
import sys
from collections import Counter, deque
from collections.abc import Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from types import ModuleType
from typing import Self

from optim.arrays import FloatArray
from optim.errors import StoppedEarlyError, StudyError
from optim.problem.evaluation import Evaluation
from optim.runner import worker
from optim.runner.interrupt import StopRequest
from optim.runner.worker import Blueprint, Ready

THREADS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "NUMBA_NUM_THREADS")
"""How many threads the libraries start; one in a worker, because the processes are the
parallelism and the last bit of a sum may depend on threads."""

MOST_DESIGNS_A_TASK = 8
"""Enough that sending costs nothing beside evaluating (measured)."""

TASKS_AHEAD = 4
"""A task holds at most the waiting designs over this many times the workers (rule of thumb)."""

DEATHS = 2
"""A design that its process died with this often, alone, is given up."""

PATIENCE = 0.1
"""How often the loop asks whether to stop while it waits [s]."""


def processors() -> int:
    """Return how many processors this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


@contextlib.contextmanager
def one_thread() -> Iterator[None]:
    """Set the environment of the workers."""
    before = {name: os.environ.get(name) for name in THREADS}
    os.environ.update(dict.fromkeys(THREADS, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value


@contextlib.contextmanager
def _spawning() -> Iterator[None]:
    """Keep from a process started inside what is the parent's own: its main module and Ctrl-C.

    A spawned process imports its parent's main module again. Nothing of ours is in there, so
    that would only cost memory, and run a user's unguarded script a second time.
    """
    main = sys.modules["__main__"]
    sys.modules["__main__"] = ModuleType("__main__")
    signal.pthread_sigmask(signal.SIG_BLOCK, worker.LEFT_TO_PARENT)
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_UNBLOCK, worker.LEFT_TO_PARENT)
        sys.modules["__main__"] = main


def tasks(count: int, workers: int) -> deque[range]:
    """Return the designs of each task: runs of indices that become shorter towards the end.

    Parameters
    ----------
    count, workers : int
        Designs and processes.
    """
    made: deque[range] = deque()
    start = 0
    while start < count:
        share = (count - start) // (TASKS_AHEAD * workers)
        stop = min(count, start + max(1, min(MOST_DESIGNS_A_TASK, share)))
        made.append(range(start, stop))
        start = stop
    return made


class _Worker:
    """One spawned process, with the problem built in it."""

    def __init__(self, blueprint: Blueprint) -> None:
        self._blueprint = blueprint
        self.restart()

    def restart(self) -> None:
        """Start the process (again)."""
        self._pool = ProcessPoolExecutor(
            max_workers=1,
            mp_context=multiprocessing.get_context("spawn"),
            initializer=worker.begin,
        )
        with one_thread(), _spawning():  # the process starts with its first task
            self._process = self._pool.submit(os.getpid)
        self._ready = self._pool.submit(worker.build, self._blueprint)

    def ready(self, stop: StopRequest) -> Ready:
        """Wait until the problem is built.

        Raises
        ------
        StudyError
            If the study has faults.
        BrokenProcessPool
            If the process died.
        StopRequestedError
            If the user asked to stop.
        """
        while not wait([self._ready], timeout=PATIENCE).done:
            stop.check()
        answer = self._ready.result()
        if answer.faults:
            raise StudyError(answer.faults)
        return answer

    def submit(self, designs: FloatArray) -> Future[list[Evaluation]]:
        """Send a task; BrokenProcessPool if the process has died since."""
        return self._pool.submit(worker.evaluate, designs)

    def close(self) -> None:
        """End the process at once, whatever it is doing."""
        with contextlib.suppress(BrokenProcessPool, ProcessLookupError):
            self._pool.submit(os.getpid)  # refused if the process has died already
            os.kill(self._process.result(), signal.SIGTERM)
        self._pool.shutdown(cancel_futures=True)


class Workers:
    """The worker processes of a run; a context that starts and ends them.

    Parameters
    ----------
    blueprint : Blueprint
        How each of them builds the problem.
    count : int
        How many, at least 1.
    stop : StopRequest
        Asked while they are waited for.

    Attributes
    ----------
    count : int
        How many.
    reference_point : (n_objectives,) array
        As the first worker found it, on one thread like all else that is recorded.
    """

    reference_point: FloatArray

    def __init__(self, blueprint: Blueprint, count: int, stop: StopRequest) -> None:
        if count < 1:
            raise ValueError(f"workers must be at least 1; found {count}.")
        self._blueprint = blueprint
        self.count = count
        self._stop = stop
        self._workers: list[_Worker] = []

    def __enter__(self) -> Self:
        """Start the first worker, which compiles the kernels if need be, then the others."""
        try:
            self._workers.append(_Worker(self._blueprint))
            self.reference_point = self._settle(self._workers[0]).reference_point
            self._workers += [_Worker(self._blueprint) for _ in range(self.count - 1)]
            for other in self._workers[1:]:
                self._settle(other)
        except BaseException:
            self.close()
            raise
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """End all processes."""
        for one in self._workers:
            one.close()
        self._workers = []

    def evaluate(self, designs: FloatArray) -> list[Evaluation | None]:
        """Evaluate designs.

        Parameters
        ----------
        designs : (n, n_variables) array
            The designs.

        Returns
        -------
        list of Evaluation or None
            In the order of the designs; None for one that `DEATHS` processes died with.

        Raises
        ------
        StopRequestedError
            If the user asked to stop before all were done.
        StoppedEarlyError
            If worker processes cannot be started any more.
        """
        results: list[Evaluation | None] = [None] * len(designs)
        waiting = tasks(len(designs), self.count)
        deaths: Counter[int] = Counter()
        idle = list(self._workers)
        running: dict[Future[list[Evaluation]], tuple[_Worker, range]] = {}
        while waiting or running:
            while waiting and idle:
                one, indices = idle.pop(), waiting.popleft()
                running[self._send(one, designs[indices.start : indices.stop])] = (one, indices)
            self._stop.check()
            done = wait(running, timeout=PATIENCE, return_when=FIRST_COMPLETED).done
            for future in done:
                one, indices = running.pop(future)
                if not self._place(future, indices, results):
                    waiting.extendleft(_once_more(indices, deaths))
                    self._revive(one)
                idle.append(one)
        return results

    def _send(self, one: _Worker, designs: FloatArray) -> Future[list[Evaluation]]:
        try:
            return one.submit(designs)
        except BrokenProcessPool:  # it died while it was idle
            self._revive(one)
            return one.submit(designs)

    def _place(
        self,
        future: Future[list[Evaluation]],
        indices: range,
        results: list[Evaluation | None],
    ) -> bool:
        """Put the results of a task in their places, or return False if its process died."""
        try:
            results[indices.start : indices.stop] = future.result()
        except BrokenProcessPool:
            self._stop.check()  # a signal to all processes ends the workers first
            return False
        return True

    def _revive(self, one: _Worker) -> None:
        one.close()
        one.restart()
        self._settle(one)

    def _settle(self, one: _Worker) -> Ready:
        """Wait until a worker is ready; one that dies on the way has a second try."""
        for _ in range(DEATHS - 1):
            with contextlib.suppress(BrokenProcessPool):
                return one.ready(self._stop)
            one.close()
            one.restart()
        try:
            return one.ready(self._stop)
        except BrokenProcessPool as error:
            raise StoppedEarlyError(
                "The worker processes die while they start (is there memory for one more?); "
                "what is recorded is safe, and the run can be resumed with fewer workers."
            ) from error


def _once_more(indices: Sequence[int], deaths: Counter[int]) -> list[range]:
    """Return the tasks, one design each, that a lost task is tried again as."""
    if len(indices) == 1:  # alone, so it is known which design the process died with
        deaths.update(indices)
    return [range(i, i + 1) for i in reversed(indices) if deaths[i] < DEATHS]
