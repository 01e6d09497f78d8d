"""What lies wholly outside of what is solved: beyond a symmetry line, below the ground plane, past the shield."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from nightcap.geometry.case import Case, GroundPlane, Shield
from nightcap.geometry.curves import Floats, Point
from nightcap.geometry.finding import Finding
from nightcap.geometry.painting import Drawing, Drawn, box
from nightcap.geometry.symmetry import SymmetryLine


def what_lies_outside(case: Case, drawing: Drawing) -> Iterator[Finding]:
    """Shapes that have no part in the problem, and lines that cut nothing."""
    tolerance = 16 * drawing.tolerance
    for number, line in enumerate(case.symmetry):
        yield from _idle_line(case, number, line)
        for drawn in _bodies(drawing):
            if _top(drawn)[line.axis] <= line.at + tolerance:
                what = "xy"[line.axis]
                text = (
                    f"lies beyond the symmetry line {what} = {line.at:g} m; what has {what} >= {line.at:g} m is solved"
                )
                yield Finding((drawn.key, str(line)), drawn.key, text, _middle(drawn))
    if isinstance(case.boundary, GroundPlane):
        for drawn in _bodies(drawing):
            if drawn.material is not None and _top(drawn)[1] <= case.boundary.at + tolerance:
                text = f"lies below the ground plane '{case.boundary.name}'"
                yield Finding((drawn.key, case.boundary.name), drawn.key, text, _middle(drawn))


def _idle_line(case: Case, number: int, line: SymmetryLine) -> Iterator[Finding]:
    if not isinstance(case.boundary, Shield):
        return
    low, high = box([case.boundary.shape.outline()])
    if not low[line.axis] < line.at < high[line.axis]:
        text = f"the line {'xy'[line.axis]} = {line.at:g} m does not cross the shield '{case.boundary.name}'"
        yield Finding((case.boundary.name, str(line)), f"symmetry[{number}]", text)


def _bodies(drawing: Drawing) -> Iterator[Drawn]:
    """Conductors and dielectrics without the coatings."""
    return (drawn for drawn in drawing.drawn if drawn.conductor is None or drawn.material is None)


def _top(drawn: Drawn) -> Floats:
    """(2,) the greatest x and y, m."""
    return box([drawn.outline])[1]


def _middle(drawn: Drawn) -> Point:
    """Middle of the box around a figure, m."""
    x, y = np.mean(box([drawn.outline]), axis=0).tolist()
    return (x, y)
