"""drawing.svg and drawing.png: what a case file draws, to scale and with dimensions, before anything is solved."""

from __future__ import annotations

import io
from collections.abc import Sequence
from pathlib import Path
from textwrap import fill, wrap
from typing import TYPE_CHECKING, Any

import numpy as np

from nightcap.geometry.case import Case, Material, Shield
from nightcap.geometry.curves import Floats, Point
from nightcap.geometry.domain import straight_edges
from nightcap.geometry.errors import Problem
from nightcap.geometry.painting import Drawing, paint
from nightcap.geometry.shapes import Outline, chains
from nightcap.lengths import rounded_length
from nightcap.outputs.labels import Labels, literal
from nightcap.outputs.measures import Measure, measures
from nightcap.outputs.outlines import points_along
from nightcap.outputs.picture import METAL, filled, style_of
from nightcap.whole_file import write_whole

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

FILES = ("drawing.svg", "drawing.png")
WIDTH, TALLEST = 7.0, 7.0
"""Of the drawing itself, inches."""
MARGIN = 0.2
"""Room around the figures for dimensions, as a fraction of their extent."""
WRONG = "#d55e00"
"""One vermilion, for mistakes: apart from the greys for every kind of colour vision."""


def write_sheet(case: Case, problems: Sequence[Problem], folder: Path) -> None:
    """Writes both files, each whole or not at all. Raises OSError.

    problems : geometric mistakes, which are marked where they are.
    """
    from matplotlib import rc_context

    folder.mkdir(parents=True, exist_ok=True)
    with rc_context({"font.size": 8, "hatch.linewidth": 0.5, "svg.fonttype": "none", "svg.hashsalt": "nightcap"}):
        figure = _figure(case, problems)
        for name in FILES:
            content = io.BytesIO()
            suffix = name.rpartition(".")[2]
            figure.savefig(content, format=suffix, dpi=150, metadata={"Date": None} if suffix == "svg" else None)
            write_whole(folder / name, content.getvalue())


def _figure(case: Case, problems: Sequence[Problem]) -> Figure:
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    drawing = paint(case)
    low, high = extent(case, drawing)
    room = MARGIN * float((high - low).max())
    width, height = (high - low + 2 * room).tolist()
    marked, palette = measures(case, drawing), palette_of(case, drawing)
    notes = _notes(marked, problems)
    shape = (min(WIDTH * height / width, TALLEST), 0.2 + 0.14 * len(notes))
    figure = Figure(figsize=(WIDTH, sum(shape) + 0.9), layout="constrained")
    FigureCanvasAgg(figure)
    axes, text = figure.subplots(2, height_ratios=shape)
    axes.set_aspect("equal")
    axes.set_xlim(low[0] - room, high[0] + room)
    axes.set_ylim(low[1] - room, high[1] + room)
    axes.set_title(literal(fill(case.title, 80)), fontsize=10)
    labels = Labels(axes, 72 * min(WIDTH / width, TALLEST / height))
    paint_figures(axes, case, drawing, palette)
    _overall(axes, low, high, room)
    _flags(axes, problems, labels)
    for measure in marked:
        _mark(axes, measure, labels)
    write_names(case, labels)
    text.text(0.0, 1.0, literal("\n".join(notes)), fontsize=7, va="top", transform=text.transAxes)
    for part in (axes, text):
        part.set_axis_off()
    _legend(figure, palette)
    return figure


def extent(case: Case, drawing: Drawing) -> tuple[Floats, Floats]:
    """Corners of the box around all that is drawn, the shield and straight walls included; of slabs the edges."""
    low, high = (corner.copy() for corner in drawing.domain.shown)
    for line in straight_edges(case):
        low[line.axis], high[line.axis] = min(low[line.axis], line.at), max(high[line.axis], line.at)
    return low, high


def palette_of(case: Case, drawing: Drawing) -> list[Material]:
    """The materials, each once, the background first."""
    return list(dict.fromkeys([case.background, *(d.material for d in drawing.drawn if d.material is not None)]))


def paint_figures(axes: Axes, case: Case, drawing: Drawing, palette: list[Material]) -> None:
    """Figure over figure, in the order in which they cover each other."""
    if isinstance(case.boundary, Shield):
        tone, hatch = style_of(0)
        loops = loops_of(drawing.domain.outline)
        axes.add_patch(filled(loops, facecolor=tone, edgecolor="0.72", hatch=hatch, linewidth=0, zorder=1))
        axes.add_patch(filled(loops, fill=False, edgecolor="0.1", linewidth=2.0, zorder=1.5))
    for line in straight_edges(case):
        wall = axes.axvline if line.axis == 0 else axes.axhline
        wall(line.at, color="0.1", linewidth=2.0, linestyle="-" if line.is_electric else "--", zorder=4)
    for order, drawn in enumerate(drawing.drawn):
        tone, hatch = (METAL, "//////") if drawn.material is None else style_of(palette.index(drawn.material))
        loops, level = loops_of(drawn.outline), 2 + order * 1e-3
        axes.add_patch(filled(loops, facecolor=tone, edgecolor="0.72", hatch=hatch, linewidth=0, zorder=level))
        thick = 0.9 if drawn.material is None else 0.6
        axes.add_patch(filled(loops, fill=False, edgecolor="0.15", linewidth=thick, zorder=level + 5e-4))


