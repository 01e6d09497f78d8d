"""Reading one case file: the steps in order."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from nightcap.geometry.case import Case
from nightcap.geometry.case_file.document import Document, document_of
from nightcap.geometry.case_file.survey import Outcome, survey, told_together
from nightcap.geometry.errors import CaseError, Problem

LARGEST = 1_000_000
"""Bytes; a case file of more is none."""


def read_case(path: Path) -> Case:
    """Reads a case file, of several variants the first. Raises CaseError with every mistake in it, and nothing else."""
    document = read_document(path)
    return document.case(document.variants[0])


def read_text(text: str, file: str = "", name: str = "case") -> Case:
    """Reads a case from text; ``file`` and ``name`` stand in messages and results."""
    document = document_of(text, file, name)
    return document.case(document.variants[0])


def read_variants(path: Path) -> tuple[Case, ...]:
    """All variants of a case file; one without a name if it varies nothing. Raises CaseError with every mistake."""
    outcomes = survey(read_document(path))
    if any(outcome.problems for outcome in outcomes):
        raise CaseError(told_together([(outcome.variant.name, outcome.problems) for outcome in outcomes]))
    return tuple(outcome.case for outcome in outcomes if outcome.case)


def read_variant(path: Path, name: str) -> Case:
    """One variant of a case file. Raises CaseError with every mistake in it."""
    document = read_document(path)
    for variant in document.variants:
        if variant.name == name:
            return document.case(variant)
    raise CaseError(document.problems or [Problem(str(path), None, "vary", f"there is no variant {name} any more")])


def list_variants(path: Path) -> tuple[tuple[str, Mapping[str, float]], ...]:
    """Name and values (SI units) of every variant of a file, none if it varies nothing.

    Raises CaseError if not one of them can be used.
    """
    document = read_document(path)
    if not document.problems and not document.variants[0].name:
        return ()
    outcomes = survey(document)
    if all(outcome.problems for outcome in outcomes):
        raise CaseError(told_together([(outcome.variant.name, outcome.problems) for outcome in outcomes]))
    return tuple((outcome.variant.name, _values(document, outcome)) for outcome in outcomes)


def _values(document: Document, outcome: Outcome) -> Mapping[str, float]:
    return outcome.case.variant if outcome.case else document.in_si_units(outcome.variant)


def read_document(path: Path) -> Document:
    """Reads a case file up to the point where its variants part. Raises CaseError if it is none."""
    try:
        if path.is_file() and path.stat().st_size > LARGEST:
            raise CaseError([Problem(str(path), None, "", f"is larger than {LARGEST} bytes; this is no case file")])
        text = path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        said = error.strerror or "cannot be read"
        raise CaseError([Problem(str(path), None, "", f"cannot be read: {said}")]) from error
    except UnicodeDecodeError as error:
        raise CaseError([Problem(str(path), None, "", f"is not text in UTF-8 (byte {error.start})")]) from error
    return document_of(text, str(path), path.stem)
