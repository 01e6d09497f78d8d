"""Capacitance matrices of conductor cross-sections, every number between a
guaranteed lower and upper bound.
"""

__version__ = "0.1.0"
