"""A whole run: the same archive for any number of workers, sittings and deaths."""

import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import moocore
import numpy as np
import pytest

from optim.archive.journal_file import journal_path
from optim.archive.reader import open_run, run_digests
from optim.errors import InputError, StoppedEarlyError, StudyError
from optim.outcomes import Outcome
from optim.runner.events import GenerationDone, RunEnded, SessionBegan, WorkersStarting
from optim.runner.resume import resume_run
from optim.runner.start import SessionSettings, start_run
from optim.search.termination import Ending

ONE, TWO = SessionSettings(workers=1), SessionSettings(workers=2)


@pytest.fixture
def whole(analytic, tmp_path):
    """A finished run of six generations on one worker, with what it told."""
    told = []
    run = tmp_path / "whole.h5"
    ending = start_run(analytic.study(), run, ONE, told.append, analytic.build)
    return run, ending, told


def test_one_and_two_workers_write_the_same(analytic, tmp_path, whole):
    run = tmp_path / "two.h5"
    start_run(analytic.study(), run, TWO, build=analytic.build)
    assert run_digests(run) == run_digests(whole[0])


@pytest.mark.parametrize("algorithm", ["nsga2", "nsga3", "sms-emoa"])
def test_run_in_two_sittings_writes_the_same(analytic, tmp_path, algorithm):
    """A finished run goes on with more generations as if it had been given them at once."""
    study = analytic.study(algorithm=algorithm)
    at_once, in_parts = tmp_path / "at_once.h5", tmp_path / "in_parts.h5"
    start_run(study, at_once, ONE, build=analytic.build)
    start_run(study, in_parts, SessionSettings(1, generations=3), build=analytic.build)
    assert resume_run(in_parts, ONE, build=analytic.build) is Ending.GENERATIONS
    assert run_digests(in_parts) == run_digests(at_once)


def test_the_archive_is_what_was_evaluated(analytic, whole):
    """Every row judged again in this process, and the hypervolumes against moocore's."""
    problem = analytic.build(analytic.STUDY)
    with open_run(whole[0]) as run:
        assert run.state == "finished"
        assert (run.generations, run.evaluations) == (6, 96)
        assert np.array_equal(run.designs[0], problem.baseline_design)
        for row in range(0, 96, 5):
            recorded, again = run.evaluation(row), problem.evaluate(run.designs[row])
            for name in ("objectives", "margins", "quantities", "outcomes", "search_constraints"):
                assert recorded[name].tobytes() == getattr(again, name).tobytes()
            assert recorded["design_outcomes"] == again.design_outcome
            assert recorded["points"] == again.points
        told, feasible = run.read("search_objectives"), run.violation == 0.0
        for generation, found in enumerate(run.read("hypervolume")):
            so_far = (run.read("generation_of") <= generation) & feasible
            expected = moocore.hypervolume(told[so_far], ref=problem.reference_point)
            assert found == pytest.approx(expected, rel=1e-12)


def test_events_tell_the_run(whole):
    run, ending, told = whole
    starting, began, *generations, ended = told
    assert ending is Ending.GENERATIONS
    assert starting == WorkersStarting(1)
    assert began == SessionBegan(run, "paper-kite", 1, 0, 16, 6)
    assert ended == RunEnded(run, Ending.GENERATIONS)
    assert [event.generation for event in generations] == [1, 2, 3, 4, 5, 6]
    assert all(isinstance(event, GenerationDone) for event in generations)
    with open_run(run) as recorded:
        last, status = generations[-1], recorded.status()
        assert last.failures == status.failed
        assert last.feasible_share == status.feasible_share
        assert last.feasible_now == np.mean(recorded.violation[80:] == 0.0)
        assert last.hypervolume == status.hypervolume
        assert last.elapsed == status.elapsed_s
        assert last.evaluations == 96
        assert last.remaining == 0.0
        assert generations[0].remaining == pytest.approx(5.0 * generations[0].elapsed)
        points = recorded.read("points")[80:].sum()
        duration = generations[-1].elapsed - generations[-2].elapsed
        assert last.points_per_second == pytest.approx(points / duration)


def test_resumed_events_count_from_the_record(analytic, tmp_path):
    run, told = tmp_path / "run.h5", []
    start_run(analytic.study(), run, SessionSettings(1, generations=4), build=analytic.build)
    resume_run(run, ONE, told.append, analytic.build)
    assert told[1].generations_done == 4
    assert [event.generation for event in told[2:-1]] == [5, 6]
    with open_run(run) as recorded:
        assert told[-2].failures == recorded.status().failed
        assert told[-2].elapsed == recorded.status().elapsed_s
        assert np.all(np.diff(recorded.read("elapsed")) > 0.0)


