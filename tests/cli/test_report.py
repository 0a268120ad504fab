"""The command that writes the page."""

import pytest


@pytest.fixture
def flown_in_closed_form(closed_form, monkeypatch):
    monkeypatch.setattr("optim.cli.page.prepare_kernels", lambda: None)
    return closed_form


@pytest.mark.usefixtures("flown_in_closed_form")
class TestReport:
    """`sectionwright report RUN.h5`."""

    def test_page_is_written_where_it_is_asked_for(self, command, run_file, tmp_path):
        page = tmp_path / "page.html"
        done = command("report", run_file, "--output", page)
        assert done.code == 0
        assert done.out == ""
        assert f"{page} holds everything" in done.err
        assert "paper-plane" in page.read_text(encoding="utf-8")

    def test_page_lies_beside_the_run_otherwise(self, command, recorded_run, tmp_path):
        path = recorded_run.record(tmp_path / "night.h5", generations=1)
        assert command("report", path, "--quiet").err == ""
        assert (tmp_path / "night.html").exists()

    def test_finalists_are_named_by_their_ids(self, command, run_file, tmp_path):
        page = tmp_path / "page.html"
        done = command("report", run_file, "--output", page, "--finalists", "#0,7x")
        assert done.code == 2
        assert done.err == (
            "sectionwright: --finalists: accepted are the IDs of designs, such as 7,112.\n"
        )
        done = command("report", run_file, "--output", page, "--finalists", "#9999")
        assert done.code == 2
        assert "does not hold #9999" in done.err
        assert not page.exists()

    def test_missing_run_is_refused(self, command, tmp_path):
        done = command("report", tmp_path / "no.h5")
        assert done.code == 2
        assert "no such run" in done.err
