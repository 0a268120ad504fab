"""Room problem."""
