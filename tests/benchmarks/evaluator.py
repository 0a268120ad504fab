"""What the evaluator costs, in LAPACK factorisations of a system of its own size.

Sections 0012, 2412, 4412 and 23012 at Re 1e6, free transition, 160 panels; every figure is the
mean over the sections of the best of several rounds, and every round times the factorisation anew.
"""

import clock  # noqa: I001  (before numpy)

import math

import numpy as np

import optim.aerodynamics.evaluator as module
from optim.aerodynamics.evaluator import SectionEvaluator
from optim.aerodynamics.operating_point import OperatingPoint
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes

SECTIONS = ("0012", "2412", "4412", "23012")
REYNOLDS = 1e6
PANELS = 160
GRIDS = (80, 160, 320)
ANGLES = tuple(range(8))
ROUNDS = 7


def point(degrees):
    return OperatingPoint(REYNOLDS, alpha=math.radians(degrees))


def nodes_of(panels):
    return [panel_nodes(naca_section(name), panels) for name in SECTIONS]


def sweep8(nodes):
    """Eight points with the set-up; return the time and how many converged."""
    found = []
    spent = clock.seconds(
        lambda: found.extend(SectionEvaluator(nodes).flows([point(a) for a in ANGLES]))
    )
    return spent, sum(flow.converged for flow in found)


def sweep_time(nodes):
    """Best time of the sweep over the rounds."""
    return min(sweep8(nodes)[0] for _ in range(ROUNDS))


class NewtonClock:
    """Stands in for the evaluator's Newton solution and times it."""

    def __init__(self):
        self.newton = module.newton
        self.spent = 0.0
        self.iterations = 0

    def __call__(self, *arguments):
        found = []
        self.spent += clock.seconds(lambda: found.extend(self.newton(*arguments)))
        self.iterations += found[3]
        return tuple(found)


def iteration_time(evaluator):
    """Time of one Newton iteration: a solution's time over its steps, its last look included."""
    timed = NewtonClock()
    module.newton = timed
    try:
        for a in ANGLES:
            evaluator.flow(point(a))
    finally:
        module.newton = timed.newton
    return timed.spent / max(timed.iterations, 1)


def cold_time(evaluator):
    """Time of a point started from nothing, set-up not included."""
    return clock.seconds(lambda: [evaluator.flow(point(a)) for a in ANGLES]) / len(ANGLES)


def warm_time(evaluator):
    """Time of a point started from the flow one degree away."""
    spent, count = 0.0, 0
    for a in ANGLES[:-1]:
        _, state = evaluator.solve(point(a))
        if state is not None:
            spent += clock.seconds(lambda a=a, s=state: evaluator.solve(point(a + 1), s))
            count += 1
    return spent / max(count, 1)


def measure():
    """Return the figures of the contract."""
    contours = nodes_of(PANELS)
    evaluators = [SectionEvaluator(nodes) for nodes in contours]
    order = evaluators[0].outer.total
    for nodes in contours:
        sweep8(nodes)  # the kernels are loaded
    lu = float("inf")
    best = {}
    for _ in range(ROUNDS):
        lu = min(lu, clock.factorisation(order))
        for i, (nodes, evaluator) in enumerate(zip(contours, evaluators, strict=True)):
            figures = {
                "set_up": clock.seconds(lambda n=nodes: SectionEvaluator(n)),
                "newton_iteration": iteration_time(evaluator),
                "cold_point": cold_time(evaluator),
                "warm_point": warm_time(evaluator),
                "sweep8": sweep8(nodes)[0],
            }
            for name, value in figures.items():
                best[name, i] = min(best.get((name, i), float("inf")), value)
    mean = {
        name: float(np.mean([v for (n, _), v in best.items() if n == name])) for name in figures
    }
    converged = sum(sweep8(nodes)[1] for nodes in contours)
    grids = [float(np.mean([sweep_time(n) for n in nodes_of(panels)])) for panels in GRIDS]
    return {
        "lu_ms": 1e3 * lu,
        **{f"{name}_lu": mean[name] / lu for name in mean},
        "points_per_second": converged / (mean["sweep8"] * len(contours)),
        "exponent": float(np.polyfit(np.log(GRIDS), np.log(grids), 1)[0]),
    }


if __name__ == "__main__":
    arguments = clock.parser(__doc__.splitlines()[0]).parse_args()
    clock.show(measure(), arguments.json)
