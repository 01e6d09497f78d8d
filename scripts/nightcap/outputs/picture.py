"""picture.png: the cross-section to scale, with equipotentials and field lines."""

from __future__ import annotations

import io
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from nightcap.geometry.case import Case, GroundPlane
from nightcap.geometry.curves import Floats
from nightcap.lengths import LengthUnit, fitting_unit
from nightcap.outputs.drawing import Drawing, View, view_of
from nightcap.outputs.field_lines import field_lines, flux_sheet, unfolded
from nightcap.outputs.outlines import conductor_loops, interface_lines, region_loops, strip_lines, surface_lines
from nightcap.result import Result
from nightcap.whole_file import write_whole

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

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
        figure = Figure(figsize=(WIDTH, _height(view)), dpi=DOTS_PER_INCH, layout="constrained")
        FigureCanvasAgg(figure)
        axes = figure.add_subplot()
        _frame(axes, drawing, view)
        _materials(axes, drawing, view)
        _fields(axes, drawing, view)
        _conductors(axes, drawing, view)
        _scale_bar(axes, view)
        _legend(figure, drawing)
        content = io.BytesIO()
        figure.savefig(content, format="png")
    return content.getvalue()


def _height(view: View) -> float:
    """Inches, from a flat strip to a tall one, with room for title, axis and legend."""
    return float(np.clip((WIDTH - 1.0) * view.height / view.width, 1.6, 8.0)) + 1.7


def _frame(axes: Axes, drawing: Drawing, view: View) -> None:
    unit = fitting_unit(drawing.layout.size)
    axes.set_aspect("equal")
    axes.set_xlim(view.left, view.right)
    axes.set_ylim(view.bottom, view.top)
    for axis, name in ((axes.xaxis, "x"), (axes.yaxis, "y")):
        axis.set_major_formatter(_in_unit(unit))
        axis.set_label_text(f"{name}, {unit.symbol}")
    axes.set_title(_literal(drawing.case.title), fontsize=10, wrap=True)


def _in_unit(unit: LengthUnit) -> Any:
    from matplotlib.ticker import FuncFormatter

    return FuncFormatter(lambda length, _: f"{round(length / unit.metres, 9):g}")


def _materials(axes: Axes, drawing: Drawing, view: View) -> None:
    for region in drawing.layout.regions:
        tone, hatch = _style(region.material)
        style = {"facecolor": tone, "edgecolor": HATCH, "hatch": hatch, "linewidth": 0}
        if region.far:
            axes.add_patch(_beyond_rim(drawing.case, view, zorder=0, **style))
        else:
            axes.add_patch(_filled(region_loops(drawing.layout, region), zorder=1, **style))
    for line in interface_lines(drawing.layout):
        axes.plot(*line.T, color="0.4", linewidth=0.6, zorder=2)


def _beyond_rim(case: Case, view: View, **style: Any) -> Any:
    """All that the view shows of unbounded space; what is near covers it."""
    from matplotlib.patches import Rectangle

    bottom = case.boundary.at if isinstance(case.boundary, GroundPlane) else view.bottom
    return Rectangle((view.left, bottom), view.width, view.top - bottom, **style)


def _style(material: int) -> tuple[str, str]:
    return STYLES[material % len(STYLES)]


def _filled(loops: list[Floats], **style: Any) -> Any:
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path as Outline

    closed = [Outline(np.concatenate([loop, loop[:1]]), closed=True) for loop in loops]
    return PathPatch(Outline.make_compound_path(*closed), **style)


def _fields(axes: Axes, drawing: Drawing, view: View) -> None:
    """Conductor 0 at 1 V, all others at 0 V."""
    sample = _sample(drawing)
    corners = sample.points[sample.triangles]
    potential = sample.potential[0][sample.triangles]
    sheet = flux_sheet(
        corners.copy(),
        sample.flux[0][sample.triangles],
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
    layout = drawing.layout
    drawn = {conductor.name for conductor in drawing.case.conductors}
    for k, name in enumerate(layout.conductors):
        if name in drawn:
            loops, strips = conductor_loops(layout, k), strip_lines(layout, k)
            if loops:
                axes.add_patch(_filled(loops, facecolor=METAL, edgecolor="0.45", hatch="//////", linewidth=0, zorder=5))
                axes.add_patch(_filled(loops, fill=False, edgecolor=EDGE, linewidth=0.9, zorder=6))
            for line in strips:
                axes.plot(*line.T, color=EDGE, linewidth=STRIP, solid_capstyle="butt", zorder=6)
            _name(axes, name, np.concatenate([*loops, *strips]), view)
        else:
            for line in _outer_surface(drawing, k, view):
                axes.plot(*line.T, color=METAL, linewidth=9, solid_capstyle="round", zorder=0.5)
                axes.plot(*line.T, color=EDGE, linewidth=1.2, zorder=6)


def _outer_surface(drawing: Drawing, conductor: int, view: View) -> list[Floats]:
    boundary = drawing.case.boundary
    if isinstance(boundary, GroundPlane):
        return [np.array([[view.left, boundary.at], [view.right, boundary.at]])]
    return surface_lines(drawing.layout, conductor)


def _name(axes: Axes, name: str, outline: Floats, view: View) -> None:
    """On the conductor where it fits, else above it."""
    low, high = outline.min(axis=0), outline.max(axis=0)
    points_per_metre = 72 * (WIDTH - 1.0) / view.width
    fits = 5.0 * len(name) < points_per_metre * (high[0] - low[0]) and points_per_metre * (high[1] - low[1]) > 12
    axes.annotate(
        _literal(name),
        xy=((low[0] + high[0]) / 2, (low[1] + high[1]) / 2 if fits else high[1]),
        xytext=(0, 0 if fits else 3),
        textcoords="offset points",
        horizontalalignment="center",
        verticalalignment="center" if fits else "bottom",
        fontsize=7,
        bbox={"boxstyle": "round,pad=0.15", "facecolor": "white", "edgecolor": "none", "alpha": 0.85},
        annotation_clip=True,
        zorder=8,
    )


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


def _legend(figure: Figure, drawing: Drawing) -> None:
    """Materials by tone and hatch, lines by colour and dashes."""
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    layout = drawing.layout
    used = sorted({region.material for region in layout.regions if not region.far})
    handles: list[Any] = [Patch(facecolor=METAL, edgecolor="0.45", hatch="//////", label=_conductor_label(drawing))]
    for k in used:
        tone, hatch = _style(k)
        material = layout.materials[k]
        label = f"{_literal(material.name)} " if material.name else ""
        label += rf"$\varepsilon_r$ = {material.permittivity:.4g}"
        handles.append(Patch(facecolor=tone, edgecolor="0.5", hatch=hatch, label=label))
    driven = _literal(drawing.conductors[0])
    handles.append(Line2D([], [], color=HUE, linewidth=0.9, label=f"equipotentials: {driven} at 1 V, others 0 V"))
    handles.append(
        Line2D(
            [], [], color="0.1", linewidth=0.6, linestyle=(0, (5, 3)), label="field lines, equal charge between them"
        )
    )
    figure.legend(handles=handles, loc="outside lower center", ncols=2, frameon=False, fontsize=7)


def _conductor_label(drawing: Drawing) -> str:
    reference = _literal(drawing.layout.conductors[drawing.layout.reference])
    return f"conductors; reference, 0 V: {reference}"


def _literal(text: str) -> str:
    """Text that is not read as a formula."""
    return text.replace("$", r"\$")
