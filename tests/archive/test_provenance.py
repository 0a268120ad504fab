"""What computed a run can be read from its archive."""

import json
import os
import platform
from importlib import metadata

import h5py
import numpy as np
from archive_sample import make_header

from optim import __version__
from optim.archive.journal import Journal
from optim.archive.provenance import collect, processor_name
from optim.archive.reader import open_run
from optim.archive.writer import finish


def test_every_library_is_recorded_with_its_version():
    libraries = collect(seed=7, workers=2, digests={})["libraries"]
    assert libraries["numpy"] == np.__version__
    assert libraries["h5py"] == h5py.__version__
    assert libraries.keys() == {d.metadata["Name"] for d in metadata.distributions()}


def test_machine_seed_and_digests_are_recorded(monkeypatch):
    monkeypatch.setenv("OMP_NUM_THREADS", "1")
    monkeypatch.delenv("NUMBA_CPU_NAME", raising=False)
    found = collect(seed=7, workers=2, digests={"kernels": "abc"})
    assert found["seed"] == 7
    assert found["workers"] == 2
    assert found["digests"] == {"kernels": "abc"}
    assert found["sectionwright"] == __version__
    assert found["python"].startswith(platform.python_version())
    assert found["environment"]["OMP_NUM_THREADS"] == "1"
    assert "NUMBA_CPU_NAME" not in found["environment"]
    assert found["processors"] == os.cpu_count()
    assert found["linear_algebra"]["name"]


def test_the_processor_has_a_name():
    assert processor_name().strip()
    assert "\n" not in processor_name()


def test_it_comes_back_from_the_archive(run):
    written = collect(seed=7, workers=2, digests={"study": "0" * 64})
    with Journal.create(run, make_header(provenance=written)) as journal:
        finish(journal)
    with open_run(run) as opened:
        assert opened.header.provenance == written
        assert opened.sessions()[0]["provenance"] == written
    assert json.loads(json.dumps(written)) == written