@pytest.mark.parametrize(
    ("search", "ending", "generations"),
    [
        ({"generations": 3}, Ending.GENERATIONS, 3),
        ({"generations": "99, evaluations: 40"}, Ending.EVALUATIONS, 3),
        ({"generations": "99, wall_time: 0.000001"}, Ending.WALL_TIME, 1),
        ({"generations": "200, stall: 2"}, Ending.STALLED, None),
    ],
)
def test_limits_of_the_study_end_the_run(analytic, tmp_path, search, ending, generations):
    run = tmp_path / "run.h5"
    assert start_run(analytic.study(**search), run, ONE, build=analytic.build) is ending
    with open_run(run) as recorded:
        assert generations is None or recorded.generations == generations


def test_design_that_always_kills_is_lost_and_the_run_goes_on(analytic, tmp_path):
    """Two workers and one lose the same designs; what is recorded of the others is equal."""
    runs = [tmp_path / "one.h5", tmp_path / "two.h5"]
    study = analytic.study(generations=1)
    for run, settings in zip(runs, (ONE, TWO), strict=True):
        start_run(study, run, settings, build=analytic.build_lethal)
    assert run_digests(runs[0]) == run_digests(runs[1])
    with open_run(runs[0]) as run:
        lost = run.design_outcomes == Outcome.WORKER_LOST
        assert lost.sum() == 2
        assert np.all(run.outcomes[lost] == Outcome.WORKER_LOST)
        assert np.all(np.isnan(run.objectives[lost]))
        assert np.all(run.violation[lost] > 1.0)
        assert np.all(np.isfinite(run.read("search_objectives")))


@pytest.mark.parametrize("settings", [ONE, TWO])
def test_process_that_dies_once_loses_nothing(analytic, tmp_path, whole, monkeypatch, settings):
    mark, run = tmp_path / "mark", tmp_path / "run.h5"
    monkeypatch.setenv(analytic.MARK, str(mark))
    start_run(analytic.study(), run, settings, build=analytic.build_lethal_once)
    assert mark.exists()
    assert run_digests(run) == run_digests(whole[0])


def test_workers_that_die_at_the_start_end_the_run(analytic, tmp_path):
    """Its problem can be built in this process and kills every other."""
    with pytest.raises(StoppedEarlyError, match="die while they start"):
        start_run(analytic.study(), tmp_path / "run.h5", ONE, build=analytic.build_dying_in_worker)
    assert not journal_path(tmp_path / "run.h5").exists()


def test_programming_error_is_raised_and_the_record_is_kept(analytic, tmp_path):
    """A bug is never an outcome; what was recorded before it can be resumed."""
    run = tmp_path / "run.h5"
    start_run(analytic.study(), run, SessionSettings(1, generations=1), build=analytic.build)
    with pytest.raises(ZeroDivisionError, match="planted"):
        resume_run(run, ONE, build=analytic.build_mistaken)
    with open_run(run) as recorded:
        assert recorded.state == "interrupted"
        assert recorded.generations >= 1
    assert resume_run(run, ONE, build=analytic.build) is Ending.GENERATIONS


def test_study_that_cannot_be_flown_has_its_faults(analytic, tmp_path):
    """The baseline has no maximum lift to deduce a reference point from: told by the worker."""
    study = analytic.study(generations=2)
    with pytest.raises(StudyError, match="the baseline has no"):
        start_run(study, tmp_path / "run.h5", ONE, build=analytic.build_failing)
    assert list(tmp_path.iterdir()) == []


def test_run_is_never_overwritten(analytic, whole):
    before = whole[0].read_bytes()
    with pytest.raises(InputError, match="exists already"):
        start_run(analytic.study(), whole[0], ONE, build=analytic.build)
    assert whole[0].read_bytes() == before


def test_no_worker_is_refused(analytic, tmp_path):
    with pytest.raises(ValueError, match="workers must be at least 1"):
        start_run(analytic.study(), tmp_path / "r.h5", SessionSettings(0), build=analytic.build)