def write_names(case: Case, labels: Labels) -> None:
    """Names of conductors, where there is room."""
    for conductor in case.conductors:
        labels.put(conductor.name, place_of_name([points_along(curve) for curve in conductor.shape.outline()]))


def place_of_name(curves: Sequence[Floats]) -> Floats:
    """The middle of the box around a figure, or of the first stretch of the figure level with it if it is hollow there.

    curves : (n, 2) points along each of its curves, m.
    """
    points = np.concatenate(curves)
    middle: Floats = (points.min(axis=0) + points.max(axis=0)) / 2
    starts, ends = (np.concatenate(part) for part in zip(*((c[:-1], c[1:]) for c in curves), strict=True))
    crossing = (starts[:, 1] <= middle[1]) != (ends[:, 1] <= middle[1])
    (x0, y0), (x1, y1) = starts[crossing].T, ends[crossing].T
    walls = np.sort(x0 + (middle[1] - y0) / (y1 - y0) * (x1 - x0))
    if np.count_nonzero(walls < middle[0]) % 2:
        return middle
    if len(walls) > 1:
        return np.array([walls[:2].mean(), middle[1]])
    nearest: Floats = points[np.argmin(np.hypot(*(points - middle).T))]
    return nearest


def loops_of(outline: Outline) -> list[Floats]:
    """The closed polygons of an outline, which may have holes."""
    return [np.concatenate([points_along(curve)[:-1] for curve in chain]) for chain in chains(outline)]


def _overall(axes: Axes, low: Floats, high: Floats, room: float) -> None:
    """Overall width below, overall height on the left."""
    x, y = low - 0.5 * room
    _dimension(axes, (low[0], y), (high[0], y), rounded_length(float(high[0] - low[0])))
    _dimension(axes, (x, low[1]), (x, high[1]), rounded_length(float(high[1] - low[1])), rotation=90)
    for ends in (((low[0], low[1]), (low[0], y)), ((high[0], low[1]), (high[0], y))):
        axes.plot(*np.array(ends).T, color="0.4", linewidth=0.4, zorder=0.5)
    for ends in (((low[0], low[1]), (x, low[1])), ((low[0], high[1]), (x, high[1]))):
        axes.plot(*np.array(ends).T, color="0.4", linewidth=0.4, zorder=0.5)


def _dimension(axes: Axes, start: Any, end: Any, text: str, rotation: float = 0.0) -> None:
    style = {"arrowstyle": "<->", "color": "0.1", "linewidth": 0.8, "shrinkA": 0, "shrinkB": 0}
    axes.annotate("", xy=end, xytext=start, arrowprops=style, zorder=7)
    box = {"facecolor": "white", "edgecolor": "none", "pad": 1.0}
    middle = (np.array(start) + np.array(end)) / 2
    axes.text(
        float(middle[0]),
        float(middle[1]),
        text,
        fontsize=8,
        ha="center",
        va="center",
        rotation=rotation,
        bbox=box,
        zorder=8,
    )


def _mark(axes: Axes, measure: Measure, labels: Labels) -> None:
    """Both ends of a small dimension, with its length beside."""
    ends = np.array(measure.ends)
    axes.plot(*ends.T, color="black", linewidth=1.0, marker="|", markersize=5, zorder=9)
    labels.put(rounded_length(measure.length), ends.mean(axis=0), apart=True)


def _flags(axes: Axes, problems: Sequence[Problem], labels: Labels) -> None:
    """A ring around each place where something is wrong, with the numbers of the mistakes there."""
    numbers: dict[Point, list[str]] = {}
    for number, problem in enumerate(problems, start=1):
        if problem.place:
            numbers.setdefault(problem.place, []).append(str(number))
    ring: dict[str, Any] = {"marker": "o", "markersize": 20, "markerfacecolor": "none", "zorder": 10}
    for place, there in numbers.items():
        axes.plot(*place, **ring, markeredgecolor="white", markeredgewidth=4.5)
        axes.plot(*place, **ring, markeredgecolor=WRONG, markeredgewidth=2.2)
        labels.put(f"({', '.join(there)})", np.array(place), apart=True, color=WRONG)


def _notes(marked: Sequence[Measure], problems: Sequence[Problem]) -> list[str]:
    """The lengths that are marked, and what is wrong."""
    lines = [f"{measure.what}: {rounded_length(measure.length)}" for measure in marked]
    for number, problem in enumerate(problems, start=1):
        lines += wrap(f"({number}) {problem.key}: {problem.text}", 125, subsequent_indent="      ")
    return lines


def _legend(figure: Figure, palette: list[Material]) -> None:
    """Materials by tone and hatch."""
    from matplotlib.patches import Patch

    handles = [Patch(facecolor=METAL, edgecolor="0.45", hatch="//////", label="conductor")]
    for k, material in enumerate(palette):
        tone, hatch = style_of(k)
        name = f"{literal(material.name)} " if material.name else ""
        label = rf"{name}$\varepsilon_r$ = {material.permittivity:.4g}"
        handles.append(Patch(facecolor=tone, edgecolor="0.5", hatch=hatch, label=label))
    figure.legend(handles=handles, loc="outside lower center", ncols=3, frameon=False, fontsize=7)
