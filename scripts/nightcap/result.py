"""Everything that is written to disk about one case, as plain data."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from nightcap.comparison import Comparison, compare
from nightcap.geometry.case import Case
from nightcap.geometry.curves import Floats
from nightcap.geometry.errors import Problem
from nightcap.geometry.twist import LEFT_OUT, Twist

if TYPE_CHECKING:
    from nightcap.outputs.drawing import Drawing

MET, NOT_MET, FAILED = "met", "not_met", "failed"


@dataclass(frozen=True, eq=False)
class Capacitance:
    """A Maxwell capacitance matrix between its two bounds."""

    conductors: tuple[str, ...]
    """Names of rows and columns."""
    value: Floats
    """(N, N), F/m."""
    lower: Floats
    """(N, N), F/m: lower bound in the Loewner order."""
    upper: Floats
    """(N, N), F/m: upper bound in the Loewner order."""
    half_width: Floats
    """(N, N), F/m: every entry is certain to value +- half_width."""


@dataclass(frozen=True, eq=False)
class MutualCapacitance:
    """Two-terminal capacitances: between conductors off the diagonal, to the reference on it."""

    value: Floats
    """(N, N), F/m."""
    half_width: Floats
    """(N, N), F/m."""


@dataclass(frozen=True)
class MeshSize:
    """How much was solved in the last round."""

    order: int
    triangles: int
    unknowns: int
    rounds: int


@dataclass(frozen=True)
class RoundRecord:
    """One round of the adaptive loop."""

    order: int
    triangles: int
    unknowns: int
    reached: float
    """Half-width of the bracket relative to sqrt(C_ii C_jj)."""
    action: str
    """What was done next."""
    seconds: float


@dataclass(frozen=True, eq=False)
class Result:
    """One case, solved or failed."""

    case: str
    """Path of the case below the folder given, without suffix; the name of its result folder."""
    status: str
    """met, not_met or failed."""
    title: str = ""
    reason: str = ""
    """Which limit stopped a case that is not met."""
    reference: str | None = None
    capacitance: Capacitance | None = None
    before_reduction: Capacitance | None = None
    """The full matrix, where conductors are tied or floating."""
    requested: float | None = None
    """Accuracy asked: half-width relative to sqrt(C_ii C_jj)."""
    reached: float | None = None
    mesh: MeshSize | None = None
    rounds: tuple[RoundRecord, ...] = ()
    seconds: Mapping[str, float] = field(default_factory=dict)
    comparison: Comparison | None = None
    warnings: tuple[str, ...] = ()
    problems: tuple[Problem, ...] = ()
    """Why a case failed."""
    provenance: Mapping[str, Any] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    """What a reader must know to use the numbers."""
    reference_pieces: tuple[str, ...] = ()
    """The conductors that make up the reference, if they are several."""
    twist: Twist | None = None
    drawing: Drawing | None = None
    """What the picture is drawn from; stays in the process that solved the case."""
    variant: Mapping[str, float] = field(default_factory=dict)
    """Varied parameters and their values: m for a length, else as written."""
    variant_name: str = ""
    """Name of the variant; its result folder lies below that of the case."""

    @property
    def folder(self) -> str:
        """Result folder of the case, or of its variant."""
        return f"{self.case}/{self.variant_name}" if self.variant_name else self.case

    @property
    def is_good(self) -> bool:
        """Met, and in agreement with what the case expects."""
        return self.status == MET and (self.comparison is None or self.comparison.agrees)

    @property
    def per_cable_length(self) -> Capacitance | None:
        """The matrix per metre of twisted cable, which holds more than a metre of each core; else None."""
        if self.capacitance is None or self.twist is None:
            return None
        return scaled(self.capacitance, self.twist.length_factor)

    @property
    def mutual(self) -> MutualCapacitance | None:
        return None if self.capacitance is None else mutual_capacitance(self.capacitance)


def mutual_capacitance(capacitance: Capacitance) -> MutualCapacitance:
    """c_ij = -C_ij between two conductors, c_ii = sum_j C_ij from a conductor to the reference.

    With D = upper - lower, x' C y is certain to 1/2 sqrt(x' D x  y' D y); for the sum x = e_i, y = (1, ..., 1).
    """
    value = -capacitance.value
    half_width = capacitance.half_width.copy()
    D = capacitance.upper - capacitance.lower  # noqa: N806 - the letter of the formula
    np.fill_diagonal(value, capacitance.value.sum(axis=1))
    np.fill_diagonal(half_width, 0.5 * np.sqrt(np.maximum(D.diagonal() * D.sum(), 0.0)))
    return MutualCapacitance(value, half_width)


def solved_result(name: str, case: Case, solution: Any, drawing: Drawing | None) -> Result:
    """The record of a case that has a bracket. solution : nightcap.solver.solve.Solution."""
    rounds = tuple(_round_record(r) for r in solution.rounds)
    last = rounds[-1]
    capacitance = _capacitance(solution.conductors, solution.bracket)
    is_reduced = bool(case.ties) or any(conductor.floating for conductor in case.conductors)
    return Result(
        case=name,
        status=solution.status,
        title=case.title,
        reason=solution.reason,
        reference=case.reference,
        capacitance=capacitance,
        before_reduction=_capacitance(solution.full_conductors, solution.full_bracket) if is_reduced else None,
        requested=case.accuracy,
        reached=float(solution.bracket.relative),
        mesh=MeshSize(last.order, last.triangles, last.unknowns, len(rounds)),
        rounds=rounds,
        seconds=_seconds(solution.seconds),
        comparison=compare(case.expect, capacitance) if case.expect else None,
        warnings=tuple(solution.warnings),
        notes=tuple(notes(case)),
        reference_pieces=case.reference_pieces if len(case.reference_pieces) > 1 else (),
        twist=case.twist,
        drawing=drawing,
    )


def scaled(C: Capacitance, factor: float) -> Capacitance:  # noqa: N803 - the letter of the formula
    """The matrix and its bounds times a positive factor."""
    matrices = (C.value, C.lower, C.upper, C.half_width)
    return Capacitance(C.conductors, *(factor * matrix for matrix in matrices))


def notes(case: Case) -> Iterator[str]:
    """What a reader must know of how the case was cut."""
    if case.symmetry:
        parts = " and ".join(f"{'xy'[line.axis]} >= {line.at:g} m" for line in case.symmetry)
        walls = ", ".join(map(str, case.symmetry))
        yield (
            f"the matrix is that of the part with {parts} ({walls}): charges on this part alone. A conductor that a"
            " magnetic wall cuts carries twice as much with its mirror image; one beside a wall stands for itself and"
            " its image at equal (magnetic) or opposite (electric) potential"
        )
    if case.twist:
        yield f"twist: {LEFT_OUT}"


def failed_result(name: str, problems: tuple[Problem, ...], case: Case | None = None) -> Result:
    """The record of a case that has no numbers."""
    if case is None:
        return Result(name, FAILED, problems=problems)
    return Result(name, FAILED, case.title, reference=case.reference, requested=case.accuracy, problems=problems)


def _capacitance(conductors: tuple[str, ...], bracket: Any) -> Capacitance:
    matrices = (bracket.value, bracket.lower, bracket.upper, bracket.half_width)
    return Capacitance(tuple(conductors), *(np.array(matrix, dtype=float) for matrix in matrices))


def _round_record(r: Any) -> RoundRecord:
    return RoundRecord(
        int(r.order), int(r.triangles), int(r.unknowns), float(r.reached), str(r.action), float(r.seconds)
    )


def _seconds(parts: Mapping[str, float]) -> dict[str, float]:
    """The solver's times, with 'solve' for all that is not meshing."""
    seconds = {name: float(value) for name, value in parts.items()}
    solve = sum(value for name, value in seconds.items() if name not in ("mesh", "total"))
    return {**seconds, "solve": solve}
