"""How an evaluation can end: one member an ending, one full sentence each."""

from __future__ import annotations

from enum import IntEnum


class Outcome(IntEnum):
    """The ending of an evaluation; the integer is what an archive stores and never changes."""

    CONVERGED = 0
    NOT_CONVERGED = 1
    CLAMP_ACTIVE = 2
    LOCAL_SONIC = 3
    OUT_OF_RANGE = 4
    NO_PEAK = 5
    NOT_A_SECTION = 6
    NOT_EVALUATED = 7
    WORKER_LOST = 8

    @property
    def label(self) -> str:
        """The name used in files and on the screen, such as ``not_converged``."""
        return self.name.lower()

    @property
    def sentence(self) -> str:
        """What happened and what to try."""
        return _SENTENCES[self]


_SENTENCES = {
    Outcome.CONVERGED: "The coupled equations were solved to tolerance.",
    Outcome.NOT_CONVERGED: (
        "The coupled equations were not solved within the iteration budget; "
        "try a smaller angle or lift coefficient, or another panel count."
    ),
    Outcome.CLAMP_ACTIVE: (
        "The iteration ended on a limit of the boundary-layer relations, so its numbers "
        "are not given; the layer is outside what the method describes."
    ),
    Outcome.LOCAL_SONIC: (
        "The flow reaches the speed of sound on the section, where the compressibility "
        "correction ends; lower the Mach number or the lift."
    ),
    Outcome.OUT_OF_RANGE: (
        "The condition lies outside the range of the method; "
        "the lift coefficient asked for may be beyond the stall."
    ),
    Outcome.NO_PEAK: (
        "The sweep ended before the lift passed a maximum, so no maximum lift is stated."
    ),
    Outcome.NOT_A_SECTION: (
        "The design's contour is no section: it crosses itself, has a spike or no thickness."
    ),
    Outcome.NOT_EVALUATED: ("The design was given up before this condition was reached."),
    Outcome.WORKER_LOST: (
        "The process that evaluated this design died twice; the design is left out."
    ),
}
