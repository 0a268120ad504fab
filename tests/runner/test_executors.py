"""Tasks, environment and the stop request, without a process."""

import os
import signal
import sys
import threading

import pytest
from hypothesis import given
from hypothesis import strategies as st

from optim.runner.executors import (
    MOST_DESIGNS_A_TASK,
    THREADS,
    Workers,
    one_thread,
    processors,
    tasks,
)
from optim.runner.interrupt import StopRequest, StopRequestedError
from optim.runner.worker import Blueprint


@given(count=st.integers(0, 500), workers=st.integers(1, 32))
def test_tasks_hold_every_design_once_and_end_singly(count, workers):
    made = tasks(count, workers)
    assert [i for task in made for i in task] == list(range(count))
    sizes = [len(task) for task in made]
    assert sizes == sorted(sizes, reverse=True)
    assert max(sizes, default=1) <= MOST_DESIGNS_A_TASK
    assert sizes[-workers:] == [1] * min(count, workers)


def test_tasks_of_a_usual_generation_are_worth_sending():
    assert len(tasks(80, 2)) < 40


def test_environment_is_given_back(monkeypatch):
    monkeypatch.setenv(THREADS[0], "7")
    monkeypatch.delenv(THREADS[1], raising=False)
    with one_thread():
        assert all(os.environ[name] == "1" for name in THREADS)
    assert os.environ[THREADS[0]] == "7"
    assert THREADS[1] not in os.environ


def test_workers_have_one_thread_and_few_modules(analytic):
    """Asked of a worker itself; the parent's environment and main module stay as they are."""
    main, before = sys.modules["__main__"], [os.environ.get(name) for name in THREADS]
    blueprint = Blueprint(analytic.build_reporting, analytic.STUDY)
    with Workers(blueprint, 1, StopRequest()) as workers:
        threads, too_much, signal_ignored = workers.reference_point
    assert threads == 4.0
    assert too_much == 0.0
    assert signal_ignored == 1.0
    assert sys.modules["__main__"] is main
    assert [os.environ.get(name) for name in THREADS] == before
    assert signal.SIGINT not in signal.pthread_sigmask(signal.SIG_BLOCK, ())


def test_processors_are_those_this_process_may_use():
    assert 1 <= processors() <= (os.cpu_count() or 1)


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_stop_request_notes_a_signal_once_and_gives_it_back(number):
    before = signal.getsignal(number)
    with StopRequest() as stop:
        stop.check()
        assert not stop.requested
        signal.raise_signal(number)
        assert stop.requested
        assert signal.getsignal(number) is before
        with pytest.raises(StopRequestedError):
            stop.check()
    assert signal.getsignal(number) is before


def test_stop_request_in_another_thread_listens_to_nothing():
    before = signal.getsignal(signal.SIGINT)

    def listen():
        with StopRequest() as stop:
            found.append((stop.requested, signal.getsignal(signal.SIGINT)))

    found = []
    thread = threading.Thread(target=listen)
    thread.start()
    thread.join()
    assert found == [(False, before)]
