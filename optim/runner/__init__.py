"""Room runner."""
