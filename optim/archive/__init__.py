"""Room archive."""
