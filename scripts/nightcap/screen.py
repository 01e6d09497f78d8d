"""What a result looks like on screen, in at most 80 columns."""

from __future__ import annotations

import textwrap
from collections import Counter
from collections.abc import Iterator, Sequence

import numpy as np

from nightcap.digits import bracketed, grouped
from nightcap.geometry.curves import Floats
from nightcap.jobs import Job
from nightcap.lengths import length_text
from nightcap.result import FAILED, MET, Capacitance, MutualCapacitance, Result

WIDTH = 80
MARGIN = "  "
WHOLE_MATRIX = 12
"""Up to so many conductors a matrix is printed entry by entry."""
PICO = 1e12
STATUS = {MET: "met", "not_met": "not met", FAILED: "failed"}


def result_lines(result: Result) -> Iterator[str]:
    """The block that is printed when a case is finished."""
    yield f"{result.case}: {STATUS[result.status]}{f' ({result.reason})' if result.reason else ''}"
    yield from _wrapped(result.title)
    C, mutual = result.capacitance, result.mutual  # noqa: N806 - the letter of the formula
    if result.status != FAILED and C is not None and mutual is not None:
        yield from _wrapped(_how_solved(result))
        if len(C.conductors) <= WHOLE_MATRIX:
            yield from _whole_matrices(C, mutual, _reference(result))
        else:
            yield from _each_conductor(C, mutual, _reference(result))
        yield from _twist(result)
    if result.comparison is not None:
        yield from _wrapped(str(result.comparison))
    for note in result.notes:
        yield from _wrapped(f"note: {note}")
    for warning in result.warnings:
        yield from _wrapped(f"warning: {warning}")


def variant_counts(jobs: Sequence[Job]) -> Iterator[str]:
    """How much there is to do, for each case that has variants."""
    for name, count in Counter(job.name for job in jobs if job.variant).items():
        yield f"{_tail(name, WIDTH - 24)}: {count} {'variant' if count == 1 else 'variants'}"


def variant_lines(result: Result) -> Iterator[str]:
    """The line that is printed when a variant is finished, and its warnings."""
    reached = f"; {_small(result.reached)} reached, {result.seconds.get('total', 0.0):.2f} s" if result.reached else ""
    reason = f" ({result.reason})" if result.reason else ""
    ending = f": {_status(result)}{reason}{reached}"
    yield f"{_tail(result.folder, max(WIDTH - len(ending), 20))}{ending}"
    for warning in result.warnings:
        yield from _wrapped(f"warning: {warning}")


def summary_lines(results: Sequence[Result]) -> Iterator[str]:
    """One line per case, and how many of each kind."""
    cases: dict[str, list[Result]] = {}
    for result in results:
        cases.setdefault(result.case, []).append(result)
    width = min(max(map(len, [*cases, "case"])), WIDTH - 55)
    yield f"{'case':{width}}  {'requested':>9}  {'reached':>8}  {'s':>6}  status"
    for name, group in cases.items():
        requested, reached = (_small(_greatest(group, key)) for key in ("requested", "reached"))
        seconds = sum(result.seconds.get("total", 0.0) for result in group)
        status = _status_of_all(group) if group[0].variant_name else _status(group[0])
        yield f"{_tail(name, width):{width}}  {requested:>9}  {reached:>8}  {seconds:6.2f}  {status}"
    yield summary_line(results)


def _status(result: Result) -> str:
    return STATUS[result.status] + ("" if _as_expected(result) else ", not as expected")


def _status_of_all(variants: Sequence[Result]) -> str:
    return f"{sum(result.is_good for result in variants)} of {len(variants)} met"


def _greatest(results: Sequence[Result], key: str) -> float | None:
    """The worst accuracy of some results."""
    return max((number for result in results if (number := getattr(result, key)) is not None), default=None)


def summary_line(results: Sequence[Result]) -> str:
    """How many cases and variants ended how."""
    counts = [f"{sum(r.status == status for r in results)} {text}" for status, text in STATUS.items()]
    disagreeing = sum(not _as_expected(r) for r in results)
    extra = f"; {disagreeing} not as expected" if disagreeing else ""
    cases = len({result.case for result in results})
    word = "case" if cases == 1 else "cases"
    variants = f", {len(results)} variants in all" if any(result.variant_name for result in results) else ""
    return f"{cases} {word}{variants}: {', '.join(counts)}{extra}"


def _as_expected(result: Result) -> bool:
    return result.comparison is None or result.comparison.agrees


def _reference(result: Result) -> str | None:
    return ", ".join(result.reference_pieces) or result.reference


