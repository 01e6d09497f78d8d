"""Regular arrangements: counts, distances, and what touches what."""

import math
from itertools import combinations

import pytest
from numpy.testing import assert_allclose

from nightcap.geometry.sites import hexagonal_sites, layered_sites, ring_sites, row_sites, touching_ring_radius


def nearest_distance(sites: list[tuple[float, float]]) -> float:
    return min(math.dist(a, b) for a, b in combinations(sites, 2))


@pytest.mark.parametrize(("shells", "count"), [(1, 7), (2, 19), (3, 37), (4, 61), (8, 217)])
def test_whole_hexagonal_shells_are_round_and_close(shells: int, count: int) -> None:
    sites = hexagonal_sites(count, 2.0)
    assert len(set(sites)) == count
    assert_allclose(nearest_distance(sites), 2.0, rtol=1e-13)
    assert_allclose(max(math.hypot(*site) for site in sites), 2.0 * shells, rtol=1e-13)
    assert_allclose([sum(x) for x in zip(*sites, strict=True)], [0.0, 0.0], atol=1e-12)


@pytest.mark.parametrize("count", [1, 2, 3, 5, 8, 20, 100])
def test_part_of_a_hexagonal_bundle_has_so_many_sites(count: int) -> None:
    assert len(hexagonal_sites(count, 1.0)) == count


@pytest.mark.parametrize("count", [2, 3, 4, 6, 12])
def test_ring_of_touching_wires(count: int) -> None:
    sites = ring_sites(count, touching_ring_radius(count, 0.7), first=0.3)
    assert_allclose(nearest_distance(sites), 0.7, rtol=1e-13)
    assert_allclose(math.atan2(sites[0][1], sites[0][0]), 0.3, rtol=1e-13)


def test_row_lies_about_the_origin() -> None:
    assert_allclose(row_sites(4, 2.0), [(-3, 0), (-1, 0), (1, 0), (3, 0)], rtol=1e-15)


def test_layers_touch_the_one_below() -> None:
    """Six wires upon an equal one, twelve thinner upon these."""
    wires = layered_sites(2.0, [(6, 2.0), (12, 1.0)])
    centres, radii = zip(*wires, strict=True)
    assert len(wires) == 19
    assert_allclose([math.hypot(*at) for at in centres], [0] + [2.0] * 6 + [3.5] * 12, rtol=1e-13)
    assert_allclose(radii, [1.0] * 7 + [0.5] * 12, rtol=1e-15)
