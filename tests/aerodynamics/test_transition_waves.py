"""The critical point by another way than the table's, at shape factors withheld from it.

The layer comes from scipy's boundary-value solver. The Orr-Sommerfeld equation is integrated from
the edge to the wall by the compound-matrix method (Ng, B. S., Reid, W. H., J. Comput. Phys. 30,
1979; Drazin & Reid, Hydrodynamic Stability, 1981; from memory), several frequencies at once, and
the wave number is found by secants on the minor that vanishes at the wall. Lengths in theta, speeds
in edge speeds.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import solve_bvp

from optim.aerodynamics.transition import critical_re_theta, similar_flow_growth

EDGE = 10.0
ENVELOPE = np.genfromtxt(
    Path(__file__).parents[1] / "data" / "falkner_skan_envelope.csv",
    delimiter=",",
    names=True,
    skip_header=1,
)


@dataclass
class Layer:
    """U and U'' at the ends and middles of the steps, from the wall outwards."""

    theta_eta: float
    step: float
    U: np.ndarray
    U2: np.ndarray


def falkner_skan(shape_factors, steps):
    """The layer of the last shape factor, each solved from the one before; the first is easy."""
    eta = np.linspace(0.0, EDGE, 201)
    f1 = np.tanh(0.55 * eta)
    f = np.concatenate([[0.0], np.cumsum((f1[1:] + f1[:-1]) / 2 * np.diff(eta))])
    guess = np.array([f, f1, np.gradient(f1, eta), np.minimum(0.47, 0.3 * eta)])
    beta = np.zeros(1)

    def slopes(_, y, p):
        return np.array([y[1], y[2], -y[0] * y[2] - p[0] * (1 - y[1] ** 2), y[1] - y[1] ** 2])

    for H in shape_factors:

        def ends(wall, edge, _, H=H):
            shape = EDGE - edge[0] - H * edge[3]
            return np.array([wall[0], wall[1], wall[3], edge[1] - 1, shape])

        found = solve_bvp(slopes, ends, eta, guess, p=beta, tol=1e-7, max_nodes=20000)
        assert found.success, found.message
        eta, guess, beta = found.x, found.y, found.p
    y = found.sol(np.linspace(0.0, EDGE, 2 * steps + 1))
    theta = y[3, -1]
    U2 = -(y[0] * y[2] + beta * (1 - y[1] ** 2)) * theta**2
    return Layer(theta, EDGE / steps / theta, y[1], U2)


def wall_minor(layer, Rt, omega, alpha):
    """phi1 phi2' - phi1' phi2 at the wall, over another minor that does not vanish there."""
    gamma = np.sqrt(alpha**2 + 1j * Rt * (alpha - omega))
    p, q, decay = -alpha, -gamma, alpha + gamma
    z = np.array([p**0, p + q, p * p + p * q + q * q, p * q, p * q * (p + q), (p * q) ** 2])

    def slope(z, k):
        inertia = 1j * Rt * (alpha * layer.U[k] - omega)
        a = 2 * alpha**2 + inertia
        b = -(alpha**4) - alpha**2 * inertia - 1j * Rt * alpha * layer.U2[k]
        rates = [z[1], z[2] + z[3], a * z[1] + z[4], z[4], z[5] + a * z[3] - b * z[0], -b * z[1]]
        return decay * z + np.array(rates)

    h = -layer.step
    for k in range(len(layer.U) - 1, 0, -2):
        k1 = slope(z, k)
        k2 = slope(z + h / 2 * k1, k - 1)
        k3 = slope(z + h / 2 * k2, k - 1)
        z = z + h / 6 * (k1 + 2 * k2 + 2 * k3 + slope(z + h * k3, k - 2))
    return z[0] / z[1]


def wave_numbers(layer, Rt, omega, alpha):
    """Complex wave numbers of the frequencies `omega`, from one guess."""
    old, new = alpha * (1 + 1e-3) + 0 * omega, alpha + 0 * omega
    f_old = wall_minor(layer, Rt, omega, old)
    for _ in range(25):
        f_new = wall_minor(layer, Rt, omega, new)
        change = -f_new * (new - old) / np.where(f_new == f_old, 1, f_new - f_old)
        change *= np.minimum(1, 0.1 * abs(new) / np.maximum(abs(change), 1e-300))
        old, f_old, new = new, f_new, new + change
        if np.abs(change).max() < 1e-8:
            return new
    raise AssertionError("no wave found")


@pytest.mark.parametrize(
    ("path", "steps"),
    [((2.59, 2.44), 800), ((2.6, 2.9), 200), ((2.6, 3.2, 4.2), 150), ((2.6, 3.2, 4.2, 6.0), 150)],
    ids=lambda path: f"H={path[-1]}" if isinstance(path, tuple) else f"{path} steps",
)
def test_waves_begin_to_grow_at_the_critical_reynolds_number(path, steps):
    H = path[-1]
    layer = falkner_skan(path, steps)
    Rc, _ = critical_re_theta(H)
    omega = np.interp(H, ENVELOPE["H"][::-1], ENVELOPE["omega_crit"][::-1])
    alpha = np.interp(H, ENVELOPE["H"][::-1], ENVELOPE["alpha_crit"][::-1])
    omegas = omega * np.exp(np.linspace(-0.08, 0.08, 7))
    below, above = (
        -wave_numbers(layer, Rt, omegas, alpha + 0j).imag for Rt in (0.99 * Rc, 1.01 * Rc)
    )
    assert below.max() < 0 < above.max()
    for growth in (below, above):  # the crest lies inside, so it is the greatest of all frequencies
        assert 0 < growth.argmax() < len(growth) - 1
    assert similar_flow_growth(H)[0] == pytest.approx(layer.theta_eta**2, rel=3e-4)
