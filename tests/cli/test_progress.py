"""What a run says while it goes on."""

import io
from pathlib import Path

import pytest

from optim.cli import console, progress
from optim.runner.events import GenerationDone, RunEnded, SessionBegan, WorkersStarting
from optim.search.termination import Ending

EVENTS = (
    WorkersStarting(2),
    SessionBegan(Path("results/kite.h5"), "kite", 2, 0, 64, 40),
    GenerationDone(
        generation=12,
        evaluations=768,
        points_per_second=412.4,
        failures={"not_converged": 7, "local_sonic": 2},
        feasible_share=0.834,
        feasible_now=0.9,
        hypervolume=1.23456,
        elapsed=400.0,
        remaining=200.0,
    ),
    RunEnded(Path("results/kite.h5"), Ending.GENERATIONS),
)

PARTS = (
    "768 designs",
    "412 points/s",
    "9 failed (7 not_converged, 2 local_sonic)",
    "83 % feasible",
    "hypervolume 1.23456",
    "at most 3 min 20 s left",
)


class Terminal(io.StringIO):
    """A standard error that is a terminal."""

    def isatty(self):
        return True


@pytest.fixture(autouse=True)
def _kernels_are_there(monkeypatch):
    monkeypatch.setattr(progress, "prepare_kernels", lambda: None)


def test_one_plain_line_a_generation_where_there_is_no_terminal(capsys):
    with progress.progress() as listener:
        for event in EVENTS:
            listener(event)
    streams = capsys.readouterr()
    lines = streams.err.splitlines()
    assert streams.out == ""
    assert len(lines) == 3
    assert lines[0] == "starting 2 worker processes ..."
    assert lines[1] == (
        "kite: 64 designs a generation, 2 worker processes; writing results/kite.h5"
    )
    assert lines[2] == "generation 12: " + ", ".join(PARTS)


def test_terminal_shows_a_bar_and_the_same_words(monkeypatch, capsys):
    terminal = Terminal()
    monkeypatch.setattr("sys.stderr", terminal)
    monkeypatch.setenv("COLUMNS", "200")
    monkeypatch.setenv("TERM", "xterm")
    with progress.progress() as listener:
        for event in EVENTS:
            listener(event)
    shown = terminal.getvalue()
    assert capsys.readouterr().out == ""
    assert "12/40" in shown
    for part in PARTS:
        assert part in shown


def test_quiet_says_nothing(capsys):
    with progress.progress(quiet=True) as listener:
        for event in EVENTS:
            listener(event)
    assert capsys.readouterr().err == ""


def test_resumed_run_says_where_it_goes_on(capsys):
    progress.tell(SessionBegan(Path("kite.h5"), "kite", 1, 12, 64, None))
    assert capsys.readouterr().err == (
        "kite: 64 designs a generation, 1 worker process, going on after generation 12; "
        "writing kite.h5\n"
    )


def test_compiling_is_said_once_an_installation(monkeypatch, capsys, tmp_path):
    monkeypatch.setattr("optim.aerodynamics.kernels.cache_folder", lambda: tmp_path)
    console.prepare_kernels()
    assert "compiling the flow kernels, once per installation" in capsys.readouterr().err
    (tmp_path / "deep").mkdir()
    (tmp_path / "deep" / "laminar.nbi").touch()
    console.prepare_kernels()
    assert capsys.readouterr().err == ""
