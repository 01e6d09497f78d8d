"""picture.png: the cross-section to scale, with equipotentials and field lines."""

from __future__ import annotations

import io
from collections.abc import Sequence
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING, Any

import numpy as np

from nightcap.geometry.case import Case, Shield
from nightcap.geometry.curves import Floats
from nightcap.geometry.domain import straight_edges
from nightcap.geometry.symmetry import SymmetryLine
from nightcap.lengths import LengthUnit, fitting_unit
from nightcap.outputs.drawing import Drawing, View, view_of
from nightcap.outputs.field_lines import field_lines, flux_sheet, unfolded
from nightcap.outputs.labels import Labels, literal
from nightcap.outputs.outlines import (
    clipped,
    conductor_loops,
    interface_lines,
    region_loops,
    strip_lines,
    surface_lines,
)
from nightcap.result import Result
from nightcap.whole_file import write_whole

if TYPE_CHECKING:
    from matplotlib.axes import Axes

DOTS_PER_INCH = 150
WIDTH = 6.4
"""Of the figure, inches."""
FIELD_LINES = 32
LEVELS = np.arange(1, 10) / 10
"""Equipotentials, V."""
TRIANGLES = 30_000
"""About so many are sampled, which makes lines smooth at this size."""
METAL, EDGE = "0.62", "0.15"
STRIP = 2.0
"""Width of the line that stands for a conductor of no thickness, points."""
HUE = "#0072b2"
"""One blue, for equipotentials: apart from black in greyscale and for every kind of colour vision."""
STYLES = (("1.0", ""), ("0.93", "...."), ("0.87", "////"), ("0.95", "xxxx"), ("0.81", "||||"), ("0.90", "\\\\\\\\"))
"""Tone and hatch of the materials, in turn."""
HATCH = "0.72"
MAGNETIC: dict[str, Any] = {"color": "0.15", "linewidth": 1.0, "linestyle": (0, (8, 2, 1, 2)), "zorder": 7}
"""Lines of symmetry that no flux passes."""


class Picture:
    """A PNG of 150 dots per inch."""

    file = "picture.png"
    is_essential = False

    def applies(self, result: Result) -> bool:
        return result.drawing is not None

    def write(self, result: Result, folder: Path) -> None:
        if result.drawing is not None:
            write_whole(folder / self.file, png(result.drawing))


def png(drawing: Drawing) -> bytes:
    """The picture of a solved layout."""
    from matplotlib import rc_context
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    view = view_of(drawing.case)
    with rc_context({"font.size": 8, "hatch.linewidth": 0.5}):
        legend = _legend(drawing)
        figure = Figure(figsize=(WIDTH, _height(view, len(legend))), dpi=DOTS_PER_INCH, layout="constrained")
        FigureCanvasAgg(figure)
        axes = figure.add_subplot()
        _frame(axes, drawing, view)
        _materials(axes, drawing, view)
        _fields(axes, drawing, view)
        _conductors(axes, drawing, view)
        _magnetic_walls(axes, drawing, view)
        _scale_bar(axes, view)
        figure.legend(handles=legend, loc="outside lower center", ncols=2, frameon=False, fontsize=7)
        content = io.BytesIO()
        figure.savefig(content, format="png")
    return content.getvalue()


def _height(view: View, legend: int) -> float:
    """Inches, from a flat strip to a tall one, with room for title, axis and so many entries of the legend."""
    return float(np.clip((WIDTH - 1.0) * view.height / view.width, 1.6, 8.0)) + 1.5 + 0.08 * legend


def _frame(axes: Axes, drawing: Drawing, view: View) -> None:
    unit = fitting_unit(drawing.layout.size)
    axes.set_aspect("equal")
    axes.set_xlim(view.left, view.right)
    axes.set_ylim(view.bottom, view.top)
    for axis, name in ((axes.xaxis, "x"), (axes.yaxis, "y")):
        axis.set_major_formatter(_in_unit(unit))
        axis.set_label_text(f"{name}, {unit.symbol}")
    axes.set_title(literal(fill(drawing.case.title, 80)), fontsize=10)


def _in_unit(unit: LengthUnit) -> Any:
    from matplotlib.ticker import FuncFormatter

    return FuncFormatter(lambda length, _: f"{round(length / unit.metres, 9):g}")


def _materials(axes: Axes, drawing: Drawing, view: View) -> None:
    for region in drawing.layout.regions:
        tone, hatch = style_of(region.material)
        style = {"facecolor": tone, "edgecolor": HATCH, "hatch": hatch, "linewidth": 0}
        if region.far:
            axes.add_patch(_beyond_rim(drawing.case, view, zorder=0, **style))
            continue
        loops = region_loops(drawing.layout, region)
        if drawing.layout.wall:  # it reaches so far out that it could not be drawn
            loops = [part for loop in loops if len(part := clipped(loop, *_beyond_view(view)))]
        if loops:
            axes.add_patch(filled(loops, zorder=1, **style))
    for line in interface_lines(drawing.layout):
        axes.plot(*line.T, color="0.4", linewidth=0.6, zorder=2)


