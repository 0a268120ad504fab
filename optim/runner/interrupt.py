"""Ctrl-C and SIGTERM as a question that the loop asks, never an exception in mid-transaction."""

from __future__ import annotations

import signal
import threading
from types import FrameType
from typing import Self

SIGNALS = (signal.SIGINT, signal.SIGTERM)


class StopRequestedError(Exception):
    """The user asked to stop while designs were being evaluated; caught by the runner itself."""


class StopRequest:
    """Whether the user asked to stop; a context that listens for the signals.

    The first signal is noted and gives the signals back, so that a second one acts at once, as
    if nobody listened. Outside the main thread no signal can be caught and none is.
    """

    def __init__(self) -> None:
        self._requested = False
        self._previous: dict[int, object] = {}

    @property
    def requested(self) -> bool:
        """Whether to stop."""
        return self._requested

    def check(self) -> None:
        """Raise StopRequestedError if the user asked to stop."""
        if self._requested:
            raise StopRequestedError

    def __enter__(self) -> Self:
        if threading.current_thread() is threading.main_thread():
            self._previous = {number: signal.signal(number, self._note) for number in SIGNALS}
        return self

    def __exit__(self, *_: object) -> None:
        self._give_back()

    def _note(self, _number: int, _frame: FrameType | None) -> None:
        self._requested = True
        self._give_back()

    def _give_back(self) -> None:
        for number, handler in self._previous.items():
            signal.signal(number, handler)  # type: ignore[arg-type]
        self._previous = {}
