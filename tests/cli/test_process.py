"""What only a process of its own shows: streams, exit codes, traces, and what is imported."""

import json
import subprocess
import sys

import pytest

from optim.cli import app
from optim.runner import executors

HEAVY = ("numba", "pymoo")

WHEN_THE_COMMAND_BEGINS = """
import os, sys
os.environ.update(OMP_NUM_THREADS="4", OPENBLAS_NUM_THREADS="4")
import optim.cli.app as app
def look(words):
    assert not {"numpy", "scipy", "numba"} & set(sys.modules)
    print(*(os.environ[name] for name in app.THREADS))
    return 0
app.run = look
"""

WHAT_IS_LOADED = """
import sys
from optim.cli.app import run
code = run(sys.argv[1:])
sys.stderr.write(",".join(sorted({name.partition(".")[0] for name in sys.modules})))
sys.exit(code)
"""


def loaded(process, *words):
    """Return the libraries that a command has loaded when it ends."""
    done = process(*words, program=("-c", WHAT_IS_LOADED))
    assert done.returncode == 0, done.stderr
    return set(done.stderr.splitlines()[-1].split(","))


def test_import_optim_loads_nothing_heavy(process):
    done = process(program=("-c", "import sys, optim; print(*sys.modules, sep=chr(10))"))
    names = {name.partition(".")[0] for name in done.stdout.split()}
    assert "optim" in names
    assert names.isdisjoint({*HEAVY, "numpy", "scipy", "h5py", "pydantic", "matplotlib", "typer"})


def test_looking_at_a_run_waits_for_no_compiler_and_no_search(process, run_file, tmp_path):
    for words in (
        ("front", run_file),
        ("front", run_file, "--json"),
        ("status", run_file, "--json"),
        ("export", f"{run_file}#3", "--output", tmp_path / "section.csv"),
        ("export", f"{run_file}#3", "--output", tmp_path / "section.dxf"),
        ("compare", run_file, run_file),
        ("fit", "naca:2412", "--shape", "cst"),
        ("template",),
        ("schema",),
    ):
        assert loaded(process, *words).isdisjoint(HEAVY), words


@pytest.mark.parametrize(
    "words",
    [
        ("--help",),
        *[(verb, "--help") for verb in ("check", "run", "validate", "export", "sheet", "compare")],
    ],
)
def test_help_loads_no_library_of_numbers(process, words):
    heavy = {*HEAVY, "numpy", "scipy", "h5py", "yaml", "pint", "rich"}  # typer has pydantic
    assert loaded(process, *words).isdisjoint(heavy)


@pytest.mark.parametrize(
    "door", ["app.main()", "import runpy; runpy.run_module('optim', run_name='__main__')"]
)
def test_command_computes_on_one_thread_as_the_workers_do(process, door):
    """Else a design flown again would differ from the archive in the last bits.

    The libraries read the variables when they are loaded: none may be there before them.
    """
    assert app.THREADS == executors.THREADS
    done = process(program=("-c", f"{WHEN_THE_COMMAND_BEGINS}{door}"))
    assert done.stdout.split() == ["1"] * len(app.THREADS), done.stderr


def test_python_m_optim_is_the_command(process):
    done = process("--help")
    assert done.returncode == 0
    for name in ("template", "check", "run", "resume", "status", "front", "analyse", "validate"):
        assert name in done.stdout


def test_no_words_is_the_help(process):
    done = process()
    assert done.returncode == 0
    assert "sectionwright" in done.stdout


BUG = """
import sys
import optim.cli.app as app
def broken(*_):
    raise ZeroDivisionError("planted")
sys.modules["optim.study.template"] = type(sys)("template")
sys.modules["optim.study.template"].template_text = broken
app.main()
"""


def test_bug_is_one_line_and_exit_1(process):
    done = process("template", program=("-c", BUG))
    (line,) = done.stderr.splitlines()
    assert done.returncode == 1
    assert "this is a bug" in line
    assert "ZeroDivisionError: planted" in line
    assert "--debug" in line


def test_debug_shows_the_trace(process):
    for words in (("--debug", "template"), ("template", "--debug")):
        done = process(*words, program=("-c", BUG))
        assert done.returncode == 1
        assert "Traceback" in done.stderr
        assert 'raise ZeroDivisionError("planted")' not in done.stderr.splitlines()[0]


def test_reader_that_goes_away_is_no_bug(run_file):
    command = [sys.executable, "-m", "optim", "front", str(run_file), "--json"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as writer:
        writer.stdout.close()
        said = writer.stderr.read()
    assert writer.returncode == 141
    assert said == b""


def test_json_is_alone_on_standard_output(process, run_file):
    done = process("front", run_file, "--json", "--plot", "front.png")
    json.loads(done.stdout)
    assert done.stderr == "front.png is drawn.\n"
