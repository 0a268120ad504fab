"""The overnight loop: a study goes in, an archived run comes out, and nothing recorded is lost.

``start.start_run`` begins a run, ``resume.resume_run`` goes on with one; both tell a listener the
events of ``events``. The loop itself is ``driver``, the worker processes are ``executors``.
Import the modules by name: this door loads nothing.
"""
