"""Where a run may be written, and the way to the invented run that is shared here."""

import sys
from pathlib import Path

import pytest

# Test modules are no packages: what they share is found by its folder.
sys.path.insert(0, str(Path(__file__).parent))


@pytest.fixture
def run(tmp_path) -> Path:
    """Where a run may be written."""
    return tmp_path / "run.h5"
