"""Room search."""
