"""Commands about a run: run, resume, status, front."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from optim.cli.console import duration, failures, misuse, say, show
from optim.cli.output import number, write_json
from optim.cli.studies import AsJson, Plot, StudyFile, faults_located
from optim.errors import Fault, InputError, StoppedEarlyError

if TYPE_CHECKING:
    from optim.archive.reader import RunStatus
    from optim.runner.events import Listener
    from optim.runner.start import SessionSettings
    from optim.search.termination import Ending

RunFile = Annotated[Path, typer.Argument(metavar="RUN.h5", help="The archive of the run.")]
Workers = Annotated[
    int | None, typer.Option(min=1, help="Worker processes; all processors unless given.")
]
Generations = Annotated[int | None, typer.Option(min=1, help="Generations in all.")]
Quiet = Annotated[bool, typer.Option("--quiet", help="No progress on standard error.")]


def _time_of_day(text: str | None) -> str | None:
    """Return the text if it is a time of day."""
    from optim.search.termination import next_time_of_day  # noqa: PLC0415

    if text is not None:
        try:
            next_time_of_day(text, datetime.now().astimezone())
        except ValueError as error:
            raise misuse(f"--until: {error}") from error
    return text


Until = Annotated[
    str | None,
    typer.Option(metavar="HH:MM", callback=_time_of_day, help="End by this time of day."),
]


def run(
    study_file: StudyFile,
    output: Annotated[
        Path | None,
        typer.Option(metavar="RUN.h5", help="The archive; results/NAME.h5 unless given."),
    ] = None,
    workers: Workers = None,
    generations: Generations = None,
    seed: Annotated[int | None, typer.Option(min=0, help="In place of the study's seed.")] = None,
    until: Until = None,
    *,
    quiet: Quiet = False,
) -> None:
    """Run a study and archive every evaluation."""
    from optim.problem.problem import Problem  # noqa: PLC0415
    from optim.runner.start import start_run, with_search  # noqa: PLC0415
    from optim.study.load import load_study  # noqa: PLC0415

    study = load_study(study_file)
    archive = Path("results") / f"{study.study}.h5" if output is None else output
    _refuse_existing(archive)
    for warning in study.warnings:
        say(f"warning: {warning}")
    with faults_located(study):
        Problem.from_study(study)
        _make_folder(archive.parent)
        settings = _settings(workers, generations, until)
        changed = study if seed is None else with_search(study, seed=seed)
        _sitting(
            archive,
            lambda listener: start_run(changed, archive, settings, listener),
            quiet=quiet,
        )


def resume(
    run_file: RunFile,
    generations: Generations = None,
    workers: Workers = None,
    until: Until = None,
    *,
    quiet: Quiet = False,
) -> None:
    """Go on with a run that was stopped or killed, or add generations to one that is done."""
    from optim.runner.resume import resume_run  # noqa: PLC0415

    settings = _settings(workers, generations, until)
    _sitting(run_file, lambda listener: resume_run(run_file, settings, listener), quiet=quiet)


def _settings(workers: int | None, generations: int | None, until: str | None) -> SessionSettings:
    from optim.runner.executors import processors  # noqa: PLC0415
    from optim.runner.start import SessionSettings  # noqa: PLC0415

    return SessionSettings(workers or processors(), generations, until)


def _sitting(archive: Path, work: Callable[[Listener], Ending], *, quiet: bool) -> None:
    """Do one sitting of a run with its progress shown, and say what there is at its end."""
    from optim.cli.progress import progress  # noqa: PLC0415

    try:
        with progress(quiet=quiet) as listener:
            ending = work(listener)
    except KeyboardInterrupt:
        raise StoppedEarlyError(
            f"Stopped at once; every generation that was shown is recorded. "
            f"Go on with: sectionwright resume {archive}"
        ) from None
    if not quiet:
        say(f"{ending.sentence} {archive} holds everything.")
        say(f"Look at it with: sectionwright front {archive}")


def _refuse_existing(archive: Path) -> None:
    journal = archive.with_name(f"{archive.name}.journal")
    if archive.exists() or journal.exists():
        message = (
            f"the run exists and is never overwritten; accepted is another name with --output, "
            f"or going on with it: sectionwright resume {archive}"
        )
        raise InputError([Fault(message, file=str(archive))])


def _make_folder(folder: Path) -> None:
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        message = f"the folder cannot be made ({error.strerror}); accepted is another --output."
        raise InputError([Fault(message, file=str(folder))]) from error


def status(run_file: RunFile, *, as_json: AsJson = False) -> None:
    """Say how far a run is: while it goes on, after a crash, at its end."""
    from optim.archive.reader import open_run  # noqa: PLC0415

    with open_run(run_file) as opened:
        found = opened.status()
        remaining = _remaining(opened.header.resolved_text, opened.read("hypervolume"), found)
    document = {
        "state": found.state,
        "process": None if found.process is None else str(found.process),
        "generation": found.generation,
        "evaluated": found.evaluated,
        "failed": found.failed,
        "feasible_share": found.feasible_share,
        "hypervolume": found.hypervolume,
        "points_per_second": found.points_per_second,
        "elapsed_s": found.elapsed_s,
        "remaining_s": remaining,
    }
    if as_json:
        write_json(document)
    else:
        show(_status_text(run_file, document))


def _remaining(study_text: str, hypervolumes: Any, found: RunStatus) -> float | None:  # noqa: ANN401
    """Return the time that a running run may still take by its study; None if it does not run."""
    import time  # noqa: PLC0415

    from optim.search.termination import Limits, Progress  # noqa: PLC0415
    from optim.study.load import parse_study  # noqa: PLC0415

    if found.state != "running":
        return None
    search = parse_study(study_text).search
    limits = Limits(
        generations=search.generations, evaluations=search.evaluations, wall_time=search.wall_time
    )
    return limits.remaining(
        Progress(found.evaluated, found.elapsed_s, time.time(), 0.0, hypervolumes.tolist())
    )


_STATES = {
    "running": "running",
    "stopped": "stopped; go on with: sectionwright resume {}",
    "finished": "finished",
    "interrupted": "interrupted, its process died; go on with: sectionwright resume {}",
}


def _status_text(run_file: Path, document: dict[str, Any]) -> str:
    share = document["feasible_share"]
    lines = [
        f"{run_file}: {_STATES[document['state']].format(run_file)}",
        f"{document['generation']} generations, {document['evaluated']} designs, "
        f"{failures(document['failed'])}",
        f"feasible {'-' if share is None else f'{100.0 * share:.0f} %'}, "
        f"hypervolume {number(document['hypervolume'], '.6g')}",
        f"{number(document['points_per_second'], '.0f')} points/s over "
        f"{duration(document['elapsed_s'])}",
    ]
    if document["process"] is not None:
        lines.append(f"written by {document['process']}")
    if document["remaining_s"] is not None:
        lines.append(f"at most {duration(document['remaining_s'])} left")
    return "\n".join(lines)


def front(
    run_file: RunFile,
    study_file: Annotated[
        Path | None,
        typer.Option(
            "--study", metavar="OTHER.yaml", help="Judge the archive by another study's limits."
        ),
    ] = None,
    *,
    as_json: AsJson = False,
    as_csv: Annotated[
        bool, typer.Option("--csv", help="One row a design on standard output.")
    ] = False,
    plot: Plot = None,
) -> None:
    """Show the feasible designs that no other feasible design beats in everything."""
    from optim.archive.reader import open_run  # noqa: PLC0415
    from optim.cli.front_text import front_rows, front_text  # noqa: PLC0415
    from optim.cli.output import write_csv  # noqa: PLC0415
    from optim.report.front import front_document  # noqa: PLC0415
    from optim.report.judgement import as_recorded  # noqa: PLC0415

    if as_json and as_csv:
        raise misuse("accepted is one of --json and --csv.")
    other = None
    if study_file is not None:
        from optim.study.load import load_study  # noqa: PLC0415

        other = load_study(study_file)
    with open_run(run_file) as opened:
        if other is None:
            judgement = as_recorded(opened)
        else:
            from optim.report.rejudged import rejudged  # noqa: PLC0415

            with faults_located(other):
                judgement = rejudged(opened, other)
        document = front_document(opened, judgement)
    if plot is not None:
        from optim.report.figures import save  # noqa: PLC0415
        from optim.report.front_figure import front_figure  # noqa: PLC0415

        save(front_figure(judgement), plot)
        say(f"{plot} is drawn.")
    if as_json:
        write_json(document)
    elif as_csv:
        write_csv(front_rows(document))
    else:
        show(front_text(document, judgement.kept(), run_file))


COMMANDS: tuple[Callable[..., None], ...] = (run, resume, status, front)