def test_unguarded_script_is_not_run_again_by_its_workers(script, tmp_path):
    """A script without the guard that spawned processes otherwise need."""
    user = tmp_path / "user.py"
    user.write_text(
        "import sys\n"
        "from pathlib import Path\n"
        f"sys.path.insert(0, {str(script.parent)!r})\n"
        "import analytic_problem\n"
        "from optim.runner.start import SessionSettings, start_run\n"
        "print('executed')\n"
        "study = analytic_problem.study(generations=1)\n"
        f"run = Path({str(tmp_path / 'run.h5')!r})\n"
        "print(start_run(study, run, SessionSettings(1), build=analytic_problem.build))\n"
    )
    done = subprocess.run([sys.executable, user], capture_output=True, text=True, check=True)
    assert done.stdout == "executed\ngenerations\n"


def begin(script, run, workers=2):
    """Start the script in its own session, as a shell would."""
    return subprocess.Popen(
        [sys.executable, str(script), str(run), str(workers)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )


def generations_of(run):
    try:
        with open_run(run) as opened:
            return opened.generations
    except InputError:
        return 0


def wait_until(condition, seconds=60.0):
    deadline = time.monotonic() + seconds
    while not condition():
        assert time.monotonic() < deadline
        time.sleep(0.02)


def descendants(process):
    """Processes below one (Linux)."""
    children = Path(f"/proc/{process}/task/{process}/children").read_text().split()
    return [int(child) for child in children]


def alive(process):
    """Whether a process exists and is more than a remainder (Linux)."""
    try:
        state = Path(f"/proc/{process}/stat").read_text().rpartition(")")[2].split()[0]
    except FileNotFoundError:
        return False
    return state != "Z"


@pytest.mark.parametrize("kills", [2, pytest.param(5, marks=pytest.mark.slow)])
def test_killed_at_random_moments_and_resumed(analytic, tmp_path, script, kills):
    """The digests of the uninterrupted run, whatever was cut off, and no worker outlives it."""
    moments = random.Random()  # noqa: S311 - the moments are meant to differ from test to test
    whole, killed = tmp_path / "whole.h5", tmp_path / "killed.h5"
    start_run(analytic.study(generations=40), whole, TWO, build=analytic.build)
    reached = []
    for kill in range(kills):
        process = begin(script, killed, workers=1 + kill % 2)
        goal = generations_of(killed) + (moments.random() < 0.8)
        wait_until(lambda goal=goal: generations_of(killed) >= goal)
        time.sleep(moments.uniform(0.0, 0.15))
        below = descendants(process.pid)
        process.send_signal(signal.SIGKILL)
        process.communicate()
        assert process.returncode == -signal.SIGKILL
        wait_until(lambda below=below: not any(alive(child) for child in below), seconds=10.0)
        reached.append(generations_of(killed))
    assert reached == sorted(reached)
    assert 0 < reached[-1] < 40
    last = begin(script, killed)
    _, complaint = last.communicate()
    assert (last.returncode, complaint) == (0, "")
    assert run_digests(killed) == run_digests(whole)


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
@pytest.mark.parametrize("to_all", [False, True])
def test_stop_finishes_the_record(tmp_path, script, number, to_all):
    """Ctrl-C reaches all processes of a terminal, a kill one: both end the run in order."""
    run = tmp_path / "run.h5"
    process = begin(script, run)
    wait_until(lambda: generations_of(run) >= 2)
    below = descendants(process.pid)
    (os.killpg if to_all else os.kill)(process.pid, number)
    words, complaint = process.communicate(timeout=30.0)
    with open_run(run) as recorded:
        done = recorded.generations
        assert recorded.state == "stopped"
    assert process.returncode == 3
    assert words == (
        f"Stopped after generation {done}; everything up to there is recorded. "
        f"Go on with: sectionwright resume {run}\n"
    )
    assert complaint == ""
    assert run.exists()
    wait_until(lambda: not any(alive(child) for child in below), seconds=10.0)


def test_stop_does_not_wait_for_a_flow(analytic, tmp_path, monkeypatch):
    """A worker deep in a flow is ended, not waited for."""
    mark, run = tmp_path / "mark", tmp_path / "run.h5"
    monkeypatch.setenv(analytic.MARK, str(mark))

    def listener(event):
        if isinstance(event, GenerationDone) and event.generation == 2:
            mark.touch()
            signal.raise_signal(signal.SIGINT)

    began = time.monotonic()
    before = signal.getsignal(signal.SIGINT)
    with pytest.raises(StoppedEarlyError, match="after generation 2"):
        start_run(analytic.study(), run, TWO, listener, analytic.build_endless)
    assert time.monotonic() - began < 60.0
    assert signal.getsignal(signal.SIGINT) is before
    mark.unlink()
    assert resume_run(run, ONE, build=analytic.build_endless) is Ending.GENERATIONS
