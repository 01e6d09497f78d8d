"""From a layout to its bracketed capacitance matrix."""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from nightcap.geometry.case import Limits
from nightcap.geometry.constants import VACUUM_PERMITTIVITY
from nightcap.geometry.curves import Floats
from nightcap.geometry.errors import LimitError, MeshError
from nightcap.geometry.grading import grading_for
from nightcap.geometry.layout import Layout
from nightcap.geometry.valid import first_mesh
from nightcap.solver.adapt import Step, first_order, next_step
from nightcap.solver.bracket import Bracket
from nightcap.solver.fields import Fields
from nightcap.solver.reduction import Reduction
from nightcap.solver.stiffness import bytes_needed
from nightcap.solver.stopwatch import Stopwatch
from nightcap.solver.system import solve_fields

METRIC_PART = 1e-3
"""Part of the accuracy that the approximation of curved triangles may take."""


@dataclass(frozen=True)
class Round:
    """One pass through both problems."""

    order: int
    triangles: int
    unknowns: int
    reached: float
    """Greatest half-width of the bracket relative to sqrt(C_ii C_jj), after reduction."""
    action: str
    """What follows from it."""
    seconds: float


@dataclass(frozen=True, eq=False)
class Solution:
    """The bracketed Maxwell capacitance matrix of a layout, and the fields behind it."""

    status: str
    """'met' or 'not_met'."""
    reason: str
    """Why the accuracy was not met; empty if it was."""
    conductors: tuple[str, ...]
    """Rows of the matrix, after tying and floating."""
    bracket: Bracket
    """F/m."""
    potentials: Floats
    """(N, K) of all conductors but the reference, V, for one volt on each of ``conductors`` in turn."""
    full_conductors: tuple[str, ...]
    """Rows before tying and floating."""
    full_bracket: Bracket
    """F/m."""
    fields: Fields
    rounds: tuple[Round, ...]
    seconds: Mapping[str, float]
    """By kind of work: mesh, assembly, factorisation, solves, total."""
    warnings: tuple[str, ...] = ()


def solve(
    layout: Layout,
    accuracy: float,
    limits: Limits = Limits(),  # noqa: B008 - a frozen record of numbers
    floating: Sequence[str] = (),
    ties: Sequence[Sequence[str]] = (),
    progress: Callable[[Round], None] | None = None,
) -> Solution:
    """Solves a layout until every entry's half-width is below accuracy sqrt(C_ii C_jj), or a limit is reached.

    Raises MeshError, BracketError, and LimitError where not even one round fits the limits.
    """
    begin = time.perf_counter()
    watch = Stopwatch()
    reduction = Reduction.of(layout, floating, ties)
    with watch.on("mesh"):
        step = Step(first_order(accuracy), first_mesh(layout, grading_for(accuracy)), "")
    rounds: list[Round] = []
    fields: Fields | None = None
    reason = ""
    while True:
        reason = _limit_in_the_way(step, limits, rounds, time.perf_counter() - begin)
        if reason:
            break
        start = time.perf_counter()
        try:
            fields = solve_fields(step.mesh, step.order, METRIC_PART * accuracy, watch)
        except MeshError as error:
            if fields is None:
                raise
            reason = str(error)
            break
        reached = reduction.apply(fields.bracket).relative
        if reached <= accuracy:
            rounds.append(_round(fields, reached, "met", start))
            break
        if fields.floor > accuracy * fields.bracket.relative / reached / 2:
            reason = f"the polynomial edges of curves alone leave {fields.floor:.1e}"
            rounds.append(_round(fields, reached, "ended", start))
            break
        try:
            with watch.on("mesh"):
                step = next_step(fields, accuracy * fields.bracket.relative / reached)
        except MeshError as error:
            reason = str(error)
            rounds.append(_round(fields, reached, "ended", start))
            break
        rounds.append(_round(fields, reached, step.action, start))
        if progress:
            progress(rounds[-1])
    if fields is None:
        raise LimitError(f"nothing could be solved: {reason}")
    full = fields.bracket.scaled(VACUUM_PERMITTIVITY)
    return Solution(
        status="not_met" if reason else "met",
        reason=reason,
        conductors=reduction.names,
        bracket=reduction.apply(full),
        potentials=reduction.potentials(full.value),
        full_conductors=reduction.full_names,
        full_bracket=full,
        fields=fields,
        rounds=tuple(rounds),
        seconds={**watch.seconds, "total": time.perf_counter() - begin},
    )


def _round(fields: Fields, reached: float, action: str, start: float) -> Round:
    seconds = time.perf_counter() - start
    return Round(fields.stiffness.order, len(fields.mesh.triangles), fields.unknowns, reached, action, seconds)


def _limit_in_the_way(step: Step, limits: Limits, rounds: list[Round], spent: float) -> str:
    """Which limit the next round would break, or nothing. Its time is foretold from the last round's."""
    triangles = len(step.mesh.triangles)
    if triangles > limits.triangles:
        return f"{triangles} triangles would exceed the limit of {limits.triangles}"
    memory = bytes_needed(triangles, step.order, len(step.mesh.layout.conductors) - 1)
    if memory > limits.memory:
        return f"about {memory / 1e9:.2g} GB would exceed the limit of {limits.memory / 1e9:.2g} GB"
    if rounds:
        growth = triangles * step.order**2 / (rounds[-1].triangles * rounds[-1].order ** 2)
        spent += rounds[-1].seconds * growth
    if spent > limits.time:
        return f"about {spent:.2g} s would exceed the limit of {limits.time:.2g} s"
    return ""
