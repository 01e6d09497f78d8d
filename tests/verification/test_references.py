"""The references against digits recomputed by other means, before anything is compared with them."""

from collections.abc import Callable

import numpy as np
import pytest
from multipoles import (
    InOpenSpace,
    InShield,
    Layered,
    OverGroundedSlab,
    OverHalfSpace,
    OverPlane,
    OverSlab,
    Wire,
    capacitance,
)
from numpy.testing import assert_allclose
from references import (
    eccentric_coax,
    layered_coax,
    square_in_square,
    two_wires,
    two_wires_by_ratio,
    wire_over_plane,
)
from scipy.integrate import quad

CLOSED_FORMS = [
    # formula, digits, source of the digits
    (lambda: two_wires(3.0, 1.0), 3.26425130263650, "Smythe"),
    (lambda: two_wires(5.0, 1.0, 2.0), 2.74083864335303, "Smythe"),
    (lambda: two_wires_by_ratio(0.5), 3.26425130263650, "Smythe"),
    (lambda: wire_over_plane(2.0, 1.0), 4.77098419156090, "Smythe"),
    (lambda: layered_coax((1.0, 2.0), (1.0,)), 9.06472028365439, "Maxwell, Treatise"),
    (lambda: layered_coax((1.0, 2.0, 4.0), (2.25, 1.0)), 6.27557558099150, "series capacitors"),
    (lambda: eccentric_coax(1.0, 4.0, 2.0), 5.89012307048722, "Smythe"),
    (lambda: square_in_square(0.5), 10.2340925693680517, "Bowman 1935"),
    (lambda: square_in_square(0.2), 4.13448702423409, "Bowman 1935"),
]


@pytest.mark.parametrize(("formula", "digits", "source"), CLOSED_FORMS)
def test_closed_forms(formula: Callable[[], float], digits: float, source: str) -> None:
    assert_allclose(formula(), digits, rtol=1e-13, err_msg=source)


@pytest.mark.parametrize("ratio", [0.8, 0.9, 0.95])
def test_squares_with_a_narrow_gap(ratio: float) -> None:
    """Four plates as wide as the inner side, and a right-angled corner counts as 0.559 of a square.

    Source: common practice for the sheet resistance of a bend, the conjugate problem; 1 - 2 ln(2) / pi to all digits.
    """
    plates = 4 * ratio / ((1 - ratio) / 2)
    corners = 4 * (1 - 2 * np.log(2) / np.pi)
    assert_allclose(corners, 4 * 0.559, rtol=1e-3)
    assert_allclose(square_in_square(ratio) - plates, corners, rtol=1e-6)


def test_three_cores_in_a_shield() -> None:
    """Digits: independent expansions with 40 and 60 harmonics."""
    wires = tuple(Wire(0.5 * np.exp(2j * np.pi * k / 3), 0.25) for k in range(3))
    diagonal, other = 6.7261973354383, -1.1436395890287
    expected = np.full((3, 3), other) + (diagonal - other) * np.eye(3)
    assert_allclose(capacitance(wires, InShield(1.0)), expected, rtol=1e-13)


def test_coated_pair_in_open_air() -> None:
    """Digits: an independent expansion."""
    wires = tuple(Wire(x + 0j, 1.0, ((0.4, 3.5),)) for x in (-1.5, 1.5))
    assert_allclose(capacitance(wires, InOpenSpace()), [[5.3820066094417]], rtol=1e-13)


def test_coated_wire_over_ground() -> None:
    """Digits: an independent expansion."""
    assert_allclose(capacitance((Wire(2j, 1.0, ((0.5, 3.0),)),), OverPlane()), [[6.3942903176805]], rtol=1e-13)


def test_inductance_of_a_pair_in_a_shield() -> None:
    """L / mu0 is the inverse of C / eps0. Paul, Analysis of Multiconductor Transmission Lines, 2007, p. 175."""
    L = np.linalg.inv(capacitance((Wire(-25 + 0j, 2.0), Wire(25 + 0j, 2.0)), InShield(50.0)))
    assert_allclose(L, [[0.466308893202, 0.035310791728], [0.035310791728, 0.466308893202]], rtol=1e-11)


def test_ribbon_cable() -> None:
    """Printed by Paul 2007 for a three-wire ribbon cable, pF/m (geometry from memory), order: centre, outer."""
    eps0 = 8.8541878188
    insulated = tuple(Wire(x + 0j, 7.5, ((10.0, 3.5),)) for x in (0.0, 50.0, -50.0))
    printed = [[37.432, -18.716], [-18.716, 24.982]]
    assert_allclose(eps0 * capacitance(insulated, InOpenSpace()), printed, rtol=3e-5)
    bare = tuple(Wire(w.centre, 7.5) for w in insulated)
    printed = [[22.49364, -11.24682], [-11.24682, 16.58116]]
    assert_allclose(eps0 * capacitance(bare, InOpenSpace()), printed, rtol=1e-6)


@pytest.mark.parametrize("excess", [0.003, 0.05, 1.0, 20.0])
def test_multipoles_of_two_bare_wires(excess: float) -> None:
    """Source: Smythe's closed form."""
    at = 1.0 + excess
    C = capacitance((Wire(-at + 0j, 1.0), Wire(at + 0j, 1.0)), InOpenSpace())
    assert_allclose(C, [[two_wires_by_ratio(excess)]], rtol=1e-11)