def _beyond_view(view: View) -> tuple[Floats, Floats]:
    """A box somewhat larger than what is seen, so that its edges are not."""
    low, high = np.array([view.left, view.bottom]), np.array([view.right, view.top])
    return low - 0.1 * (high - low), high + 0.1 * (high - low)


def _beyond_rim(case: Case, view: View, **style: Any) -> Any:
    """All that the view shows of unbounded space; what is near covers it."""
    from matplotlib.patches import Rectangle

    start = [view.left, view.bottom]
    for line in straight_edges(case):
        start[line.axis] = line.at
    return Rectangle((start[0], start[1]), view.right - start[0], view.top - start[1], **style)


def style_of(material: int) -> tuple[str, str]:
    """Tone and hatch of a material, by its number."""
    return STYLES[material % len(STYLES)]


def filled(loops: list[Floats], **style: Any) -> Any:
    """A patch inside closed polygons, and outside of those that run the other way."""
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path as Outline

    closed = [Outline(np.concatenate([loop, loop[:1]]), closed=True) for loop in loops]
    return PathPatch(Outline.make_compound_path(*closed), **style)


def _fields(axes: Axes, drawing: Drawing, view: View) -> None:
    """The first conductor, with those tied to it, at 1 V; floating ones without charge; all others at 0 V."""
    sample = _sample(drawing)
    corners = sample.points[sample.triangles]
    potential = (drawing.potentials @ sample.potential)[sample.triangles]
    sheet = flux_sheet(
        corners.copy(),
        (drawing.potentials @ sample.flux)[sample.triangles],
        sample.far,
        drawing.layout.rim,
        drawing.layout.size,
        sample.place[sample.triangles],
    )
    at_one_volt = potential > 1.0 - 1e-6
    surface = (at_one_volt & np.roll(at_one_volt, -1, axis=1)).reshape(-1) & (sheet.neighbour < 0)
    _draw_lines(axes, field_lines(sheet, surface, FIELD_LINES))
    corners[sample.far] = unfolded(corners[sample.far], drawing.layout.rim)
    seen = view.sees(corners.min(axis=1), corners.max(axis=1)) & (np.ptp(corners, axis=1).max(axis=1) < view.width)
    _draw_equipotentials(axes, corners[seen], sheet.labels[seen], potential[seen])


def _sample(drawing: Drawing) -> Any:
    """As many triangles as a smooth picture needs, whatever the mesh."""
    coarse = drawing.fields.sample(subdivisions=1)
    subdivisions = int(np.clip(np.ceil(np.sqrt(TRIANGLES / len(coarse.triangles))), 1, 12))
    return drawing.fields.sample(subdivisions=subdivisions)


def _draw_lines(axes: Axes, lines: list[Floats]) -> None:
    from matplotlib.collections import LineCollection

    axes.add_collection(
        LineCollection(lines, colors="0.1", linewidths=0.6, linestyles=(0, (5, 3)), zorder=3), autolim=False
    )


def _draw_equipotentials(axes: Axes, corners: Floats, labels: Any, potential: Floats) -> None:
    from matplotlib.tri import Triangulation

    _, first, triangles = np.unique(labels.reshape(-1), return_index=True, return_inverse=True)
    points, values = corners.reshape(-1, 2)[first], potential.reshape(-1)[first]
    grid = Triangulation(points[:, 0], points[:, 1], triangles.reshape(-1, 3))
    lines = axes.tricontour(grid, values, levels=LEVELS, colors=HUE, linewidths=0.9, zorder=4)
    axes.clabel(lines, levels=LEVELS[::2], fmt="%.1f V", fontsize=6)


def _conductors(axes: Axes, drawing: Drawing, view: View) -> None:
    """Filled and named; a shield or a plane, whose inside is everything beyond, as a band along its surface."""
    layout, labels = drawing.layout, Labels(axes, 72 * (WIDTH - 1.0) / view.width)
    drawn = {conductor.name for conductor in drawing.case.conductors}
    for k, name in enumerate(layout.conductors):
        if name in drawn:
            loops = conductor_loops(layout, k, drawing.case.symmetry)
            strips = strip_lines(layout, k)
            if loops:
                axes.add_patch(filled(loops, facecolor=METAL, edgecolor="0.45", hatch="//////", linewidth=0, zorder=5))
                axes.add_patch(filled(loops, fill=False, edgecolor=EDGE, linewidth=0.9, zorder=6))
            for line in strips:
                axes.plot(*line.T, color=EDGE, linewidth=STRIP, solid_capstyle="butt", zorder=6)
            _name(labels, name, np.concatenate([*loops, *strips]))
        else:
            for line in _outer_surface(drawing, k, view):
                axes.plot(*line.T, color=METAL, linewidth=9, solid_capstyle="round", zorder=0.5)
                axes.plot(*line.T, color=EDGE, linewidth=1.2, zorder=6)


