"""How the table of optim/aerodynamics/transition.py was made; not a test, runs about five minutes.

For Falkner-Skan layers of given shape factor H the spatial Orr-Sommerfeld equation is solved along
lines of constant physical frequency. The greatest amplification exponent of all frequencies is the
envelope N(Re_theta; H). Its slope is distilled to

    dN/dRe_theta = s q (1 + a q + b q^2),    q = 1 - Rc/Re_theta,

with the critical Reynolds number Rc and s, a, b functions of t = 1/(H - 1). Everything is scaled
with theta and the edge speed; lines of constant frequency are omega ~ Re_theta^(1 - 2 beta), and
theta dRe_theta/dxi = theta_eta^2 (eta of the equation f''' + f f'' + beta (1 - f'^2) = 0).

Usage, with one thread of the linear algebra library (the matrices are small)::

    OPENBLAS_NUM_THREADS=1 python tests/derivations/stability_envelope.py FOLDER

writes FOLDER/falkner_skan_envelope.csv (nodes of the table and the layers half-way between them,
which the table does not use) and FOLDER/table.txt (the rows as they stand in transition.py).

References
----------
Falkner, V. M., Skan, S. W., ARC R&M 1314, 1930. Stewartson, K., Proc. Cambridge Phil. Soc. 50, 1954
(separated branch). Jordinson, R., J. Fluid Mech. 43, 1970 (spatial growth, flat plate). Drazin,
P. G., Reid, W. H., Hydrodynamic Stability, 1981. van Ingen, J. L., VTH-74, 1956, and Smith,
A. M. O., Gamberoni, N., ES 26388, 1956 (e^N). Gleyzes, C., Cousteix, J., Bonnet, J. L., 1985
(envelope of similar layers). All cited from memory; nothing here is copied from them.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from scipy.interpolate import CubicSpline

DEGREE = 90
"""Chebyshev degree across the layer; 130 changes Rt at N = 9 by less than 1e-4."""
OUTER_EDGE, HALF_OF_NODES_WITHIN = 18.0, 3.5
"""Extent of the grid and where half of its nodes lie [eta]."""
FIRST_T, STEP_T, ROWS = 0.04, 0.03, 29
"""Nodes of the table in t = 1/(H - 1): H = 26 to 2.136."""
LAYER_FLOOR = 1e-7
"""Change of f that ends Newton's method for a layer: the rounding of D^3 is about 3e-8."""
START_H = 2.5911
"""The flat plate, from which the march to other H starts."""
START_RT, START_OMEGA, START_ALPHA = 400.0, 0.05, 0.135
"""A growing wave of the flat plate, found from the temporal spectrum [-]."""
CREST_EXPONENT = 34.0
"""The march in Re_theta ends when the growth summed along its crest reaches this ..."""
LEAST_REACH = 2.0
"""... and Re_theta has reached this multiple of the critical one."""
STATIONS, FREQUENCY_STEP = 50, 0.06
"""Values of Re_theta above the critical one, and step of ln(frequency)."""
BAND_BELOW, BAND_ABOVE, DAMPED = 4.5, 1.5, 5
"""Waves looked at: ln(omega) about the crest, and damped ones beyond the neutral curve."""
RAMP = 0.03
"""Half-width in q of the smooth onset (also a constant of the kernel)."""
LEVELS = np.array([0.1, 0.2, 0.3, 0.5, 0.75, 1, 1.5, 2, 3, 4, 5, 6, 7.5, 9, 11, 13, 16, 20, 25, 30])
"""N at which the distilled form is fitted ..."""
FIRST_FULL, LAST_FULL, FAR = 0.5, 13.0, 0.3
"""... with full weight between these, less below, and this weight beyond."""
PRINTED = np.array([0.5, 1, 3, 6, 9, 13])
"""N whose Re_theta is written out."""


