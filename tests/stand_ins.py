"""Stand-ins for the parts around the program: solved layouts made by hand, and tasks that worker processes import."""

from __future__ import annotations

import os
import signal
import time
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from nightcap.geometry.case import Case, Coating, Conductor, Material, OpenSpace, Shield
from nightcap.geometry.curves import Floats
from nightcap.geometry.errors import Problem
from nightcap.geometry.layout import Layout, Piece, Region
from nightcap.geometry.shapes import Circle
from nightcap.jobs import Job
from nightcap.result import MET, Capacitance, Result, failed_result
from nightcap.work import Tell

AIR, SOLID = Material(1.0, name="air"), Material(2.3, name="solid")


@dataclass
class Outlines:
    """Points and pieces of circles, for layouts made by hand."""

    points: list[tuple[float, float]] = field(default_factory=list)
    pieces: list[Piece] = field(default_factory=list)

    def circle(self, centre: tuple[float, float], radius: float, left: int, right: int) -> tuple[int, ...]:
        """Adds a counter-clockwise circle; returns its loop."""
        curves = Circle(centre, radius).outline()
        first, loop = len(self.points), len(self.pieces) + 1
        for k, curve in enumerate(curves):
            self.points.append(curve.start)
            self.pieces.append(Piece(curve, first + k, first + (k + 1) % 4, (left, right)))
        return tuple(range(loop, loop + 4))


def hole(loop: tuple[int, ...]) -> tuple[int, ...]:
    return tuple(-step for step in reversed(loop))


def open_pair() -> tuple[Case, Layout]:
    """Two bare wires of radius 1 m, 3 m apart, in open space."""
    lines = Outlines()
    rim = lines.circle((0.0, 0.0), 5.0, 0, 1)
    red, white = lines.circle((-1.5, 0.0), 1.0, -1, 0), lines.circle((1.5, 0.0), 1.0, -2, 0)
    regions = (Region((rim, hole(red), hole(white)), 0), Region((rim,), 0, far=True))
    wires = (Conductor("red", Circle((-1.5, 0.0), 1.0)), Conductor("white", Circle((1.5, 0.0), 1.0)))
    case = Case("pair", "Bare pair on stand-offs", wires, OpenSpace(), "white")
    points = np.array(lines.points)
    return case, Layout(points, tuple(lines.pieces), regions, (AIR,), ("red", "white"), 1, 5.0, ((0.0, 0.0), 5.0))


def screened_pair() -> tuple[Case, Layout]:
    """Two coated wires in a round screen of 2.6 mm."""
    mm = 1e-3
    lines = Outlines()
    screen = lines.circle((0.0, 0.0), 1.3 * mm, 0, -3)
    coats = [lines.circle((x * mm, 0.0), 0.5 * mm, k, 0) for k, x in ((1, -0.6), (2, 0.6))]
    cores = [lines.circle((x * mm, 0.0), 0.25 * mm, -k, k) for k, x in ((1, -0.6), (2, 0.6))]
    regions = (
        Region((screen, *map(hole, coats)), 0),
        *(Region((coat, hole(core)), 1) for coat, core in zip(coats, cores, strict=True)),
    )
    wires = tuple(
        Conductor(name, Circle((x * mm, 0.0), 0.25 * mm), (Coating(0.25 * mm, SOLID),))
        for name, x in (("red", -0.6), ("white", 0.6))
    )
    case = Case("screened", "Screened pair", wires, Shield(Circle((0.0, 0.0), 1.3 * mm), "screen"), "screen")
    names = ("red", "white", "screen")
    return case, Layout(np.array(lines.points), tuple(lines.pieces), regions, (AIR, SOLID), names, 2, 2.6 * mm)


def capacitance(size: int = 2, width: float = 1e-5) -> Capacitance:
    """A matrix in the order of 50 pF/m with bounds around it."""
    value: Floats = 5e-11 * (np.eye(size) * 1.5 - 0.5 / size)
    spread = width * 5e-11 * np.eye(size)
    half_width = np.full((size, size), width * 5e-11)
    return Capacitance(tuple(f"w{k + 1}" for k in range(size)), value, value - spread, value + spread, half_width)


def met(case: str = "case", size: int = 2) -> Result:
    return Result(
        case, MET, "A title", reference="screen", capacitance=capacitance(size), requested=1e-4, reached=1e-5,
        seconds={"mesh": 0.1, "solve": 0.2, "total": 0.4},
    )  # fmt: skip


@dataclass(frozen=True)
class Moody:
    """A task that does what the name of its job says; like nightcap.work.Work otherwise."""

    out: Path = Path()
    accuracy: float | None = None
    pictures: bool = True

    def __call__(self, job: Job, tell: Tell) -> Result:
        if job.name.startswith("die"):
            os._exit(7)
        if job.name.startswith("sleep"):
            tell("asleep")
            time.sleep(60.0)
        if job.name.startswith("fail"):
            return self.failed(job, "as asked")
        tell("half way")
        ears = "deaf" if signal.getsignal(signal.SIGINT) == signal.SIG_IGN else "hears Ctrl-C"
        return Result(job.name, MET, title=f"{os.environ.get('OMP_NUM_THREADS')} thread, {ears}")

    def failed(self, job: Job, text: str) -> Result:
        return failed_result(job.name, (Problem(job.path, None, "", text),))
