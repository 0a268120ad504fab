"""Room study."""
