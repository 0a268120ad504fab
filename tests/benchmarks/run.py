"""What a run costs beside its flows: overhead, parallel efficiency, archive, memory.

Overhead, efficiency and the archive's size are those of a shipped study with few generations;
memory is that of the recording process over a run whose flows cost nothing.
"""

import clock  # noqa: I001  (before numpy)

import json
import resource
import subprocess
import sys
import tempfile
from pathlib import Path

import cheap

from optim.aerodynamics.evaluator import SectionEvaluator
from optim.archive.reader import open_run
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes
from optim.runner.executors import processors
from optim.runner.start import SessionSettings, start_run, with_search
from optim.study.load import load_study, parse_study

STUDIES = Path(__file__).parents[2] / "studies"
STUDY = "tollgate-6-wing"
GENERATIONS = 3
POPULATION = 48
CHEAP_POPULATION = 200
EVALUATIONS = (1000, 100_000)


def peak_of_child(evaluations):
    """Peak memory of a process that records so many evaluations [MB]."""
    done = subprocess.run(
        [sys.executable, __file__, "--record", str(evaluations)],
        check=True,
        capture_output=True,
        text=True,
    )
    return float(json.loads(done.stdout))


def record(evaluations):
    """Record a run of free flows in this process; return its peak memory [MB]."""
    study = with_search(
        parse_study(cheap.STUDY),
        population=CHEAP_POPULATION,
        generations=evaluations // CHEAP_POPULATION,
    )
    with tempfile.TemporaryDirectory() as folder:
        start_run(study, Path(folder) / "run.h5", SessionSettings(workers=1), build=cheap.build)
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def flown(study, workers, folder):
    """Run the study; return elapsed, seconds and points of all evaluations, count and bytes."""
    path = Path(folder) / f"{workers}.h5"
    start_run(study, path, SessionSettings(workers=workers))
    with open_run(path) as run:
        seconds, points = run.read("seconds"), run.read("points")
        elapsed = float(run.read("elapsed")[-1])
    return elapsed, float(seconds.sum()), int(points.sum()), len(seconds), path.stat().st_size


def measure(name, generations):
    """Return the figures of the contract."""
    study = with_search(
        load_study(STUDIES / f"{name}.yaml"), generations=generations, population=POPULATION
    )
    workers = min(2, processors())
    nodes = panel_nodes(naca_section("2412"), study.evaluator.panels)
    lu = clock.factorisation(SectionEvaluator(nodes).outer.total)
    with tempfile.TemporaryDirectory() as folder:
        elapsed, seconds, points, count, size = flown(study, 1, folder)
        together = flown(study, workers, folder)[0] if workers > 1 else elapsed
    lu = min(lu, clock.factorisation(SectionEvaluator(nodes).outer.total))
    return {
        "study": name,
        "overhead_percent": 100.0 * (elapsed - seconds) / elapsed,
        "parallel_efficiency": elapsed / (workers * together),
        "archive_bytes_per_evaluation": size / count,
        "peak_rss_mb": {str(n): peak_of_child(n) for n in EVALUATIONS},
        "mix_lu_per_point": seconds / points / lu,
    }


if __name__ == "__main__":
    parser = clock.parser(__doc__.splitlines()[0])
    parser.add_argument("--study", default=STUDY, help="name of a shipped study")
    parser.add_argument("--generations", type=int, default=GENERATIONS)
    parser.add_argument("--record", type=int, help="used by the measurement of memory itself")
    arguments = parser.parse_args()
    if arguments.record:
        print(json.dumps(record(arguments.record)))
    else:
        clock.show(measure(arguments.study, arguments.generations), arguments.json)
