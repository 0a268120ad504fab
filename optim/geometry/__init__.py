"""Room geometry."""
