"""The whole Jacobian of the coupled equations, by what one Newton step leaves.

A converged state is disturbed at random in every unknown. With exact slopes the residual after one
step is of the second order in the disturbance; with any slope wrong it is of the first.
"""

import inspect
import math
from itertools import pairwise

import numpy as np
import pytest

import optim.aerodynamics.evaluator as evaluator_module
from optim.aerodynamics.coupling import newton
from optim.aerodynamics.evaluator import SectionEvaluator
from optim.aerodynamics.operating_point import OperatingPoint
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes

STATE = ("X", "M", "q", "kappa", "turn", "frac", "why")

CASES = {
    "forced": ("0012", {"reynolds": 6e6, "alpha": 3.0, "trip_upper": 0.05, "trip_lower": 0.05}),
    "free": ("2412", {"reynolds": 3e6, "alpha": 3.1}),
    "compressible": ("2412", {"reynolds": 3e6, "alpha": 3.1, "mach": 0.3}),
    "bubble": ("4412", {"reynolds": 3e5, "alpha": 4.0}),
    "separating": ("2412", {"reynolds": 3e6, "alpha": 14.0}),
    "lift": ("2412", {"reynolds": 3e6, "cl": 0.6}),
    "lift, compressible": ("23012", {"reynolds": 3e6, "cl": 0.8, "mach": 0.25}),
    "lift, forced": ("2412", {"reynolds": 3e6, "cl": 0.6, "trip_upper": 0.1, "trip_lower": 0.2}),
    "sharp": ("sharp 2412", {"reynolds": 2e6, "alpha": 2.0}),
}


def nodes(name, panels=120):
    found = panel_nodes(naca_section(name.split()[-1]), panels).copy()
    if name.startswith("sharp"):
        # the edge is closed by a wedge: y - x gap/2
        found[:, 1] -= np.sign(found[:, 1]) * found[:, 0] * abs(found[0, 1])
        found[0] = found[-1] = 1.0, 0.0
    return found


@pytest.fixture(scope="module")
def solved():
    """Case -> arguments of the last Newton solution by name, their arrays at the solution."""
    kept = {}

    def of(case):
        if case in kept:
            return kept[case]
        calls = []

        def recording(*arguments):
            calls.append(arguments)
            return newton(*arguments)

        section, condition = CASES[case]
        condition = dict(condition)
        if "alpha" in condition:
            condition["alpha"] = math.radians(condition["alpha"])
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(evaluator_module, "newton", recording)
            flow = SectionEvaluator(nodes(section)).flow(OperatingPoint(**condition))
        assert flow.converged, flow
        body = getattr(newton, "py_func", newton)
        found = dict(inspect.signature(body).bind(*calls[-1]).arguments)
        found["alpha"] = flow.alpha
        q, n = found["q"], len(found["x"])
        found["js"] = int(np.flatnonzero((q[: n - 1] < 0) & (q[1:n] >= 0))[0])
        kept[case] = found
        return found

    return of


def residuals(solution, size, kind, seed):
    """Residuals before and after one step from a solution disturbed by `size`."""
    trial = dict(solution)
    for name in (*STATE, "V", "history"):
        trial[name] = solution[name].copy()
    trial["history"][:] = 0.0
    trial["budget"] = 2
    noise = np.random.default_rng(seed).normal(size=len(trial["M"]))
    if kind == "mass":
        trial["M"] *= 1.0 + size * noise
    elif kind == "theta":
        trial["X"][:, 0] += size * noise
    elif kind == "stress":
        trial["X"][:, 3] += size * noise
    elif kind == "speed":
        trial["q"] *= 1.0 + 0.1 * size * noise
    else:
        trial["alpha"] += size
    newton(*trial.values())
    return trial["history"][0, 0], trial["history"][1, 0]


@pytest.mark.parametrize("kind", ["mass", "theta", "stress", "speed", "alpha"])
@pytest.mark.parametrize("case", list(CASES))
def test_one_step_leaves_the_second_order(case, kind, solved):
    solution = solved(case)
    before, coarse = residuals(solution, 1e-5, kind, seed=3)
    assert before > 5e-7
    start, fine = residuals(solution, 1e-6, kind, seed=3)
    # terms of second order that cancel at one of the sizes leave no slope to tell; a slope of an
    # equation that is wrong by a share of 1e-5 would leave that share of the disturbance
    assert fine < max(5e-11, 1e-5 * start) or math.log10(coarse / fine) > 1.8


@pytest.mark.parametrize("case", list(CASES))
def test_convergence_is_quadratic(case, solved):
    """The last residuals of the solution itself: each below the 1.5th power of the one before.

    They count from 5e-3: before that transition still passes from station to station.
    """
    history = solved(case)["history"]
    residual = history[: np.count_nonzero(history[:, 0]), 0]
    last = residual[residual < 5e-3]
    assert len(last) >= 2
    for before, after in pairwise(last):
        assert after < max(before**1.5, 1e-11)
