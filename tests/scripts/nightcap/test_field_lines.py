import numpy as np
import pytest
from numpy.testing import assert_allclose
from samples import foil_and_wire
from stand_ins import open_pair, screened_pair

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.curves import Floats
from nightcap.outputs.field_lines import field_lines, flux_sheet, unfolded
from nightcap.solver.solve import solve


def ring(around: int = 48, across: int = 6) -> tuple[Floats, Floats]:
    """A ring 1 < r < 2 in triangles, corners (T, 3, 2), and its flux function theta, cut at 1 rad and at r = 1.5."""
    cells = []
    for i in range(around):
        for j in range(across):
            square = [(i, j), (i + 1, j), (i + 1, j + 1), (i, j + 1)]
            cells += [[square[0], square[1], square[2]], [square[0], square[2], square[3]]]
    polar = np.array(cells, dtype=float)
    theta, r = 1.0 + polar[..., 0] * 2 * np.pi / around, 1.0 + polar[..., 1] / across
    beyond = r.mean(axis=1, keepdims=True) > 1.5
    return np.stack([r * np.cos(theta), r * np.sin(theta)], axis=-1), theta + 0.7 * beyond


def test_lines_of_a_ring_are_radii_at_equal_angles_also_across_the_cut() -> None:
    corners, flux = ring()
    sheet = flux_sheet(corners, flux, np.zeros(len(corners), dtype=bool), None, 1.0)
    inside = np.hypot(*corners.transpose(2, 0, 1)) < 1 + 1e-9
    surface = (inside & np.roll(inside, -1, axis=1)).reshape(-1)
    lines = field_lines(sheet, surface, 12)
    assert len(lines) == 12
    angles = []
    for line in lines:
        assert_allclose(np.hypot(*line[[0, -1]].T), [1.0, 2.0], rtol=3e-3)
        angle = np.unwrap(np.arctan2(line[:, 1], line[:, 0]))
        assert np.ptp(angle) < 0.02
        angles.append(angle[0] % (2 * np.pi))
    assert_allclose(np.diff(np.sort(angles)), np.pi / 6, rtol=0.02)


@pytest.mark.parametrize("count", [8, 31])
def test_lines_of_an_open_pair_run_from_wire_to_wire_through_the_far_sheet(count: int) -> None:
    """Field lines of two wires are circles through the two line charges, at +-sqrt(1.5^2 - 1) (Smythe)."""
    _, layout = open_pair()
    sample = solve(layout, 1e-4).fields.sample(8)
    corners = sample.points[sample.triangles]
    sheet = flux_sheet(corners, sample.flux[0][sample.triangles], sample.far, layout.rim, layout.size)
    charged = sample.potential[0][sample.triangles] > 1 - 1e-6
    surface = (charged & np.roll(charged, -1, axis=1)).reshape(-1) & (sheet.neighbour < 0)
    lines = field_lines(sheet, surface, count)
    ends = np.concatenate([line[[0, -1]] for line in lines])
    on_wires = [np.abs(np.hypot(ends[:, 0] - x, ends[:, 1]) - 1.0) < 1e-2 for x in (-1.5, 1.5)]
    assert [int(hits.sum()) for hits in on_wires] == [count, count]
    charge = np.sqrt(1.25)
    for line in lines:
        x, y = line[np.hypot(*line.T) < 20].T
        angle = np.arctan2(y, x - charge) - np.arctan2(y, x + charge)  # constant on such a circle
        assert_allclose(np.exp(1j * (angle - angle[0])), 1.0, atol=0.02)


def test_inversion_is_its_own_inverse_and_keeps_the_rim() -> None:
    rim = ((0.5, -1.0), 2.0)
    points = np.array([[1.0, 0.0], [2.5, -1.0], [-3.0, 4.0]])
    assert_allclose(unfolded(unfolded(points, rim), rim), points, rtol=1e-14, atol=1e-15)
    assert_allclose(unfolded(points, rim)[1], points[1], rtol=1e-14)


def test_lines_in_a_screen_start_on_the_driven_wire_only() -> None:
    _, layout = screened_pair()
    sample = solve(layout, 1e-4).fields.sample(6)
    corners = sample.points[sample.triangles]
    sheet = flux_sheet(corners, sample.flux[0][sample.triangles], sample.far, layout.rim, layout.size)
    charged = sample.potential[0][sample.triangles] > 1 - 1e-6
    surface = (charged & np.roll(charged, -1, axis=1)).reshape(-1) & (sheet.neighbour < 0)
    starts = np.array([line[0] for line in field_lines(sheet, surface, 20)])
    assert_allclose(np.hypot(starts[:, 0] + 0.6e-3, starts[:, 1]), 0.25e-3, rtol=1e-2)


def test_lines_start_on_both_sides_of_a_strip_and_none_passes_through() -> None:
    """On which side a line starts shows in where its second point is."""
    layout = build_layout(foil_and_wire())
    sample = solve(layout, 1e-4).fields.sample(6)
    corners = sample.points[sample.triangles]
    flux, places = sample.flux[1][sample.triangles], sample.place[sample.triangles]  # the wire is charged
    sheet = flux_sheet(corners, flux, sample.far, layout.rim, layout.size, places)
    charged = sample.potential[1][sample.triangles] > 1 - 1e-6
    surface = (charged & np.roll(charged, -1, axis=1)).reshape(-1) & (sheet.neighbour < 0)
    for line in field_lines(sheet, surface, 40):
        assert_allclose(np.hypot(*(line[0] - [0.2, 0.5])), 0.1, rtol=1e-2)
        (x0, x1), (y0, y1) = (np.stack([part[:-1], part[1:]]) for part in (line[:, 0], line[:, 1] - 0.1))
        crossing = (np.minimum(y0, y1) < -1e-9) & (np.maximum(y0, y1) > 1e-9)
        assert not (crossing & (np.minimum(x0, x1) > -0.3) & (np.maximum(x0, x1) < 0.4)).any()
    grown_together = flux_sheet(corners, flux, sample.far, layout.rim, layout.size)
    assert (grown_together.neighbour < 0).sum() < (sheet.neighbour < 0).sum()

    flux, charged = sample.flux[0][sample.triangles], sample.potential[0][sample.triangles] > 1 - 1e-6
    sheet = flux_sheet(corners, flux, sample.far, layout.rim, layout.size, places)
    surface = (charged & np.roll(charged, -1, axis=1)).reshape(-1) & (sheet.neighbour < 0)
    lines = field_lines(sheet, surface, 40)
    level = [line for line in lines if abs(line[0, 1] - 0.1) < 1e-9]
    upwards = [line[1, 1] > line[0, 1] for line in level]
    assert 5 < sum(upwards) < len(level) - 5