def chebyshev(n):
    """Nodes from 1 to -1, differentiation matrix and Clenshaw-Curtis weights."""
    k = np.arange(n + 1)
    half = np.pi / (2 * n)
    gap = 2 * np.sin(half * np.add.outer(k, k)) * np.sin(-half * np.subtract.outer(k, k))
    ends = np.r_[2.0, np.ones(n - 1), 2.0] * (-1.0) ** k
    D = np.outer(ends, 1 / ends) / (gap + np.eye(n + 1))
    D -= np.diag(D.sum(axis=1))
    even = np.arange(0, n + 1, 2)
    moments = np.where(even == n, 0.5, 1.0) * np.where(even == 0, 1.0, 2.0) / (1.0 - even**2)
    weights = 2 / n * np.cos(np.outer(k, even) * np.pi / n) @ moments
    weights[[0, -1]] /= 2
    return np.cos(np.pi * k / n), D, weights


class Grid:
    """Collocation on 0 <= eta <= OUTER_EDGE, from the edge to the wall."""

    def __init__(self, degree=DEGREE):
        z, D, weights = chebyshev(degree)
        a = HALF_OF_NODES_WITHIN * OUTER_EDGE / (OUTER_EDGE - 2 * HALF_OF_NODES_WITHIN)
        b = 1 + 2 * a / OUTER_EDGE
        stretch = a * (1 + b) / (b - z) ** 2
        self.eta = a * (1 + z) / (b - z)
        self.D = D / stretch[:, None]
        self.weights = weights * stretch


@dataclass
class Layer:
    """A Falkner-Skan layer: lengths in theta, speeds in edge speeds."""

    H: float
    beta: float
    theta_eta: float
    f: np.ndarray
    U: np.ndarray
    U2: np.ndarray
    D: tuple

    @classmethod
    def solved(cls, grid, H, f, beta):
        """Newton for f and beta at given H; f''(0) < 0 on the separated branch comes by itself."""
        D1, w, n = grid.D, grid.weights, len(f)
        D2 = D1 @ D1
        D3 = D1 @ D2
        for _ in range(30):
            f1, f2 = D1 @ f, D2 @ f
            r = np.r_[D3 @ f + f * f2 + beta * (1 - f1**2), w @ (1 - f1) - H * (w @ (f1 - f1**2))]
            J = np.zeros((n + 1, n + 1))
            J[:n, :n] = D3 + f[:, None] * D2 + np.diag(f2) - 2 * beta * f1[:, None] * D1
            J[:n, n] = 1 - f1**2
            J[n, :n] = -(w @ D1) - H * ((w * (1 - 2 * f1)) @ D1)
            ends = ((0, D1[0], 1), (n - 2, D1[-1], 0), (n - 1, np.eye(n)[-1], 0))
            for row, operator, wanted in ends:
                J[row], J[row, :n], r[row] = 0, operator, operator @ f - wanted
            change = np.linalg.solve(J, -r)
            f, beta = f + change[:n], beta + change[n]
            if np.abs(change).max() < LAYER_FLOOR:
                break
        else:
            raise ArithmeticError(f"No Falkner-Skan layer found at H = {H}.")
        f1 = D1 @ f
        theta = w @ (f1 - f1**2)
        U2 = -(f * (D2 @ f) + beta * (1 - f1**2)) * theta**2
        powers = (D1 * theta, D2 * theta**2, D3 * theta**3, D1 @ D3 * theta**4)
        return cls(H, beta, theta, f, f1, U2, powers)

    def operator(self, alpha, omega, Rt):
        """Orr-Sommerfeld matrix and its derivative in alpha, with the exact outer conditions.

        Outside, phi is a sum of exp(-alpha y) and exp(-gamma y): (D + alpha)(D + gamma) phi and
        its derivative vanish. At the wall phi and phi' vanish.
        """
        D1, D2, D3, D4 = self.D
        one = np.eye(len(self.U))
        laplace = D2 - alpha**2 * one
        A = D4 - 2 * alpha**2 * D2 + alpha**4 * one
        A = A - 1j * Rt * ((alpha * self.U - omega)[:, None] * laplace - alpha * np.diag(self.U2))
        inertia = self.U[:, None] * laplace
        inertia -= np.diag(2 * alpha * (alpha * self.U - omega) + self.U2)
        dA = 4 * alpha**3 * one - 4 * alpha * D2 - 1j * Rt * inertia
        gamma = np.sqrt(alpha**2 + 1j * Rt * (alpha - omega))
        dgamma = (2 * alpha + 1j * Rt) / (2 * gamma)
        both, product, slope = alpha + gamma, alpha * gamma, gamma + alpha * dgamma
        A[0], A[1] = D2[0] + both * D1[0], D3[0] + both * D2[0] + product * D1[0]
        A[0, 0] += product
        dA[0], dA[1] = (1 + dgamma) * D1[0], (1 + dgamma) * D2[0] + slope * D1[0]
        dA[0, 0] += slope
        A[-1], A[-2], dA[-1], dA[-2] = one[-1], D1[-1], 0, 0
        return A, dA


