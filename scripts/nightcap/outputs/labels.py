"""Words in a drawing that do not cover each other."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from nightcap.geometry.curves import Floats

if TYPE_CHECKING:
    from matplotlib.axes import Axes

PLAIN = "black"
FONT = 7.0
"""Points."""
STEPS = ((0, 0), (0, 14), (0, -14), (34, 14), (-34, 14), (34, -14), (-34, -14), (0, 30), (60, 30), (-60, 30), (0, -30))
"""Where a label is tried, in turn, from the place that it names, points."""
Box = tuple[float, float, float, float]
"""Left, bottom, right, top, points."""


@dataclass
class Labels:
    """What has been written so far, so that nothing is written over it."""

    axes: Axes
    scale: float
    """Points on paper per metre."""
    taken: list[Box] = field(default_factory=list)

    def put(self, text: str, at: Floats, *, apart: bool = False, color: str = PLAIN) -> bool:
        """Writes a label at a place, m, or near it with a line to it; nothing, and False, where there is no room.

        apart : never on the place itself.
        """
        for step in STEPS[1:] if apart else STEPS:
            box = self._box(text, at, step)
            if not any(_meet(box, other) for other in self.taken):
                self.taken.append(box)
                self._write(text, at, step, color)
                return True
        return False

    def _box(self, text: str, at: Floats, step: tuple[int, int]) -> Box:
        x, y = at[0] * self.scale + step[0], at[1] * self.scale + step[1]
        half, height = 0.3 * FONT * len(text) + 2, 0.5 * FONT + 2
        return (x - half, y - height, x + half, y + height)

    def _write(self, text: str, at: Floats, step: tuple[int, int], color: str) -> None:
        self.axes.annotate(
            literal(text),
            xy=(float(at[0]), float(at[1])),
            xytext=step,
            textcoords="offset points",
            fontsize=FONT,
            color=color,
            fontweight="normal" if color == PLAIN else "bold",
            horizontalalignment="center",
            verticalalignment="center",
            bbox={"boxstyle": "round,pad=0.12", "facecolor": "white", "edgecolor": "none", "alpha": 0.85},
            arrowprops={"arrowstyle": "-", "color": color, "linewidth": 0.5, "shrinkB": 0} if any(step) else None,
            zorder=12,
        )


def _meet(one: Box, two: Box) -> bool:
    return one[0] < two[2] and two[0] < one[2] and one[1] < two[3] and two[1] < one[3]


def literal(text: str) -> str:
    """Text that is not read as a formula."""
    return text.replace("$", r"\$")
