"""The progress of a run on standard error: a live bar on a terminal, else one line a generation."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass

from rich.console import Console, Group
from rich.live import Live
from rich.progress import BarColumn, MofNCompleteColumn, Progress, TaskID, TextColumn
from rich.text import Text

from optim.cli.console import duration, failures, prepare_kernels, say
from optim.runner.events import (
    Event,
    GenerationDone,
    Listener,
    RunEnded,
    SessionBegan,
    WorkersStarting,
    ignore,
)


@contextmanager
def progress(*, quiet: bool = False) -> Iterator[Listener]:
    """Yield a listener that shows what a run tells.

    Parameters
    ----------
    quiet : bool
        Show nothing.
    """
    if quiet:
        yield ignore
    elif sys.stderr.isatty():
        with _LiveBar.make() as bar:
            yield bar.hear
    else:
        yield tell


def tell(event: Event) -> None:
    """Write an event as one plain line to standard error."""
    match event:
        case WorkersStarting():
            prepare_kernels()
            say(f"starting {_workers(event.workers)} ...")
        case SessionBegan():
            say(_began(event))
        case GenerationDone():
            say(f"generation {event.generation}: {_state(event)}")
        case RunEnded():
            pass


def _began(event: SessionBegan) -> str:
    before = f", going on after generation {event.generations_done}"
    return (
        f"{event.study}: {event.population} designs a generation, {_workers(event.workers)}"
        f"{before if event.generations_done else ''}; writing {event.run}"
    )


def _workers(count: int) -> str:
    return f"{count} worker process{'es' if count > 1 else ''}"


def _state(event: GenerationDone) -> str:
    parts = [
        f"{event.evaluations} designs",
        f"{event.points_per_second:.0f} points/s",
        failures(dict(event.failures)),
        f"{100.0 * event.feasible_share:.0f} % feasible",
        f"hypervolume {event.hypervolume:.6g}",
    ]
    if event.remaining is not None:
        parts.append(f"at most {duration(event.remaining)} left")
    return ", ".join(parts)


@dataclass
class _LiveBar:
    """A bar of generations, and under it the state of the run in words."""

    bar: Progress
    generations: TaskID
    state: Text
    live: Live

    @classmethod
    @contextmanager
    def make(cls) -> Iterator[_LiveBar]:
        """Yield a bar that is on the screen."""
        bar = Progress(TextColumn("{task.description}"), BarColumn(), MofNCompleteColumn())
        state = Text()
        with Live(Group(bar, state), console=Console(stderr=True)) as live:
            yield cls(bar, bar.add_task("generations", total=None), state, live)

    def hear(self, event: Event) -> None:
        """Show an event."""
        match event:
            case WorkersStarting():
                prepare_kernels()
                self.state.plain = f"starting {_workers(event.workers)} ..."
            case SessionBegan():
                self.state.plain = ""
                self.live.console.print(_began(event), highlight=False, markup=False)
                done, total = event.generations_done, event.generations
                self.bar.update(self.generations, total=total, completed=done)
            case GenerationDone():
                self.state.plain = _state(event)
                self.bar.update(self.generations, completed=event.generation)
            case RunEnded():
                pass
