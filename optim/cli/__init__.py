"""The thin edge: words typed in a terminal -> rooms -> words on a terminal.

``app.main`` is the command; the commands stand in ``studies`` (template, check, schema), ``runs``
(run, resume, status, front) and ``sections`` (analyse, fit, export). Each imports what it needs
when it is called, so that a question about an archive waits for no compiler.
"""