@dataclass
class Wave:
    """An eigensolution exp(i(alpha x - omega t)) at one Re_theta; `growth` is -Im(alpha)."""

    Rt: float
    omega: float
    alpha: complex
    phi: np.ndarray

    @property
    def growth(self):
        return -self.alpha.imag


def wave(layer, Rt, omega, alpha, phi, tolerance=1e-9):
    """Nonlinear inverse iteration from a neighbouring wave; None if it does not converge."""
    for _ in range(15):
        A, dA = layer.operator(alpha, omega, Rt)
        phi = phi / np.linalg.norm(phi)
        x = np.linalg.solve(A, dA @ phi)
        change = 1 / (phi.conj() @ x)
        alpha, phi = alpha - change, x
        if abs(change) < tolerance * abs(alpha):
            return Wave(Rt, omega, alpha, phi / np.linalg.norm(phi))
    return None


def crest(layer, Rt, near, step=0.02):
    """The wave that grows most at `Rt`: parabolas through three frequencies."""
    omega, at = near.omega, near
    for _ in range(60):
        three = [wave(layer, Rt, omega * np.exp(d), at.alpha, at.phi) for d in (-step, 0, step)]
        low, at, high = three
        bend = low.growth - 2 * at.growth + high.growth
        tilt = (high.growth - low.growth) / 2
        move = -tilt / bend if bend < 0 else 5 * np.sign(tilt)
        omega = omega * np.exp(step * np.clip(move, -6, 6))
        if abs(move) < 0.02:
            return wave(layer, Rt, omega, at.alpha, at.phi)
    raise ArithmeticError(f"No crest found at H = {layer.H}, Re_theta = {Rt}.")


def critical(layer, near):
    """The neutral wave of least Re_theta: the crest's growth as a function of ln Re_theta."""
    points = [crest(layer, near.Rt, near), crest(layer, near.Rt * 1.05, near)]
    for _ in range(30):
        (x0, g0), (x1, g1) = ((np.log(p.Rt), p.growth) for p in points)
        move = np.clip(-g1 * (x1 - x0) / (g1 - g0), -0.2, 0.2)
        points = [points[1], crest(layer, np.exp(x1 + move), points[1])]
        if abs(move) < 1e-8:
            return points[1]
    raise ArithmeticError(f"No critical Reynolds number found at H = {layer.H}.")


def crest_line(layer, first, step=0.05):
    """Crests from the critical Re_theta to the end of the march."""
    line, exponent = [first], 0.0
    while exponent < CREST_EXPONENT or line[-1].Rt < LEAST_REACH * first.Rt:
        line.append(crest(layer, line[-1].Rt * np.exp(step), line[-1]))
        sum_of_growth = line[-1].growth + line[-2].growth
        exponent += sum_of_growth / 2 / layer.theta_eta**2 * (line[-1].Rt - line[-2].Rt)
    return line


