"""Each source compared once a session; the command as a person types it."""

from functools import cache
from types import SimpleNamespace

import pytest

from optim.cli import app
from optim.validation import suite


@pytest.fixture(scope="session")
def comparison():
    """Return the comparison with a source, computed at first use."""
    return cache(suite.compare)


@pytest.fixture
def command(capsys):
    """Return what runs a command line in this process: code, standard output, standard error."""

    def typed(*words):
        capsys.readouterr()
        code = app.run([str(word) for word in words])
        streams = capsys.readouterr()
        return SimpleNamespace(code=code, out=streams.out, err=streams.err)

    return typed
