"""Room aerodynamics."""
