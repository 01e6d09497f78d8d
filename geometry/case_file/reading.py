"""Reading one case file: the steps in order."""

from __future__ import annotations

from pathlib import Path

from nightcap.geometry.case import Case, Source
from nightcap.geometry.case_file.assembly import assemble
from nightcap.geometry.case_file.expansion import expand
from nightcap.geometry.case_file.problems import Problems
from nightcap.geometry.case_file.yaml_tree import Planter, UnreadableError, compose
from nightcap.geometry.errors import CaseError, Problem

LARGEST = 1_000_000
"""Bytes; a case file of more is none."""


def read_case(path: Path) -> Case:
    """Reads a case file. Raises CaseError with every mistake in it, and nothing else."""
    try:
        if path.is_file() and path.stat().st_size > LARGEST:
            raise CaseError([Problem(str(path), None, "", f"is larger than {LARGEST} bytes; this is no case file")])
        text = path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        said = error.strerror or "cannot be read"
        raise CaseError([Problem(str(path), None, "", f"cannot be read: {said}")]) from error
    except UnicodeDecodeError as error:
        raise CaseError([Problem(str(path), None, "", f"is not text in UTF-8 (byte {error.start})")]) from error
    return read_text(text, str(path), path.stem)


def read_text(text: str, file: str = "", name: str = "case") -> Case:
    """Reads a case from text; ``file`` and ``name`` stand in messages and results."""
    lines: dict[str, int] = {}
    problems = Problems(Source(file, lines))
    try:
        node = compose(text)
        if node is None:
            raise UnreadableError(None, "is empty")
        tree = Planter(lines, problems).tree(node)
        if not isinstance(tree, dict):
            raise UnreadableError(1, "must be a mapping with keys such as conductors and boundary")
    except UnreadableError as error:
        raise CaseError([Problem(file, error.line, "", error.text)]) from error
    return assemble(expand(tree, problems), name, problems)
