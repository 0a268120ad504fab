"""A process of its own that writes a run and says on standard output what is acknowledged."""

import sys
from pathlib import Path

from archive_sample import make_header, make_record

from optim.archive.journal import Journal
from optim.archive.journal_file import journal_path
from optim.archive.reopen import reopen
from optim.archive.writer import finish


def main(run: Path, generations: int) -> None:
    """Go on with `run`, or begin it, to so many generations in all, then finish it."""
    known = run.exists() or journal_path(run).exists()
    journal = reopen(run, {}) if known else Journal.create(run, make_header())
    with journal:
        sys.stdout.write("open\n")
        sys.stdout.flush()
        for generation in range(journal.generations, generations):
            journal.append(make_record(generation))
            sys.stdout.write(f"{generation}\n")
            sys.stdout.flush()
        finish(journal)
    sys.stdout.write("finished\n")


if __name__ == "__main__":
    main(Path(sys.argv[1]), int(sys.argv[2]))
