"""How often random sections are solved, and whether the answer depends on the way there.

The rule of the generator: a random NACA 4-digit section (camber 0 to 4 %, at 30 to 50 %, 8 to 20 %
thick) is fitted, and every coefficient is moved by up to 0.06 (t/12 %) either way, evenly: CST of
order 5 on both sides with the leading-edge term, or Bezier sides of six coefficients, moved by that
share of each coefficient's reach. Sections with a fault, or outside 8 to 20 % thickness, are drawn
anew. None is rejected by its flow.
"""

import clock  # noqa: I001  (before numpy)

import math

import numpy as np

from optim.aerodynamics.evaluator import SectionEvaluator
from optim.aerodynamics.laminar import GREATEST_H, LEAST_H
from optim.aerodynamics.operating_point import OperatingPoint
from optim.aerodynamics.turbulent import LEAST_LN_RE_THETA_OF_FRICTION
from optim.geometry.bezier import Bezier
from optim.geometry.cst import Cst
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes
from optim.geometry.validity import faults
from optim.outcomes import Outcome

SHAPES = {
    "cst": Cst(6, 6, gap=0.0025, leading_edge_term=True),
    "bezier": Bezier(6, 6, gap=0.0025),
}
THICKNESS = (0.08, 0.20)
MOVE = 0.06
"""Of a CST coefficient of a section of 12 %; of the same share of a Bezier ordinate's reach."""

REYNOLDS = (2e5, 1e6, 6e6)
ANGLES = tuple(range(-4, 15, 2))
EASY = 10
"""Greatest angle of the first figure [deg]; issue: 99 % up to it, 96 % beyond."""

SAME_DRAG = 1e-3
PANELS = 160


def random_sections(shape, count, seed):
    """Yield sections by the rule above."""
    rng = np.random.default_rng(seed)
    parameterisation = SHAPES[shape]
    made = 0
    while made < count:
        camber, place, thickness = rng.integers(0, 5), rng.integers(3, 6), rng.integers(8, 21)
        name = f"{camber}{place if camber else 0}{thickness:02d}"
        design = fit(parameterisation, naca_section(name)).design
        reach = parameterisation.reach if shape == "bezier" else np.ones(len(design))
        design = design + rng.uniform(-MOVE, MOVE, len(design)) * reach * thickness / 12
        section = parameterisation.section(design)
        if faults(section) or not THICKNESS[0] <= section.thickness <= THICKNESS[1]:
            continue
        made += 1
        yield section


def on_a_clamp(flow):
    """Whether a converged flow rests where the relations of its layer are held.

    At M = 0: a laminar shape factor beyond the fits, or a turbulent Re_theta below the friction
    law's.
    """
    surface = flow.surface
    wall = np.array(surface.side) != "wake"
    laminar = wall & ~np.isnan(surface.n)
    H = surface.shape_factor[laminar]
    Re_theta = flow.point.reynolds * surface.theta * surface.speed
    turbulent = wall & np.isnan(surface.n)
    held = np.log(Re_theta[turbulent]) < LEAST_LN_RE_THETA_OF_FRICTION
    return bool(np.any(H < LEAST_H) or np.any(H > GREATEST_H) or np.any(held))


def measure(shape, count, seed, *, paths):
    """Return the figures of the contract, and the sections' percentiles."""
    converged = np.zeros((len(REYNOLDS), len(ANGLES)), dtype=int)
    measures, clamps, same, compared = [], 0, 0, 0
    for section in random_sections(shape, count, seed):
        measures.append((section.thickness, section.camber, section.nose_radius))
        evaluator = SectionEvaluator(panel_nodes(section, PANELS))
        for i, reynolds in enumerate(REYNOLDS):
            points = [OperatingPoint(reynolds, alpha=math.radians(a)) for a in ANGLES]
            for j, warm in enumerate(evaluator.flows(points)):
                clamps += warm.outcome is Outcome.CLAMP_ACTIVE
                if not warm.converged:
                    continue
                converged[i, j] += 1
                clamps += on_a_clamp(warm)
                cold = evaluator.flow(warm.point) if paths else warm
                if cold.converged:
                    compared += 1
                    same += abs(cold.cd - warm.cd) <= SAME_DRAG * warm.cd
    low, middle, high = np.percentile(np.array(measures), (5, 50, 95), axis=0)
    spread = {
        name: [float(low[k]), float(middle[k]), float(high[k])]
        for k, name in enumerate(("thickness", "camber", "nose_radius"))
    }
    easy = np.array(ANGLES) <= EASY
    return {
        "rule": " ".join(__doc__.split("\n\n")[1].split()),
        "shape": shape,
        "sections": count,
        "seed": seed,
        **spread,
        "converged": [
            {"reynolds": reynolds, "alpha_deg": angle, "share": float(converged[i, j] / count)}
            for i, reynolds in enumerate(REYNOLDS)
            for j, angle in enumerate(ANGLES)
        ],
        "share_to_10": float(converged[:, easy].mean() / count),
        "share_above_10": float(converged[:, ~easy].mean() / count),
        "clamps_active": int(clamps),
        "path_independent": float(same / compared) if paths and compared else None,
    }


if __name__ == "__main__":
    parser = clock.parser(__doc__.splitlines()[0])
    parser.add_argument("--sections", type=int, default=300)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--shape", choices=tuple(SHAPES), default="cst")
    parser.add_argument(
        "--warm-only", action="store_true", help="do not solve every point cold as well"
    )
    arguments = parser.parse_args()
    result = measure(
        arguments.shape, arguments.sections, arguments.seed, paths=not arguments.warm_only
    )
    clock.show(result, arguments.json)
