"""Room validation."""
