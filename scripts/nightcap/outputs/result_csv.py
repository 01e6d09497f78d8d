"""result.csv: the matrices in long form, one entry a line."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from pathlib import Path

from nightcap.geometry.curves import Floats
from nightcap.result import Result
from nightcap.whole_file import write_whole

HEADER = ("quantity", "unit", "row", "column", "value", "lower", "upper", "half_width")
Row = tuple[str, str, str, str, float, float, float, float]


class ResultCsv:
    """RFC 4180 with line feeds, UTF-8. lower and upper are value -+ half_width: bounds of the entry itself."""

    file = "result.csv"
    is_essential = True

    def applies(self, result: Result) -> bool:
        return result.capacitance is not None

    def write(self, result: Result, folder: Path) -> None:
        text = io.StringIO()
        writer = csv.writer(text, lineterminator="\n")
        writer.writerow(HEADER)
        writer.writerows(rows(result))
        write_whole(folder / self.file, text.getvalue().encode())


def rows(result: Result) -> Iterator[Row]:
    """One line per entry; the column of a mutual capacitance to the reference is the reference's name."""
    C, mutual = result.capacitance, result.mutual  # noqa: N806 - the letter of the formula
    if C is None or mutual is None:
        return
    yield from _entries("capacitance", C.conductors, C.value, C.half_width)
    yield from _entries("mutual_capacitance", C.conductors, mutual.value, mutual.half_width, result.reference)


def _entries(
    quantity: str, names: tuple[str, ...], values: Floats, half_widths: Floats, diagonal: str | None = None
) -> Iterator[Row]:
    """One line per entry. diagonal : name to print as the column of a diagonal entry, if not the conductor's own."""
    for i, row in enumerate(names):
        for j, name in enumerate(names):
            column = diagonal if diagonal is not None and i == j else name
            value, half_width = float(values[i, j]), float(half_widths[i, j])
            yield quantity, "F/m", row, column, value, value - half_width, value + half_width, half_width
