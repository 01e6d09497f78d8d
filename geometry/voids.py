"""Voids between the parts of one conductor: without field, and so as good as metal."""

from __future__ import annotations

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from nightcap.geometry.arrangement import Arrangement
from nightcap.geometry.case import Case, Material
from nightcap.geometry.curves import Ints
from nightcap.geometry.shapes import Union

Content = int | Material | str
"""What fills a face: the number of a conductor, a material, or what lies outside the domain."""


def with_filled_voids(case: Case, plane: Arrangement, contents: list[Content]) -> list[Content]:
    """The contents of the faces left of each loop, those filled with their conductor that a union encloses alone."""
    unions = {k for k, conductor in enumerate(case.conductors) if isinstance(conductor.shape, Union)}
    if not unions:
        return contents
    space = _spaces(plane, contents)
    around: dict[int, set[Content]] = {}
    for half in range(2 * len(plane.pieces)):
        here, there = plane.loop_of[half], plane.loop_of[half ^ 1]
        if isinstance(contents[here], Material) and not isinstance(contents[there], Material):
            around.setdefault(int(space[here]), set()).add(contents[there])
    voids = {k: next(iter(owners)) for k, owners in around.items() if len(owners) == 1 and owners <= unions}
    return [
        voids.get(int(space[k]), content) if isinstance(content, Material) else content
        for k, content in enumerate(contents)
    ]


def _spaces(plane: Arrangement, contents: list[Content]) -> Ints:
    """(loops,) a number for each connected space of dielectrics, whatever their materials."""
    pairs = [(k, outer) for k, outer in plane.holder.items() if outer is not None]
    for half in range(0, 2 * len(plane.pieces), 2):
        here, there = plane.loop_of[half], plane.loop_of[half ^ 1]
        if isinstance(contents[here], Material) and isinstance(contents[there], Material):
            pairs.append((here, there))
    size = len(plane.loops)
    ends = np.array(pairs, dtype=np.int64).reshape(-1, 2)
    graph = coo_array((np.ones(len(ends)), ends.T), shape=(size, size))
    return np.asarray(connected_components(graph, directed=False)[1], dtype=np.int64)
