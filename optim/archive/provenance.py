"""What computed a run: interpreter, processor, the version of every installed library, digests.

There is no lock file; this record stands in its place.
"""

from __future__ import annotations

import os
import platform
import sys
from datetime import UTC, datetime
from importlib import metadata
from pathlib import Path
from typing import Any

import numpy as np

from optim import __version__

THREAD_SETTINGS = (
    "OMP_NUM_THREADS",
    "OPENBLAS_NUM_THREADS",
    "MKL_NUM_THREADS",
    "NUMBA_NUM_THREADS",
    "NUMBA_CPU_NAME",
    "NUMBA_DISABLE_JIT",
)
"""Environment that can change the last bit of a result."""


def collect(*, seed: int, workers: int, digests: dict[str, str]) -> dict[str, Any]:
    """Return the provenance of a session, representable as JSON.

    Parameters
    ----------
    seed : int
        Seed of the search.
    workers : int
        Number of worker processes.
    digests : dict
        Name -> digest of what else decides the numbers, such as the study's fingerprint and the
        kernels' sources.
    """
    return {
        "sectionwright": __version__,
        "time": datetime.now(UTC).isoformat(timespec="seconds"),
        "host": platform.node(),
        "platform": platform.platform(),
        "processor": processor_name(),
        "processors": os.cpu_count(),
        "python": sys.version,
        "libraries": installed_versions(),
        "linear_algebra": _linear_algebra(),
        "environment": {name: os.environ[name] for name in THREAD_SETTINGS if name in os.environ},
        "seed": seed,
        "workers": workers,
        "digests": dict(digests),
    }


def installed_versions() -> dict[str, str]:
    """Return the version of every installed distribution by its name."""
    found = {d.metadata["Name"]: d.version for d in metadata.distributions()}
    return {name: found[name] for name in sorted(found, key=str.lower)}


def processor_name() -> str:
    """Return the processor's model, as far as the system tells."""
    table = Path("/proc/cpuinfo")
    if table.exists():
        for line in table.read_text(encoding="utf-8", errors="replace").splitlines():
            if line.startswith("model name"):
                return line.partition(":")[2].strip()
    return platform.processor() or platform.machine()


def _linear_algebra() -> dict[str, str]:
    """Name and version of the BLAS that NumPy was built with."""
    blas = np.show_config(mode="dicts")["Build Dependencies"]["blas"]
    return {"name": str(blas.get("name", "")), "version": str(blas.get("version", ""))}
