"""The published measurements that travel with the tool -> measured beside computed, case by case.

Each source is one record in ``data/``: report, table or figure, status, terms of use, conditions,
the error allowed to each quantity with its reason, and the columns of its numbers beside it. What
is not plainly free to hand on is not here; ``data/left_out.toml`` says which sets those are and
why.

record.read_record, record.Record
    The record of a source and its columns.
case.Case, case.Comparison
    One quantity measured and computed, with its verdict; all of a source, with its panels to draw.
flight.Model
    A section as it was measured, flown at the conditions of the test.
prescribed.march
    A turbulent layer along edge speeds that are given.
suite.run
    All sources, on worker processes, in a fixed order.
sources
    One module a source: which quantities, and how they are computed.
"""
