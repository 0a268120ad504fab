"""The layout is the one place: code, files and description agree with it."""

import re
import subprocess
import sys
from dataclasses import fields
from pathlib import Path

import h5py
import numpy as np
import pytest
from archive_sample import make_header, make_record, write_journal

from optim.archive.guide import guide
from optim.archive.layout import BY_PATH, FIXED, GROUPS, HEADER, RECORD, STATE_ARRAYS, group_of
from optim.archive.records import GenerationRecord, RunHeader
from optim.archive.reopen import reopen
from optim.archive.writer import finish
from optim.outcomes import Outcome

ROOT = Path(__file__).parents[2]
README = ROOT / "results" / "README.md"


@pytest.fixture
def archive(run):
    """Return the archive of a small run."""
    write_journal(run, 3)
    with reopen(run, {}) as journal:
        finish(journal)
    return run


def test_the_description_is_in_step():
    """If not: python -m optim.archive.guide > results/README.md."""
    assert README.read_text(encoding="utf-8") == guide()


def test_the_description_names_every_dataset_and_outcome():
    text = README.read_text(encoding="utf-8")
    assert all(f"`{dataset.path}`" in text for dataset in FIXED)
    assert all(f"`{outcome.label}`" in text for outcome in Outcome)


def test_the_example_of_the_description_runs(archive, tmp_path):
    example = re.search(r"```python\n(.*?)```", README.read_text(encoding="utf-8"), re.DOTALL)[1]
    (tmp_path / "results").mkdir()
    archive.rename(tmp_path / "results" / "first-look.h5")
    done = subprocess.run(
        [sys.executable, "-c", example], cwd=tmp_path, capture_output=True, text=True, check=True
    )
    feasible = sum(int(np.sum(make_record(g).violation == 0.0)) for g in range(3))
    names = "lift_to_drag@survey, nose_down_moment@survey"
    assert done.stdout == f"{feasible} feasible designs; {names}\n"


def test_every_field_has_its_dataset():
    assert [d.field for d in HEADER] != []
    assert {d.field for d in HEADER} == {f.name for f in fields(RunHeader)}
    stored = {d.field for d in RECORD} - {"generation_of", "evaluations"}
    elsewhere = {"generation", "state_json", "state_arrays"}
    assert stored | elsewhere == {f.name for f in fields(GenerationRecord)}


def test_every_group_is_described_and_every_path_is_its_own():
    assert {group_of(dataset.path) for dataset in FIXED} == GROUPS.keys()
    assert len(BY_PATH) == len(FIXED)


def test_the_file_has_the_datasets_of_the_layout_and_no_others(archive):
    found = {}
    with h5py.File(archive) as file:
        file.visititems(lambda path, item: found.update({f"/{path}": item.attrs.get("unit")}))
        found = {p: u for p, u in found.items() if isinstance(file[p], h5py.Dataset)}
    fixed = {path for path in found if not path.startswith(STATE_ARRAYS)}
    assert fixed == BY_PATH.keys()
    assert {path: found[path].decode() for path in fixed} == {
        path: dataset.unit for path, dataset in BY_PATH.items()
    }


def test_types_and_axes_are_those_of_the_layout(archive):
    header = make_header()
    lengths = {
        "evaluation": 36,
        "generation": 3,
        "search_constraint": 4,
        "variable": len(header.variable_names),
        "objective": len(header.objective_names),
        "constraint": len(header.constraint_names),
        "condition": len(header.condition_names),
        "condition_quantity": len(header.condition_quantity_names),
        "section_quantity": len(header.section_quantity_names),
    }
    kinds = {"f8": "<f8", "i8": "<i8", "i1": "|i1"}
    with h5py.File(archive) as file:
        for dataset in FIXED:
            stored = file[dataset.path]
            assert stored.shape == tuple(lengths[axis] for axis in dataset.axes), dataset.path
            if dataset.dtype == "text":
                assert h5py.check_string_dtype(stored.dtype)[0] == "utf-8"
                assert h5py.check_string_dtype(stored.dtype)[1] is not None
            else:
                assert stored.dtype.str == kinds[dataset.dtype]


def test_the_outcomes_are_named_beside_their_codes(archive):
    with h5py.File(archive) as file:
        for path in ("evaluations/outcomes", "evaluations/design_outcome"):
            names = [name.decode() for name in file[path].attrs["outcome_names"]]
            assert names == [outcome.label for outcome in sorted(Outcome)]
            assert [Outcome(code).label for code in range(len(names))] == names


def test_an_old_reader_opens_the_file(archive):
    """Superblock version 0, the first there was (HDF5 file format specification, II.A)."""
    start = archive.read_bytes()[:9]
    assert start == b"\x89HDF\r\n\x1a\n\x00"
    with h5py.File(archive) as file:
        assert file["evaluations/design"].compression == "gzip"
        assert file["evaluations/design"].shuffle
        assert file["evaluations/design"].maxshape[0] is None


def test_a_reader_loads_neither_numba_nor_pymoo():
    """And the door of the room loads no HDF5."""
    program = (
        "import sys, optim.archive, optim.archive.journal\n"
        "assert 'h5py' not in sys.modules\n"
        "import optim.archive.reader\n"
        "print([m for m in ('numba', 'pymoo', 'matplotlib', 'pydantic') if m in sys.modules])\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    assert done.stdout == "[]\n"