def growth_field(layer, first):
    """Growth on lines of constant frequency, (lines, stations), not-a-number outside the band."""
    line = crest_line(layer, first)
    reach = np.log(line[-1].Rt / first.Rt)
    x = np.r_[-0.08, -0.03, reach * np.linspace(0, 1, STATIONS) ** 1.5]
    bend = 1 - 2 * layer.beta
    crest_x = np.log([p.Rt / first.Rt for p in line])
    crest_y = np.log([p.omega / first.omega for p in line])
    found = {}
    for j, here in enumerate(x):
        Rt = first.Rt * np.exp(here)
        near = line[int(np.argmin(np.abs(crest_x - here)))]
        top = crest(layer, Rt, near)
        middle = round((np.log(top.omega / first.omega) - bend * here) / FREQUENCY_STEP)
        for way in (1, -1):
            k, at, before, damped = middle if way == 1 else middle - 1, top, None, 0
            while damped < DAMPED:
                y = k * FREQUENCY_STEP + bend * here
                if not -BAND_BELOW < y - np.interp(here, crest_x, crest_y) < BAND_ABOVE:
                    break
                guess = at.alpha if before is None else 2 * at.alpha - before.alpha
                before, at = (
                    (None if at is top else at),
                    wave(layer, Rt, first.omega * np.exp(y), guess, at.phi, 1e-8),
                )
                if at is None:
                    break
                found[k, j] = at.growth
                damped += at.growth < 0
                k += way
    lines = sorted({k for k, _ in found})
    field = np.full((lines[-1] - lines[0] + 1, len(x)), np.nan)
    for (k, j), growth in found.items():
        field[k - lines[0], j] = growth
    return first.Rt * np.exp(x), field


def amplification_on_line(Rt, growth, theta_eta):
    """N along one line of constant frequency, from where it first becomes unstable."""
    N = np.full(len(Rt), np.nan)
    there = np.flatnonzero(np.isfinite(growth))
    runs = np.split(there, np.flatnonzero(np.diff(there) > 1) + 1)
    for run in (r for r in runs if len(r) > 3 and growth[r[0]] < 0):
        x = np.log(Rt[run])
        rate = CubicSpline(x, growth[run] * Rt[run] / theta_eta**2)
        roots = rate.roots(extrapolate=False)
        rising = roots[rate(roots, 1) > 0]
        if len(rising):
            falling = roots[(rate(roots, 1) < 0) & (roots > rising[0])]
            last = falling[0] if len(falling) else np.inf
            total = rate.antiderivative()
            N[run] = total(np.clip(x, rising[0], max(last, rising[0]))) - total(rising[0])
    return N


def envelope(layer, first):
    """Re_theta from the critical one on, and the greatest N of all frequencies there."""
    Rt, field = growth_field(layer, first)
    N = np.array([amplification_on_line(Rt, line, layer.theta_eta) for line in field])
    result = [0.0]
    for column in N.T[3:]:
        there = np.flatnonzero(np.isfinite(column))
        best = there[np.argmax(column[there])]
        if best in (there[0], there[-1]) and column[best] > 1:
            break  # the lines that would carry more lie outside the band
        around = there[np.abs(there - best) <= 3]
        fine = np.linspace(max(best - 1, around[0]), min(best + 1, around[-1]), 201)
        result.append(CubicSpline(around, column[around])(fine).max())
    return Rt[2 : 2 + len(result)], np.array(result)


def at_levels(Rt, N, levels):
    """Re_theta where N reaches `levels`, and dN/dRe_theta there; N is smooth in sqrt(Rt - Rc)."""
    spline = CubicSpline(np.sqrt(Rt - Rt[0]), N)
    fine = np.linspace(0, np.sqrt(Rt[-1] - Rt[0]), 8001)
    x = np.interp(levels, np.maximum.accumulate(spline(fine)), fine, right=np.nan)
    return Rt[0] + x**2, spline(x, 1) / (2 * x)


