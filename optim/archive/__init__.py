"""Study and generations -> a journal while a run goes on, one HDF5 file for ever.

A store: it knows arrays and texts, not physics. In: a `RunHeader`, then a `GenerationRecord` a
generation (`Journal`). Out: a `Run` (`optim.archive.reader.open_run`). What is where stands in
`optim.archive.layout`.
"""

from optim.archive.records import GenerationRecord, RunHeader

__all__ = ["GenerationRecord", "RunHeader"]