def _outer_surface(drawing: Drawing, conductor: int, view: View) -> list[Floats]:
    if isinstance(drawing.case.boundary, Shield):
        return surface_lines(drawing.layout, conductor)
    return [_edge_in_view(line, drawing.case, view) for line in straight_edges(drawing.case) if line.is_electric]


def _edge_in_view(line: SymmetryLine, case: Case, view: View) -> Floats:
    """The part of a straight edge that is seen, up to where it meets another one."""
    start, end = np.array([view.left, view.bottom]), np.array([view.right, view.top])
    for edge in straight_edges(case):
        start[edge.axis] = edge.at
    end[line.axis] = line.at
    return np.array([start, end])


def _magnetic_walls(axes: Axes, drawing: Drawing, view: View) -> None:
    for line in drawing.case.symmetry:
        if not line.is_electric:
            axes.plot(*_edge_in_view(line, drawing.case, view).T, **MAGNETIC)


def _name(labels: Labels, name: str, outline: Floats) -> None:
    """On the conductor where it fits, else beside it, else not at all."""
    low, high = outline.min(axis=0), outline.max(axis=0)
    width, height = (labels.scale * (high - low)).tolist()
    fits = 5.0 * len(name) < width and height > 12
    labels.put(name, (low + high) / 2, apart=not fits)


def _scale_bar(axes: Axes, view: View) -> None:
    """A length of 1, 2 or 5 times a power of ten, at most a fifth of the width, in the lower left corner."""
    longest = view.width / 5
    decade = 10.0 ** np.floor(np.log10(longest))
    length = max(m * decade for m in (1, 2, 5) if m * decade <= longest * (1 + 1e-9))
    unit = fitting_unit(length)
    x, y = view.left + 0.03 * view.width, view.bottom + 0.03 * view.height
    axes.plot([x, x + length], [y, y], color="black", linewidth=2.5, solid_capstyle="butt", zorder=9)
    axes.annotate(
        f"{unit.text(length)} {unit.symbol}",
        xy=(x, y),
        xytext=(0, 4),
        textcoords="offset points",
        fontsize=7,
        bbox={"boxstyle": "round,pad=0.1", "facecolor": "white", "edgecolor": "none", "alpha": 0.85},
        zorder=9,
    )


def _legend(drawing: Drawing) -> list[Any]:
    """Materials by tone and hatch, lines by colour and dashes."""
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    layout = drawing.layout
    used = sorted({region.material for region in layout.regions if not region.far})
    handles: list[Any] = [Patch(facecolor=METAL, edgecolor="0.45", hatch="//////", label=_conductor_label(drawing))]
    for k in used:
        tone, hatch = style_of(k)
        material = layout.materials[k]
        label = f"{literal(material.name)} " if material.name else ""
        label += rf"$\varepsilon_r$ = {material.permittivity:.4g}"
        handles.append(Patch(facecolor=tone, edgecolor="0.5", hatch=hatch, label=label))
    if any(not line.is_electric for line in drawing.case.symmetry):
        handles.append(Line2D([], [], label="magnetic wall: mirror image beyond", **MAGNETIC))
    handles.append(Line2D([], [], color=HUE, linewidth=0.9, label=f"equipotentials: {_driven(drawing)}"))
    handles.append(
        Line2D(
            [], [], color="0.1", linewidth=0.6, linestyle=(0, (5, 3)), label="field lines, equal charge between them"
        )
    )
    return handles


def _driven(drawing: Drawing) -> str:
    """Who has which potential."""
    first = drawing.conductors[0]
    group = next((names for names in drawing.case.ties if first in names), (first,))
    floating = [conductor.name for conductor in drawing.case.conductors if conductor.floating]
    afloat = f", {_some(floating)} floating" if floating else ""
    return f"{_some(group)} at 1 V{afloat}, others 0 V"


def _some(names: Sequence[str]) -> str:
    """Names, as far as a legend has room."""
    return literal(", ".join(names[:3])) + (f" and {len(names) - 3} more" if len(names) > 3 else "")


def _conductor_label(drawing: Drawing) -> str:
    reference = literal(", ".join(drawing.case.reference_pieces))
    return f"conductors; reference, 0 V: {reference}"
