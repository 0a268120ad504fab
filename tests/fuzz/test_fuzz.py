"""Whatever is in a file, the command ends with 0 or 2, one line a fault, and never with a trace."""

import os
import re
import resource
import sys
from pathlib import Path

import edited_sections
import pytest
from edited_sections import edited_section, text_of
from edited_studies import KINDS, NAMES, SEEDS, TERMINAL, edited_study

from optim.cli.console import printable
from optim.errors import StudyError
from optim.geometry.curve import cosine_parameters
from optim.geometry.naca import naca_section
from optim.study.load import parse_study

LONGEST = 1.0
"""Loading never takes more processor time [s]."""

MOST_MEMORY = 1 << 30
"""Nor more memory than the process had [byte]."""

LONGEST_LINE = 1000
"""A line that says a fault [characters]."""


def peak():
    """Return the most memory that this process ever had [byte]."""
    kilobytes = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return kilobytes if sys.platform == "darwin" else 1024 * kilobytes


def assert_well_said(done, file, what):
    """The command ended as it may; what it wrote is lines of printable text, each with a place."""
    assert done.code in {0, 2}, what
    lines = done.err.splitlines()
    assert all(line.isprintable() for line in (*lines, *done.out.splitlines())), what
    assert "Traceback" not in done.err
    if done.code == 2:
        assert done.out == "", what
        assert lines, what
        for line in lines:
            assert re.match(rf"{re.escape(file)}(:\d+(:\d+)?)?: \S", line), what
            assert len(line) <= LONGEST_LINE, what


def try_all(make, numbers, typed, words, tried):
    """Give the command one file after another; return what came of them."""
    before = peak()
    file = Path(words[1])
    for number in numbers:
        kind, data = make(number)
        file.write_bytes(data)
        done = typed(*words)
        what = f"{kind} {number}"
        assert_well_said(done, file.name, what)
        assert done.seconds < LONGEST, what
        tried.add(kind, done.code, done.seconds, what)
    assert peak() - before < MOST_MEMORY
    assert os.listdir() == [file.name]  # noqa: PTH208 - the folder that the command ran in
    tried.memory = peak() - before
    return tried


def report(tried, capsys):
    with capsys.disabled():
        for (kind, code), count in sorted(tried.endings.items()):
            sys.stdout.write(f"{kind:12} exit {code}: {count}\n")
        seconds, what = tried.slowest
        sys.stdout.write(f"slowest {seconds:.2f} s ({what}), memory +{tried.memory >> 20} MB\n")


def test_edited_studies_are_checked_or_refused(typed, tried):
    try_all(edited_study, range(8 * len(KINDS)), typed, ("check", "s.yaml"), tried)
    codes = {code: sum(n for (_, c), n in tried.endings.items() if c == code) for code in (0, 2)}
    assert min(codes.values()) > 5  # the edits leave some studies valid


@pytest.mark.slow
@pytest.mark.timeout(3600)
def test_ten_thousand_edited_studies(typed, tried, capsys):
    try_all(edited_study, range(1000, 11_000), typed, ("check", "s.yaml"), tried)
    report(tried, capsys)


ANALYSE = ("analyse", "s.dat", "--reynolds", "1e6", "--alpha", "2")


@pytest.mark.usefixtures("closed_form")
def test_edited_section_files_are_flown_or_refused(typed, tried):
    numbers = range(5 * len(edited_sections.KINDS))
    try_all(edited_section, numbers, typed, ANALYSE, tried)
    codes = {code: sum(n for (_, c), n in tried.endings.items() if c == code) for code in (0, 2)}
    assert min(codes.values()) > 5


@pytest.mark.slow
@pytest.mark.timeout(3600)
@pytest.mark.usefixtures("closed_form")
def test_five_thousand_edited_section_files(typed, tried, capsys):
    try_all(edited_section, range(1000, 6000), typed, ANALYSE, tried)
    report(tried, capsys)


@pytest.mark.parametrize(
    "title", ["$5 and $6 and \\frac{", "$_{", "\x1b[2J\x1b]0;owned\x07", "</text><b>&amp;"]
)
@pytest.mark.usefixtures("closed_form")
def test_titles_are_shown_and_drawn_as_they_are(typed, tmp_path, title):
    """A title is text: no terminal, formula or mark-up language reads it."""
    points = naca_section("2412").points(cosine_parameters(60)).tolist()
    (tmp_path / "s.dat").write_text(f"{title}\n{text_of(points)}", encoding="utf-8")
    for words in (ANALYSE, ("fit", "s.dat", "--shape", "cst")):
        done = typed(*words, "--plot", "f.svg")
        assert done.code == 0, done.err
        assert all(line.isprintable() for line in (done.out + done.err).splitlines())
        drawn = (tmp_path / "f.svg").read_text(encoding="utf-8")
        assert "\x1b" not in drawn
        assert "<b>" not in drawn


@pytest.mark.parametrize("name", NAMES, ids=lambda name: f"{name[:12]!r}-{len(name)}")
def test_no_name_of_a_study_leads_out_of_its_folder(name):
    """The archive is results/NAME.h5; a name is refused or is one plain file name."""
    escaped = "".join(f"\\U{ord(letter):08x}" for letter in name)
    text = SEEDS[0].replace("first-look", f'"{escaped}"', 1)
    try:
        study = parse_study(text)
    except StudyError:
        return
    assert Path(f"{study.study}.h5").name == f"{study.study}.h5"
    assert study.study.isascii()
    assert study.study.isprintable()


@pytest.mark.parametrize("name", ["\x1b[2J.yaml", "a\nb.yaml", "\x9b31m.yaml", "\u202egnp.yaml"])
def test_names_of_files_are_shown_escaped(typed, name):
    (Path() / name).write_text("study: 3\n")
    for words in (("check", name), ("run", name), ("status", name), ("fit", name, "--shape", "cst"),
                  ("run", "s.yaml", "--output", name)):  # fmt: skip
        done = typed(*words)
        assert done.code in {2, 4}
        assert done.err.splitlines()
        assert all(line.isprintable() for line in done.err.splitlines())
        assert all(": " in line for line in done.err.splitlines())


@pytest.mark.parametrize("text", TERMINAL)
def test_text_for_a_terminal_is_printable(text):
    shown = printable(f"{text} plain é µ\n\tnext")
    assert shown.replace("\n", "").replace("\t", "").isprintable()
    assert shown.endswith(" plain é µ\n\tnext")
