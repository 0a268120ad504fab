"""The description of the archive for whoever reads it without this program.

Written from the layout: ``python -m optim.archive.guide > results/README.md``.
"""

from __future__ import annotations

import sys

from optim.archive.layout import (
    CLOCK_GROUPS,
    FIXED,
    FORMAT,
    FORMAT_VERSION,
    GROUPS,
    STATE_ARRAYS,
    Dataset,
    group_of,
)
from optim.archive.writer import GZIP_LEVEL, LEAST_CHUNK_BYTES
from optim.outcomes import Outcome

_TYPES = {"f8": "float64", "i8": "int64", "i1": "int8", "text": "UTF-8 text"}

_CLOCK = " and ".join(f"`/{name}`" for name in CLOCK_GROUPS)

_HEAD = f"""# Results

`sectionwright run` leaves its results here unless `--output` names another place. This page
describes the files, format {FORMAT_VERSION}, for whoever reads them without this program. It is
written from the code (`python -m optim.archive.guide > results/README.md`), and a test holds the
two together.

## The files of a run

| file | what it is |
|---|---|
| `RUN.h5` | the archive, HDF5: everything, once the run is finished or stopped |
| `RUN.h5.journal` | SQLite: everything, while the run is not finished; it goes only after \
`RUN.h5` has been written, read back, compared and synced |
| `RUN.h5.journal-wal`, `-shm` | SQLite's own, part of the journal while the run is going on or \
after it was killed: keep them together |
| `RUN.h5.journal-claim` | who writes the run; its lock dies with the process, so a file left \
behind is harmless |
| `RUN.h5.tmp`, `RUN.h5.journal.tmp` | a file that was being written when the process died: \
delete it |

A generation is recorded in one transaction and is on the disk (fsync) before the next begins, so
a run that is killed loses no more than the generation it was at. Every command that takes
`RUN.h5` also works when only the journal is there, and may be used while the run goes on. Where
both exist the journal counts. One process may write a run at a time. Keep a run on a local disk
while it goes on: locks and write-ahead files are not to be trusted on network file systems.

Nothing in these files is ever executed: numbers and texts only. A file of an older format is
read for ever; one of a newer format is refused.

## Reading it

```python
import h5py

with h5py.File("results/first-look.h5") as run:
    names = [name.decode() for name in run["objectives/name"]]
    feasible = run["evaluations/violation"][:] == 0.0
    objectives = run["evaluations/objectives"][:][feasible]

print(len(objectives), "feasible designs;", ", ".join(names))
```

- One row an evaluation in every dataset of `/evaluations`, in the order in which the search asked
  for them, failed and infeasible ones included. The row is the ID of `RUN.h5#ID`.
- A float is not-a-number only where its outcome says why or where its description says that it
  may be absent. It is never infinite, but for the search's own state.
- Whatever depends on the clock or the machine is under {_CLOCK}.
  All other datasets are equal, bit for bit, between two runs of one study and seed on one machine,
  whatever the number of workers, and whether or not they were killed and resumed.
- Every dataset has the attributes `unit`, `axes`, `description`, `absent` (when it may be
  not-a-number) and `sha256`: the digest of its bytes in C order followed by its NumPy type and
  shape, as in `<f8[240, 12]`. The root attribute `sha256` covers all other attributes. Every
  reading compares them.
- Texts are fixed-length UTF-8, padded with zero bytes. Datasets of rows are packed with gzip
  {GZIP_LEVEL} and shuffle; a chunk is one generation, or as many whole ones as make
  {LEAST_CHUNK_BYTES // 1024} kB.

## Attributes of the root

| attribute | meaning |
|---|---|
| `format` | `{FORMAT}` |
| `format_version` | {FORMAT_VERSION} |
| `written_by` | version of the program |
| `ending` | `finished`, or `stopped` where the run can be resumed |
| `generations`, `evaluations` | how many there are |
| `sha256` | digest over all objects and attributes |

## Outcomes

`/evaluations/outcomes` and `/evaluations/design_outcome` hold these codes; their attribute
`outcome_names` has the names.
"""


def guide() -> str:
    """Return the text of results/README.md."""
    parts = [_HEAD, _outcomes(), "\n## Datasets\n"]
    parts += [_group(name, sentence) for name, sentence in GROUPS.items()]
    return "\n".join(parts)


def _outcomes() -> str:
    rows = [f"| {o.value} | `{o.label}` | {o.sentence} |" for o in Outcome]
    return "\n".join(["| code | name | meaning |", "|---|---|---|", *rows])


def _group(name: str, sentence: str) -> str:
    rows = [_row(dataset) for dataset in FIXED if group_of(dataset.path) == name]
    if group_of(STATE_ARRAYS) == name:
        rows.append(
            f"| `{STATE_ARRAYS}*` | numbers | as the algorithm has them | "
            "| Arrays of the search's state, named by the algorithm. |"
        )
    head = [f"### /{name}", "", sentence, "", "| dataset | type | axes | unit | meaning |"]
    return "\n".join([*head, "|---|---|---|---|---|", *rows, ""])


def _row(dataset: Dataset) -> str:
    axes = ", ".join(dataset.axes) or "one value"
    meaning = dataset.description
    if dataset.absent:
        meaning += f" Not-a-number {dataset.absent}."
    cells = (f"`{dataset.path}`", _TYPES[dataset.dtype], axes, dataset.unit, meaning)
    # A bar would end the cell.
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |"


if __name__ == "__main__":
    sys.stdout.write(guide())
