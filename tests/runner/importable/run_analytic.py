"""Begin or go on with the analytic study in a process that can be killed: RUN.h5 [workers]."""

import sys
from pathlib import Path

import analytic_problem

from optim.archive.journal_file import journal_path
from optim.errors import StoppedEarlyError
from optim.runner.resume import resume_run
from optim.runner.start import SessionSettings, start_run

run = Path(sys.argv[1])
settings = SessionSettings(workers=int(sys.argv[2]))
study = analytic_problem.study(generations=40)
try:
    if run.exists() or journal_path(run).exists():
        resume_run(run, settings, build=analytic_problem.build_slow)
    else:
        start_run(study, run, settings, build=analytic_problem.build_slow)
except StoppedEarlyError as stopped:
    sys.stdout.write(f"{stopped}\n")
    sys.exit(3)
