"""summary.csv: one row per variant of a case."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path

from nightcap.jobs import Job
from nightcap.result import Result
from nightcap.whole_file import write_whole

FILE = "summary.csv"
NOT_RUN = "not_run"
"""Status of a variant that has no result yet."""
LEADING = ("variant", "status", "message", "requested", "reached")


def write_summary(folder: Path, jobs: Sequence[Job], results: Mapping[Job, Result]) -> None:
    """Writes the table of a case's variants, whole or not at all. Raises OSError.

    RFC 4180 with line feeds, UTF-8, SI units: F/m for the entries, m for parameters that are lengths. Each entry on or
    above the diagonal of the Maxwell capacitance matrix has a column, and one for its half-width. What a variant does
    not have is left empty.
    """
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerows(rows(jobs, results))
    folder.mkdir(parents=True, exist_ok=True)
    write_whole(folder / FILE, text.getvalue().encode())


def rows(jobs: Sequence[Job], results: Mapping[Job, Result]) -> Iterator[list[object]]:
    """The header, and a row for each job in the order given."""
    parameters = list(dict.fromkeys(name for job in jobs for name, _ in job.values))
    entries = list(dict.fromkeys(pair for job in jobs if job in results for pair, *_ in _entries(results[job])))
    heads = [head for row, column in entries for head in (f"C {row} {column}", f"half_width {row} {column}")]
    yield [*LEADING, *parameters, *heads]
    for job in jobs:
        result = results.get(job)
        values = dict(job.values)
        matrix = {pair: numbers for pair, *numbers in _entries(result)} if result else {}
        cells = [number for pair in entries for number in matrix.get(pair, ("", ""))]
        yield [job.variant, *_state(result), *(values.get(name, "") for name in parameters), *cells]


def _state(result: Result | None) -> list[object]:
    """Status, message, accuracy requested and reached."""
    if result is None:
        return [NOT_RUN, "", "", ""]
    message = "; ".join([result.reason] if result.reason else [problem.text for problem in result.problems])
    return [result.status, message, *("" if x is None else x for x in (result.requested, result.reached))]


def _entries(result: Result) -> Iterator[tuple[tuple[str, str], float, float]]:
    """Names, value and half-width (F/m) of each entry on or above the diagonal."""
    C = result.capacitance  # noqa: N806 - the letter of the formula
    if C is None:
        return
    for i, row in enumerate(C.conductors):
        for j, column in enumerate(C.conductors[i:], i):
            yield (row, column), float(C.value[i, j]), float(C.half_width[i, j])
