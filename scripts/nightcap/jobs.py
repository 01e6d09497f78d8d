"""The cases that a command line names, and the result folder of each."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from nightcap.geometry.errors import UsageError

SUFFIXES = (".yaml", ".yml")
MATERIALS = re.compile(r"(.*\.)?materials\.ya?ml", re.IGNORECASE)
"""Names of files that list materials for the cases beside them."""


@dataclass(frozen=True)
class Job:
    """One case file."""

    path: str
    """As the user gave it, or below the folder that the user gave."""
    name: str
    """Stem of the file, after its path below the folder given: the name of the case."""
    variant: str = ""
    """Name of the variant, such as ``pitch=1.22,wall=0.35``; empty for a case that varies nothing."""
    values: tuple[tuple[str, float], ...] = ()
    """Varied parameters of the variant and their values, SI units."""

    @property
    def folder(self) -> str:
        """The result folder, below that of all results."""
        return f"{self.name}/{self.variant}" if self.variant else self.name


def find_jobs(paths: Sequence[str]) -> tuple[Job, ...]:
    """All cases of some files and folders, in a fixed order.

    Raises UsageError if a path cannot be read, if there is no case at all, or if two cases share a result folder.
    """
    jobs = tuple(dict.fromkeys(job for path in paths for job in _jobs_of(path)))
    if not jobs:
        raise UsageError(f"no case file (*.yaml, *.yml) found below {', '.join(paths)}")
    _refuse_shared_folders(jobs)
    return jobs


def with_variants(jobs: Sequence[Job]) -> tuple[Job, ...]:
    """One job for each variant of each case. A file that cannot be used at all stays one job, which will say why.

    Raises UsageError if two of them share a result folder.
    """
    spread = tuple(one for job in jobs for one in _variants_of(job))
    _refuse_shared_folders(spread)
    return spread


def _variants_of(job: Job) -> Sequence[Job]:
    from nightcap.geometry.case_file import list_variants
    from nightcap.geometry.errors import CaseError

    try:
        if not _may_vary(job.path):
            return [job]
        variants = list_variants(Path(job.path))
    except (CaseError, OSError):
        return [job]
    return [replace(job, variant=name, values=tuple(values.items())) for name, values in variants] or [job]


def _may_vary(path: str) -> bool:
    """Whether it is worth while to read a file: most vary nothing. A backslash can hide the word in a quoted key."""
    content = Path(path).read_bytes()
    return b"vary" in content or b"\\" in content


def _jobs_of(path: str) -> Iterator[Job]:
    if os.path.isdir(path):
        return _jobs_below(Path(path))
    if not os.path.exists(path):
        raise UsageError(f"{path}: no such file or folder")
    if not os.path.isfile(path) or not os.access(path, os.R_OK):
        raise UsageError(f"{path}: not a file that can be read")
    return iter([Job(path, Path(path).stem)])


def _jobs_below(folder: Path) -> Iterator[Job]:
    """Case files below a folder; links to folders are not followed.

    What is hidden (a leading dot) and lists of materials are left alone.
    """
    for root, folders, files in os.walk(folder, onerror=_refuse_folder):
        folders[:] = sorted(name for name in folders if not name.startswith("."))
        for name in sorted(files):
            if name.lower().endswith(SUFFIXES) and not name.startswith(".") and not MATERIALS.fullmatch(name):
                path = Path(root, name)
                yield Job(str(path), path.relative_to(folder).with_suffix("").as_posix())


def _refuse_folder(error: OSError) -> None:
    raise UsageError(f"{error.filename}: {error.strerror}") from error


def _refuse_shared_folders(jobs: Sequence[Job]) -> None:
    owners: dict[str, Job] = {}
    clashes = []
    for job in jobs:
        other = owners.setdefault(os.path.normcase(job.folder), job)
        if other is not job:
            clashes.append(f"{other.path} and {job.path} would share the result folder {job.folder}")
    if clashes:
        raise UsageError("; ".join(clashes))
