"""Small cases, built in memory, that several tests use."""

from nightcap.geometry.case import Case, Coating, Conductor, Dielectric, Material, OpenSpace, Shield
from nightcap.geometry.shapes import Circle, Rectangle
from nightcap.geometry.strip import Strip

FOAM = Material(1.6, name="foam")
SOLID = Material(2.3, name="solid")


def two_wires(distance: float = 3.0, radius: float = 1.0) -> Case:
    """Two equal bare wires in open space."""
    wires = tuple(
        Conductor(name, Circle((x, 0.0), radius)) for name, x in (("one", -distance / 2), ("other", distance / 2))
    )
    return Case("two-wires", "", wires, OpenSpace(), "other")


def coax(inner: float = 1.0, outer: float = 2.0, offset: float = 0.0, coating: Coating | None = None) -> Case:
    """A round core, possibly coated and off centre, in a round shield."""
    core = Conductor("core", Circle((offset, 0.0), inner), (coating,) if coating else ())
    return Case("coax", "", (core,), Shield(Circle((0.0, 0.0), outer)), "shield")


def square_in_square(inner: float = 2.0, outer: float = 4.0) -> Case:
    """A square core in a square shield."""
    core = Conductor("core", Rectangle((0.0, 0.0), inner, inner))
    return Case("squares", "", (core,), Shield(Rectangle((0.0, 0.0), outer, outer)), "shield")


def touching_pair() -> Case:
    """Two coated wires that touch each other, and the shield, exactly."""
    wires = tuple(
        Conductor(name, Circle((x, 0.0), 0.25), (Coating(0.25, SOLID),)) for name, x in (("one", -0.5), ("other", 0.5))
    )
    return Case("touching", "", wires, Shield(Circle((0.0, 0.0), 1.0)), "shield")


def wire_on_board() -> Case:
    """A bare wire that rests on a board of another permittivity, in a box."""
    wire = Conductor("wire", Circle((0.0, 0.5), 0.5))
    board = Dielectric("board", Rectangle((0.0, -0.5), 6.0, 1.0), Material(4.4, name="board"))
    return Case("on-board", "", (wire,), Shield(Rectangle((0.0, 0.5), 6.0, 3.0)), "shield", (board,))


def foil_and_wire() -> Case:
    """A bent strip, partly on the edge of a film, and a wire, in a round shield."""
    foil = Conductor("foil", Strip(((-0.6, -0.1), (-0.3, 0.1), (0.4, 0.1))))
    wire = Conductor("wire", Circle((0.2, 0.5), 0.1))
    film = Dielectric("film", Rectangle((0.0, 0.05), 0.8, 0.1), SOLID)
    return Case("foil", "Foil and wire", (foil, wire), Shield(Circle((0.0, 0.0), 1.0)), "shield", (film,))
