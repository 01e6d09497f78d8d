"""The small picture of a case that stands beside its text in the reference."""

from __future__ import annotations

import io
from typing import TYPE_CHECKING

import numpy as np

from nightcap.geometry.case import Case, OpenSpace
from nightcap.geometry.curves import Floats
from nightcap.geometry.painting import paint
from nightcap.outputs.labels import Labels
from nightcap.outputs.sheet import extent, paint_figures, palette_of, write_names

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

WIDTH, TALLEST = 3.0, 3.0
"""Inches."""
DOTS_PER_INCH = 100
STEP = 255 // 15
"""Tones are rounded to multiples of this, which leaves 16 of them and makes files small."""
ROOM = {True: 0.16, False: 0.05}
"""Margin around what is drawn, over its size: in open space, and elsewhere."""
MILLIMETRES = 1e3


def picture(case: Case) -> bytes:
    """A PNG: the figures of a case to scale, with names and a scale in millimetres."""
    from matplotlib import rc_context

    with rc_context({"font.size": 6, "hatch.linewidth": 0.5, "axes.linewidth": 0.4}):
        content = io.BytesIO()
        _figure(case).savefig(content, format="png", dpi=DOTS_PER_INCH)
    return _small(content.getvalue())


def _figure(case: Case) -> Figure:
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    drawing = paint(case)
    low, high = extent(case, drawing)
    room = ROOM[isinstance(case.boundary, OpenSpace)] * float((high - low).max())
    width, height = (high - low + 2 * room).tolist()
    inches = float(np.clip(WIDTH * height / width + 0.2, 0.9, TALLEST))
    figure = Figure(figsize=(WIDTH, inches), layout="constrained")
    FigureCanvasAgg(figure)
    axes = figure.add_subplot()
    _frame(axes, low - room, high + room)
    paint_figures(axes, case, drawing, palette_of(case, drawing))
    write_names(case, Labels(axes, 72 * min(WIDTH / width, inches / height)))
    return figure


def _frame(axes: Axes, low: Floats, high: Floats) -> None:
    """Axes that show a part of the plane, m, with their numbers in millimetres."""
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    axes.set_aspect("equal")
    axes.set_xlim(low[0], high[0])
    axes.set_ylim(low[1], high[1])
    axes.tick_params(length=2, width=0.4, pad=1.5, colors="0.35")
    for axis in (axes.xaxis, axes.yaxis):
        axis.set_major_locator(MaxNLocator(5, steps=[1, 2, 5, 10]))
        axis.set_major_formatter(FuncFormatter(lambda length, _: f"{round(length * MILLIMETRES, 9):g}"))
    for side in axes.spines.values():
        side.set_color("0.7")


def _small(png: bytes) -> bytes:
    """The same picture in few greys."""
    from PIL import Image

    content = io.BytesIO()
    grey = Image.open(io.BytesIO(png)).convert("L").point(lambda tone: round(tone / STEP) * STEP)
    grey.quantize(16, dither=Image.Dither.NONE).save(content, format="PNG", optimize=True)
    return content.getvalue()


def difference(one: bytes, other: bytes) -> float:
    """Mean difference of two pictures in tone, 0 to 255; infinite if they differ in size."""
    from PIL import Image

    tones = [np.asarray(Image.open(io.BytesIO(png)).convert("L"), dtype=float) for png in (one, other)]
    return float(np.abs(tones[0] - tones[1]).mean()) if tones[0].shape == tones[1].shape else float("inf")