def _how_solved(result: Result) -> str:
    parts = [
        f"reference {_reference(result)}",
        f"accuracy {_small(result.requested)} requested, {_small(result.reached)} reached",
    ]
    if result.mesh:
        mesh = result.mesh
        rounds = "1 round" if mesh.rounds == 1 else f"{mesh.rounds} rounds"
        parts.append(f"{rounds}, order {mesh.order}, {grouped(mesh.triangles)} triangles")
        parts.append(f"{grouped(mesh.unknowns)} unknowns")
    parts.append(f"{result.seconds.get('total', 0.0):.2f} s")
    return "; ".join(parts)


def _whole_matrices(C: Capacitance, mutual: MutualCapacitance, reference: str | None) -> Iterator[str]:  # noqa: N803
    yield f"{MARGIN}Maxwell capacitance, pF/m"
    yield from _matrix(C.conductors, _entries(C.value, C.half_width))
    yield f"{MARGIN}Mutual capacitance, pF/m; on the diagonal to the reference, {reference}"
    yield from _matrix(C.conductors, _entries(mutual.value, mutual.half_width))


def _twist(result: Result) -> Iterator[str]:
    """How much core a metre of twisted cable holds, and the matrix per metre of cable where it is short enough."""
    C, twist = result.per_cable_length, result.twist  # noqa: N806 - the letter of the formula
    if C is None or twist is None:
        return
    yield from _wrapped(
        f"Twist: lay length {length_text(twist.lay_length)}, pitch circle {length_text(twist.pitch_diameter)};"
        f" 1 m of cable holds {twist.length_factor:.6f} m of each core, and all above is per metre of core"
    )
    if len(C.conductors) <= WHOLE_MATRIX:
        yield f"{MARGIN}Maxwell capacitance per metre of cable, pF/m"
        yield from _matrix(C.conductors, _entries(C.value, C.half_width))


def _entries(value: Floats, half_width: Floats) -> list[list[str]]:
    scaled = zip((value * PICO).tolist(), (half_width * PICO).tolist(), strict=True)
    return [[bracketed(v, w) for v, w in zip(*rows, strict=True)] for rows in scaled]


def _matrix(names: Sequence[str], entries: Sequence[Sequence[str]]) -> Iterator[str]:
    """Rows and columns with their names, in as many blocks of columns as the width of the screen asks."""
    names = [_clipped(name, 16) for name in names]
    label = max(map(len, names))
    width = max(*(len(entry) for row in entries for entry in row), *map(len, names))
    fit = max((WIDTH - 2 * len(MARGIN) - label) // (width + 2), 1)
    for first in range(0, len(names), fit):
        block = slice(first, first + fit)
        yield _row("", names[block], label, width)
        for name, row in zip(names, entries, strict=True):
            yield _row(name, row[block], label, width)


def _row(name: str, entries: Sequence[str], label: int, width: int) -> str:
    cells = "".join(f"  {entry:>{width}}" for entry in entries)
    return f"{2 * MARGIN}{name:{label}}{cells}".rstrip()


def _each_conductor(C: Capacitance, mutual: MutualCapacitance, reference: str | None) -> Iterator[str]:  # noqa: N803
    """The long form of many conductors: each with its own, its reference's and its greatest mutual capacitance."""
    n = len(C.conductors)
    yield f"{MARGIN}pF/m, {n} conductors; all {n * n} entries are in result.csv"
    own, pairs = _entries(C.value, C.half_width), _entries(mutual.value, mutual.half_width)
    between = mutual.value - np.diag(np.full(n, np.inf))
    nearest = between.argmax(axis=1).tolist()
    header = ("C_ii", f"to {_clipped(reference or '', 12)}", "greatest mutual", "with")
    lines = [(own[i][i], pairs[i][i], pairs[i][k], _clipped(C.conductors[k], 12)) for i, k in enumerate(nearest)]
    label = max(len(_clipped(name, 12)) for name in C.conductors)
    width = max(len(cell) for line in (header, *lines) for cell in line)
    yield _row("", header, label, width)
    for name, line in zip(C.conductors, lines, strict=True):
        yield _row(_clipped(name, 12), line, label, width)


def _small(number: float | None) -> str:
    return "-" if number is None else f"{number:.1e}"


def _clipped(name: str, width: int) -> str:
    return name if len(name) <= width else f"{name[: width - 2]}.."


def _tail(path: str, width: int) -> str:
    return path if len(path) <= width else f"..{path[2 - width :]}"


def _wrapped(text: str) -> list[str]:
    return textwrap.wrap(text, WIDTH, initial_indent=MARGIN, subsequent_indent=2 * MARGIN)
