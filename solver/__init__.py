"""Meshes into fields, fields into bracketed capacitance matrices. Knows no file and no terminal."""
