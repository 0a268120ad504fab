"""A small invented run, a pure function of its seed: what every check of the archive stores."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import numpy as np

from optim.archive.journal import Journal
from optim.archive.records import GenerationRecord, RunHeader
from optim.outcomes import Outcome

POPULATION = 12
PROVENANCE = {"python": "3", "host": "bench"}


def make_header(**changes):
    """Five variables, two objectives, three constraints, two conditions."""
    fields = {
        "study_name": "tollgate-6-wing",
        "study_text": "study: tollgate-6-wing  # Flügel\nchord: 212 mm\n",
        "resolved_text": "study: tollgate-6-wing\nchord: 0.212\n",
        "variable_names": tuple(f"upper_{i}" for i in range(5)),
        "lower": np.full(5, -1.0),
        "upper": np.full(5, 1.0),
        "objective_names": ("lift_to_drag@survey", "nose_down_moment@survey"),
        "objective_senses": ("maximise", "minimise"),
        "objective_units": ("-", "-"),
        "reference_point": np.array([0.0, 0.2]),
        "constraint_names": ("thickness", "depth@0.3", "cl_max@slow"),
        "constraint_kinds": ("min", "min", "min"),
        "constraint_limits": np.array([0.1, 0.017, 1.4]),
        "constraint_units": ("-", "m", "-"),
        "constraint_scales": np.array([0.1, 0.017, 1.4]),
        "condition_names": ("survey", "slow"),
        "conditions_table": json.dumps({"survey": {"speed": 18.0}, "slow": {"speed": 12.5}}),
        "condition_quantity_names": ("cl", "cd", "x_cp"),
        "condition_quantity_units": ("-", "-", "-"),
        "section_quantity_names": ("thickness", "area"),
        "section_quantity_units": ("-", "-"),
        "algorithm": "nsga3",
        "seed": 7,
        "provenance": PROVENANCE,
    }
    return RunHeader(**{**fields, **changes})


def make_record(number, population=POPULATION, **changes):
    """One generation; a third of its designs failed at the second condition."""
    rng = np.random.default_rng([7, number])
    failed = rng.random(population) < 0.3
    absent = np.where(failed, np.nan, 1.0)
    outcomes = np.zeros((population, 2), dtype=np.int8)
    outcomes[failed, 1] = Outcome.NOT_CONVERGED
    fields = {
        "generation": number,
        "designs": rng.uniform(-1.0, 1.0, (population, 5)),
        "objectives": rng.normal(size=(population, 2)) * absent[:, None],
        "constraint_values": rng.normal(size=(population, 3)) * absent[:, None],
        "margins": rng.normal(size=(population, 3)) * absent[:, None],
        "violation": np.where(failed, 2.0, rng.integers(0, 2, population)),
        "quantities": rng.normal(size=(population, 2, 3)) * absent[:, None, None],
        "section_quantities": rng.normal(size=(population, 2)),
        "outcomes": outcomes,
        "design_outcomes": np.where(failed, Outcome.NOT_CONVERGED, Outcome.CONVERGED),
        "search_objectives": rng.normal(size=(population, 2)),
        "search_constraints": rng.normal(size=(population, 4)),
        "points": rng.integers(1, 9, population),
        "iterations": rng.integers(5, 90, population),
        "seconds": rng.random(population),
        "hypervolume": float(number) * 1.5,
        "elapsed": float(number + 1) * 4.0,
        "state_json": json.dumps({"bit_generator": {"state": 2**127 + number}}),
        "state_arrays": {
            "population.X": rng.random((population, 5)),
            "population.crowding": np.array([np.inf, 0.5]),
            "survival.norm.ideal": rng.random(2),
            "evaluated": np.arange(number + 1),
            "mask": np.array([True, False]),
        },
    }
    return GenerationRecord(**{**fields, **changes})


def write_journal(run: Path, generations: int, **header) -> None:
    """Leave the journal of a run of so many generations, as if its writer had been killed."""
    with Journal.create(run, make_header(**header)) as journal:
        for generation in range(generations):
            journal.append(make_record(generation))


def assert_holds(run, generations: int) -> None:
    """Every field of a run that is read is what `make_record` wrote."""
    assert run.generations == generations
    start = 0
    for generation in range(generations):
        record = make_record(generation)
        rows = slice(start, start + len(record.designs))
        for field in ("designs", "objectives", "margins", "quantities", "outcomes", "seconds"):
            np.testing.assert_array_equal(run.read(field, rows), getattr(record, field))
        assert run.read("hypervolume")[generation] == record.hypervolume
        start = rows.stop
    assert run.evaluations == start
    if generations:
        text, arrays = run.last_state()
        assert text == make_record(generations - 1).state_json
        for name, array in make_record(generations - 1).state_arrays.items():
            np.testing.assert_array_equal(arrays[name], array)
            assert arrays[name].dtype == array.dtype


def start_writer(run: Path, generations: int) -> subprocess.Popen:
    """Start a process that writes `run` and says each generation once it is acknowledged."""
    script = Path(__file__).with_name("writer_child.py")
    command = [sys.executable, str(script), str(run), str(generations)]
    return subprocess.Popen(command, stdout=subprocess.PIPE, text=True)
