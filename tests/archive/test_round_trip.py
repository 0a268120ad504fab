"""What is read is what was written, by whichever way it is read."""

import tempfile
from pathlib import Path

import numpy as np
import pytest
from archive_sample import assert_holds, make_header, make_record, write_journal
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from optim.archive.journal import Journal
from optim.archive.reader import open_run
from optim.archive.reopen import reopen
from optim.archive.writer import finish, stop
from optim.outcomes import Outcome

NAMES = st.lists(
    st.text(st.characters(codec="utf-8", exclude_characters="\x00"), max_size=20),
    min_size=1,
    max_size=4,
).map(tuple)
MAYBE_ABSENT = st.floats(allow_infinity=False, width=64)
STATE_ARRAYS = st.dictionaries(
    st.from_regex(r"[a-zé][a-z_.]{0,12}", fullmatch=True),
    arrays.arrays(
        st.sampled_from([np.float64, np.int64, np.uint64, np.bool_, np.float32, np.uint8]),
        arrays.array_shapes(min_dims=0, max_dims=3, min_side=0, max_side=4),
    ),
    max_size=4,
)


def ways(run: Path):
    """Yield the run through its journal and through RUN.h5."""
    with open_run(run) as opened:
        assert opened.state == "interrupted"
        yield opened
    with reopen(run, {}) as journal:
        finish(journal)
    with open_run(run) as opened:
        assert opened.state == "finished"
        yield opened


@pytest.mark.parametrize("generations", [0, 1, 5])
def test_every_field_comes_back_from_the_journal_and_from_the_archive(run, generations):
    write_journal(run, generations)
    for opened in ways(run):
        assert_holds(opened, generations)


def test_the_header_comes_back(run):
    write_journal(run, 1)
    expected = make_header()
    for opened in ways(run):
        for field in expected.__slots__:
            np.testing.assert_array_equal(
                getattr(opened.header, field), getattr(expected, field), err_msg=field
            )
        assert opened.header.study_text == expected.study_text


@settings(max_examples=12, deadline=None)
@given(names=NAMES, text=st.text(st.characters(codec="utf-8", exclude_characters="\x00")))
def test_any_text_comes_back(names, text):
    with tempfile.TemporaryDirectory() as folder:
        run = Path(folder) / "run é 100%#.h5"
        width = len(names)
        header = make_header(
            study_text=text, variable_names=names, lower=np.zeros(width), upper=np.ones(width)
        )
        with Journal.create(run, header) as journal:
            journal.append(make_record(0, designs=np.zeros((12, width))))
            finish(journal)
        with open_run(run) as opened:
            assert opened.header.variable_names == names
            assert opened.header.study_text == text


@settings(max_examples=12, deadline=None)
@given(
    quantities=arrays.arrays(np.float64, (3, 2, 3), elements=MAYBE_ABSENT),
    state=STATE_ARRAYS,
)
def test_any_numbers_come_back_bit_for_bit(quantities, state):
    with tempfile.TemporaryDirectory() as folder:
        run = Path(folder) / "run.h5"
        with Journal.create(run, make_header()) as journal:
            journal.append(make_record(0, 3, quantities=quantities, state_arrays=state))
        for opened in ways(run):
            assert opened.quantities.tobytes() == quantities.tobytes()
            _, found = opened.last_state()
            assert found.keys() == state.keys()
            for name, array in state.items():
                assert found[name].dtype == array.dtype
                assert found[name].shape == array.shape
                assert found[name].tobytes() == array.tobytes()


def test_a_study_without_constraints_is_stored(run):
    none = np.empty(0)
    header = make_header(
        constraint_names=(),
        constraint_kinds=(),
        constraint_units=(),
        constraint_limits=none,
        constraint_scales=none,
    )
    wide = np.empty((12, 0))
    with Journal.create(run, header) as journal:
        for generation in range(2):
            journal.append(
                make_record(
                    generation,
                    constraint_values=wide,
                    margins=wide,
                    search_constraints=wide,
                )
            )
        finish(journal)
    with open_run(run) as opened:
        assert opened.margins.shape == (24, 0)
        assert opened.header.constraint_names == ()


def test_a_run_where_every_design_failed_has_an_archive(run):
    absent = {
        "objectives": np.full((12, 2), np.nan),
        "margins": np.full((12, 3), np.nan),
        "quantities": np.full((12, 2, 3), np.nan),
        "section_quantities": np.full((12, 2), np.nan),
        "outcomes": np.full((12, 2), Outcome.NOT_EVALUATED),
        "design_outcomes": np.full(12, Outcome.NOT_A_SECTION),
        "violation": np.linspace(1.0, 2.0, 12),
    }
    with Journal.create(run, make_header()) as journal:
        journal.append(make_record(0, **absent))
        finish(journal)
    with open_run(run) as opened:
        status = opened.status()
        assert np.isnan(opened.objectives).all()
    assert status.failed == {"not_a_section": 12}
    assert status.feasible_share == 0.0


def test_generations_may_differ_in_size(run):
    sizes = [12, 7, 30, 1]
    with Journal.create(run, make_header()) as journal:
        for generation, size in enumerate(sizes):
            journal.append(make_record(generation, size))
        finish(journal)
    with open_run(run) as opened:
        assert opened.read("evaluations").tolist() == sizes
        assert opened.evaluations == sum(sizes)
        expected = np.concatenate([make_record(g, n).designs for g, n in enumerate(sizes)])
        np.testing.assert_array_equal(opened.designs, expected)
        np.testing.assert_array_equal(opened.read("generation_of"), np.repeat(np.arange(4), sizes))


def test_one_evaluation_is_read_by_its_row(run):
    write_journal(run, 3)
    with open_run(run) as opened:
        row = opened.evaluation(2 * 12 + 5)
    record = make_record(2)
    np.testing.assert_array_equal(row["designs"], record.designs[5])
    np.testing.assert_array_equal(row["quantities"], record.quantities[5])
    assert row["generation_of"] == 2


def test_blocks_laid_end_to_end_are_the_whole(run):
    write_journal(run, 3)
    with open_run(run) as opened:
        blocks = list(opened.blocks("designs", "violation", rows=7))
        whole = opened.designs
    assert [len(block["violation"]) for block in blocks] == [7, 7, 7, 7, 7, 1]
    np.testing.assert_array_equal(np.concatenate([b["designs"] for b in blocks]), whole)


def test_what_is_read_cannot_be_changed(run):
    write_journal(run, 1)
    with open_run(run) as opened, pytest.raises(ValueError, match="read-only"):
        opened.designs[0, 0] = 1.0


def test_sessions_tell_each_start_and_resume(run):
    write_journal(run, 2)
    with reopen(run, {"host": "second"}) as journal:
        journal.append(make_record(2))
        stop(journal)
    with reopen(run, {"host": "third"}) as journal:
        finish(journal)
    with open_run(run) as opened:
        sessions = opened.sessions()
    assert [s["first_generation"] for s in sessions] == [0, 2, 3]
    assert [s["provenance"]["host"] for s in sessions] == ["bench", "second", "third"]
