"""The benchmarks answer with the keys that scripts lean on; the slow ones hold their figures."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

HERE = Path(__file__).parent


def answer(name, *options):
    """Run a benchmark as a user does; its document."""
    done = subprocess.run(
        [sys.executable, str(HERE / name), "--json", *options],
        capture_output=True,
        text=True,
        check=True,
    )
    return json.loads(done.stdout)


def test_robustness_on_one_section():
    found = answer("robustness.py", "--sections", "1", "--shape", "bezier", "--seed", "4")
    assert set(found) >= {
        "rule",
        "thickness",
        "camber",
        "nose_radius",
        "converged",
        "share_to_10",
        "share_above_10",
        "clamps_active",
        "path_independent",
    }
    assert len(found["converged"]) == 30
    assert set(found["converged"][0]) == {"reynolds", "alpha_deg", "share"}
    assert len(found["thickness"]) == 3


@pytest.mark.slow
@pytest.mark.parametrize("shape", ["cst", "bezier"])
def test_random_sections_are_solved(shape):
    """Asked of 300 sections; forty are enough to see a fall, not to state a share to 1 %."""
    found = answer("robustness.py", "--sections", "40", "--shape", shape)
    assert found["share_to_10"] >= 0.99
    assert found["share_above_10"] >= 0.96
    assert found["clamps_active"] == 0
    assert found["path_independent"] >= 0.995


@pytest.mark.slow
def test_cost_of_the_evaluator():
    found = answer("evaluator.py")
    assert set(found) == {
        "lu_ms",
        "set_up_lu",
        "newton_iteration_lu",
        "cold_point_lu",
        "warm_point_lu",
        "sweep8_lu",
        "points_per_second",
        "exponent",
    }
    assert found["warm_point_lu"] < found["cold_point_lu"]
    assert found["points_per_second"] >= 400


@pytest.mark.slow
@pytest.mark.timeout(1800)
def test_cost_of_a_run():
    found = answer("run.py", "--generations", "2")
    assert set(found) == {
        "study",
        "overhead_percent",
        "parallel_efficiency",
        "archive_bytes_per_evaluation",
        "peak_rss_mb",
        "mix_lu_per_point",
    }
    few, many = (found["peak_rss_mb"][n] for n in ("1000", "100000"))
    assert many < few + 60
    assert found["overhead_percent"] < 5