@pytest.mark.parametrize("permittivity", [1.0, 2.5, 10.0])
def test_multipoles_of_coatings_without_contrast(permittivity: float) -> None:
    """A coat of the background's permittivity changes nothing: C is that of bare wires, times the permittivity."""
    coat = ((0.1, permittivity), (0.2, permittivity))
    wires = (Wire(-0.55 + 0.3j, 0.25, coat), Wire(0.55 - 0.1j, 0.15, coat))
    bare = tuple(Wire(w.centre, w.radius) for w in wires)
    with_coats = capacitance(wires, InShield(1.3), background=permittivity)
    assert_allclose(with_coats, permittivity * capacitance(bare, InShield(1.3)), rtol=1e-11)


def test_multipoles_over_a_plane_by_explicit_images() -> None:
    """Two wires over a plane are half of four wires in open space, driven oddly (method of images)."""
    coat = ((0.2, 4.0), (0.1, 2.0))
    over = (Wire(-0.7 + 1.1j, 0.5, coat), Wire(0.9 + 1.4j, 0.4, coat))
    images = tuple(Wire(w.centre.conjugate(), w.radius, w.coatings) for w in over)
    four = capacitance((*over, *images), InOpenSpace())
    full = np.block([[four, -four.sum(1)[:, None]], [-four.sum(0), four.sum()]])
    odd = np.vstack([np.eye(2), -np.eye(2)])
    assert_allclose(capacitance(over, OverPlane()), odd.T @ full @ odd / 2, rtol=1e-11)


def test_multipoles_of_an_eccentric_coax() -> None:
    """Source: Smythe. A coat raises C, but less than if all of it were metal."""
    shell = InShield(4.0)
    assert_allclose(capacitance((Wire(2 + 0j, 1.0),), shell), [[eccentric_coax(1.0, 4.0, 2.0)]], rtol=1e-12)
    coated = capacitance((Wire(2j, 1.0, ((0.5, 3.0),)),), shell)[0, 0]
    assert eccentric_coax(1.0, 4.0, 2.0) < coated < eccentric_coax(1.5, 4.0, 2.0)


def test_multipoles_of_layered_coax() -> None:
    """Source: series capacitors."""
    C = capacitance((Wire(0j, 1.0, ((1.0, 2.25),)),), InShield(4.0))
    assert_allclose(C, [[layered_coax((1.0, 2.0, 4.0), (2.25, 1.0))]], rtol=1e-13)


@pytest.mark.parametrize("around", [OverHalfSpace(4.0), OverSlab(0.7, 4.0), OverGroundedSlab(0.7, 4.0)])
def test_images_by_the_fields_of_plane_waves(around: Layered) -> None:
    """A unit line charge at height 0.4: what comes back to (0.3, 0.5), by images and by matching waves e^(-ky) at each
    boundary, which is solved here as a linear system for every k. Source: separation of variables."""
    x, y = 0.3, 0.5 + 0.4
    field = sum(f * x / (x**2 + (y - shift) ** 2) for f, shift in around.images(1.0))
    quadrature = quad(lambda k: _sent_back(around, k) * np.exp(-k * y) * np.sin(k * x), 0, 60, limit=400, epsabs=1e-13)
    assert_allclose(field, quadrature[0], rtol=1e-9)


def _sent_back(around: Layered, k: float) -> float:
    """The answer r to a wave e^(ky): above e^(ky) + r e^(-ky), in the slab a e^(ky) + b e^(-ky), below c e^(ky)."""
    eps = around.permittivity
    if isinstance(around, OverHalfSpace):
        r, _ = np.linalg.solve([[1, -1], [-1, -eps]], [-1, -1])
        return float(r)
    up, down = np.exp(-k * around.thickness), np.exp(k * around.thickness)
    top = [[1, -1, -1], [-1, -eps, eps]]  # continuous potential and flux at y = 0
    grounded, open_below = [0, up, down], [0, (eps - 1) * up, -(eps + 1) * down]  # potential zero; slope k times it
    bottom = grounded if isinstance(around, OverGroundedSlab) else open_below
    return float(np.linalg.solve([*top, bottom], [-1, -1, 0])[0])


def test_layers_without_contrast_and_with_all_of_it() -> None:
    """The background's permittivity in the slab changes nothing; an endless one makes it a plane (common practice)."""
    pair = (Wire(-0.7 + 1.1j, 0.5, ((0.2, 4.0),)), Wire(0.9 + 1.4j, 0.4))
    free = capacitance(pair, InOpenSpace())
    assert_allclose(capacitance(pair, OverHalfSpace(1.0)), free, rtol=1e-12)
    assert_allclose(capacitance(pair, OverSlab(0.3, 1.0)), free, rtol=1e-12)
    shifted = tuple(Wire(w.centre + 0.3j, w.radius, w.coatings) for w in pair)
    assert_allclose(capacitance(pair, OverGroundedSlab(0.3, 1.0)), capacitance(shifted, OverPlane()), rtol=1e-11)
    over = capacitance(pair, OverPlane())
    floating = over[0, 0] - over[0].sum() ** 2 / over.sum()  # the pair alone, the plane without charge
    assert_allclose(capacitance(pair, OverHalfSpace(1e9)), [[floating]], rtol=1e-8)
