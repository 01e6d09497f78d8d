"""The same round wires as a case for the program and as wires for the multipole expansion."""

from __future__ import annotations

from collections.abc import Sequence

from multipoles import Wire

from nightcap.geometry.case import Boundary, Case, Coating, Conductor, Material, OpenSpace
from nightcap.geometry.shapes import Circle


def as_case(wires: Sequence[Wire], boundary: Boundary, background: float = 1.0) -> Case:
    """A case of these wires; in open space the last one is the reference."""
    conductors = tuple(
        Conductor(
            f"w{k}",
            Circle((wire.centre.real, wire.centre.imag), wire.radius),
            tuple(Coating(thickness, Material(permittivity)) for thickness, permittivity in wire.coatings),
        )
        for k, wire in enumerate(wires)
    )
    reference = conductors[-1].name if isinstance(boundary, OpenSpace) else boundary.name
    return Case("round-wires", "", conductors, boundary, reference, background=Material(background))
