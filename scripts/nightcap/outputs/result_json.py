"""result.json: everything about a case, in SI units."""

from __future__ import annotations

import dataclasses
import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from nightcap.geometry.errors import Problem
from nightcap.geometry.twist import Twist
from nightcap.result import Capacitance, Result
from nightcap.whole_file import write_whole

SCHEMA = "nightcap-result/1"


class ResultJson:
    """JSON (RFC 8259), UTF-8, one line per row of a matrix."""

    file = "result.json"
    is_essential = True

    def applies(self, result: Result) -> bool:  # noqa: ARG002 - also a failure is recorded
        return True

    def write(self, result: Result, folder: Path) -> None:
        text = json_text(result_document(result))
        write_whole(folder / self.file, (text + "\n").encode())


def result_document(result: Result) -> dict[str, Any]:
    """The result as JSON values; a failed case has the same keys, with null for what it lacks."""
    C, mutual = result.capacitance, result.mutual  # noqa: N806 - the letter of the formula
    document = {
        "schema": SCHEMA,
        "title": result.title,
        "case": result.case,
        "variant": dict(result.variant),
        "status": result.status,
        "reason": result.reason,
        "conductors": list(C.conductors) if C else [],
        "reference": result.reference,
        "capacitance": _matrices(C) if C else None,
        "mutual_capacitance": _unit_and(value=mutual.value, half_width=mutual.half_width) if mutual else None,
        "accuracy": {"requested": result.requested, "reached": result.reached},
        "mesh": _fields(result.mesh),
        "rounds": [_fields(r) for r in result.rounds],
        "seconds": dict(result.seconds),
        "expect": _comparison(result),
        "notes": list(result.notes),
        "warnings": list(result.warnings),
        "errors": [_error(problem) for problem in result.problems],
        "provenance": dict(result.provenance),
    }
    if result.reference_pieces:
        document["reference_pieces"] = list(result.reference_pieces)
    if result.twist:
        document["twist"] = _twist(result, result.twist)
    if result.before_reduction:
        full = result.before_reduction
        document["before_reduction"] = {"conductors": list(full.conductors), "capacitance": _matrices(full)}
    return document


def _twist(result: Result, twist: Twist) -> dict[str, Any]:
    """Lengths in m; the matrix per metre of cable instead of per metre of core."""
    C = result.per_cable_length  # noqa: N806 - the letter of the formula
    return {
        **dataclasses.asdict(twist),
        "length_factor": twist.length_factor,
        "capacitance_per_cable_length": _matrices(C) if C else None,
    }


def _matrices(C: Capacitance) -> dict[str, Any]:  # noqa: N803 - the letter of the formula
    matrices = _unit_and(value=C.value, lower=C.lower, upper=C.upper, half_width=C.half_width)
    return {"unit": matrices.pop("unit"), "form": "Maxwell", **matrices}


def _unit_and(**matrices: Any) -> dict[str, Any]:
    return {"unit": "F/m", **{name: matrix.tolist() for name, matrix in matrices.items()}}


def _comparison(result: Result) -> dict[str, Any] | None:
    comparison = result.comparison
    if comparison is None:
        return None
    deviation = comparison.deviation if math.isfinite(comparison.deviation) else None
    return {**dataclasses.asdict(comparison), "deviation": deviation, "agrees": comparison.agrees}


def _error(problem: Problem) -> dict[str, Any]:
    """A problem with the name of its file only: where the file lay is no business of whoever gets the result."""
    return {"file": Path(problem.file).name, "line": problem.line, "key": problem.key, "text": problem.text}


def _fields(record: Any) -> dict[str, Any] | None:
    return None if record is None else dataclasses.asdict(record)


def json_text(value: Any, indent: str = "") -> str:
    """JSON with nested values on lines of their own, and every list of plain values on one line."""
    deeper = indent + "  "
    if isinstance(value, Mapping) and value:
        return _block("{}", [f"{json.dumps(k)}: {json_text(v, deeper)}" for k, v in value.items()], indent)
    if isinstance(value, list) and any(isinstance(item, list | dict) for item in value):
        return _block("[]", [json_text(item, deeper) for item in value], indent)
    return json.dumps(value, allow_nan=False, ensure_ascii=False)


def _block(brackets: str, lines: list[str], indent: str) -> str:
    body = ",\n".join(f"{indent}  {line}" for line in lines)
    return f"{brackets[0]}\n{body}\n{indent}{brackets[1]}"