def distil(Rt, N):
    """(s, a, b) of the form in the module docstring, by weighted least squares in Re_theta."""
    levels = LEVELS[N[-1] >= LEVELS]
    reached, slope = at_levels(Rt, N, levels)
    gauss, weights = np.polynomial.legendre.leggauss(60)
    rows = np.zeros((len(levels), 3))
    onset, end = Rt[0] / (1 + RAMP), Rt[0] / (1 - RAMP)
    for row, last in zip(rows, reached, strict=True):
        for a, b in ((onset, min(end, last)), (min(end, last), last)):
            q = 1 - Rt[0] / (a + (b - a) * (gauss + 1) / 2)
            q = np.where(q < RAMP, (q + RAMP) ** 2 / (4 * RAMP), q)
            row += [(b - a) / 2 * (weights @ q**k) for k in (1, 2, 3)]
    weight = np.minimum(1, levels / FIRST_FULL) * np.where(levels > LAST_FULL, FAR, 1)
    weight = weight / (slope * reached)
    c1, c2, c3 = np.linalg.lstsq(rows * weight[:, None], levels * weight, rcond=None)[0]
    return c1, c2 / c1, c3 / c1


def family(grid):
    """Yield t, the layer and its critical wave: from the flat plate to both ends of the table."""
    eta = grid.eta
    plate = Layer.solved(grid, START_H, eta - 1.2 * (1 - np.exp(-eta)), 0.0)
    guess = np.exp(-START_ALPHA * eta / plate.theta_eta) * eta**2 / (1 + eta**2)
    start = critical(plate, wave(plate, START_RT, START_OMEGA, START_ALPHA + 0j, guess + 0j))
    every = FIRST_T + STEP_T / 2 * np.arange(2 * ROWS - 1)
    begin = 1 / (START_H - 1)
    for ts in (every[every >= begin], every[every < begin][::-1]):
        layer, near, t = plate, start, begin
        for goal in ts:
            parts = int(np.ceil(abs(np.log(goal / t)) / 0.02))
            for here in np.geomspace(t, goal, parts + 1)[1:]:
                layer = Layer.solved(grid, 1 + 1 / here, layer.f, layer.beta)
            near, t = critical(layer, near), goal
            yield goal, layer, near


def main(folder):
    """Compute, distil and write both files."""
    rows = []
    for t, layer, first in family(Grid()):
        Rt, N = envelope(layer, first)
        reached, _ = at_levels(Rt, N, PRINTED)
        distilled = distil(Rt, N)
        neutral = (first.Rt, first.omega, first.alpha.real)
        rows.append([t, layer.H, layer.beta, layer.theta_eta**2, *neutral, *reached, *distilled])
        sys.stderr.write(f"H = {layer.H:.4f}  Rc = {first.Rt:.3f}  Re_theta = {reached}\n")
    rows = np.array(sorted(rows))
    header = "# COMPUTED by tests/derivations/stability_envelope.py: layers by rows, no unit\n"
    header += "t,H,beta,theta_eta2,Re_crit,omega_crit,alpha_crit,"
    header += ",".join(f"Re_N{level:g}" for level in PRINTED) + ",s,a,b"
    table = Path(folder, "falkner_skan_envelope.csv")
    np.savetxt(table, rows, "%.7g", delimiter=",", header=header, comments="")
    nodes = rows[::2]
    columns = np.c_[np.log(nodes[:, [4, -3]]), nodes[:, [-2, -1, 3]]]
    lines = ("        (" + ", ".join(f"{v:.6f}" for v in row) + ")," for row in columns)
    Path(folder, "table.txt").write_text("\n".join(lines) + "\n")


if __name__ == "__main__":
    main(sys.argv[1])
