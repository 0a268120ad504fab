"""All sources, in a fixed order, on worker processes."""

from __future__ import annotations

import importlib
import multiprocessing
from collections.abc import Iterator
from concurrent.futures import ProcessPoolExecutor

from optim.validation.case import Comparison
from optim.validation.record import read_record

SOURCES = (
    "naca0012_tm4074",
    "naca0012_report824",
    "naca0012_rm3726",
    "naca2412",
    "naca4412_cr152263",
    "handbook_report824",
    "minimum_drag",
    "e387",
    "nlf0416",
    "s809",
    "rae2822",
    "model_a",
    "wieghardt",
    "samuel_joubert",
)
"""Every source, in the order in which it is told."""

LONGEST_FIRST = ("handbook_report824", "e387", "nlf0416")
"""Sources that take longest and are begun first (measured)."""


def compare(name: str) -> Comparison:
    """Return the comparison with one source."""
    module = importlib.import_module(f"optim.validation.sources.{name}")
    comparison: Comparison = module.compare(read_record(name))
    return comparison


def run(workers: int) -> Iterator[Comparison]:
    """Yield the comparison with every source, in order, as soon as those before it are done.

    Parameters
    ----------
    workers : int
        Processes; with one, all is done in this one.
    """
    if workers <= 1:
        yield from map(compare, SOURCES)
        return
    order = sorted(SOURCES, key=lambda name: name not in LONGEST_FIRST)
    context = multiprocessing.get_context("spawn")
    with ProcessPoolExecutor(min(workers, len(SOURCES)), mp_context=context) as pool:
        running = {name: pool.submit(compare, name) for name in order}
        for name in SOURCES:
            yield running[name].result()
