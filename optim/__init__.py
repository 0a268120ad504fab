"""Sectionwright: a study file goes in at one end, documented wing sections come out at the other.

::

    study YAML -> study -> geometry -> aerodynamics -> problem -> search -> archive -> report
       text       Study     Section     SectionFlow   Evaluation  Generation   HDF5     front

The rooms stand in the order of that flow; a room imports only from rooms before it.
Importing this package loads nothing heavy.
"""

__version__ = "0.1.0"
__all__ = ["__version__"]
