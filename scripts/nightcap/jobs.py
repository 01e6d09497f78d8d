"""The cases that a command line names, and the result folder of each."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from nightcap.geometry.errors import UsageError

SUFFIXES = (".yaml", ".yml")


@dataclass(frozen=True)
class Job:
    """One case file."""

    path: str
    """As the user gave it, or below the folder that the user gave."""
    name: str
    """Stem of the file, after its path below the folder given; the result folder has the same name."""


def find_jobs(paths: Sequence[str]) -> tuple[Job, ...]:
    """All cases of some files and folders, in a fixed order.

    Raises UsageError if a path cannot be read, if there is no case at all, or if two cases share a result folder.
    """
    jobs = tuple(job for path in paths for job in _jobs_of(path))
    if not jobs:
        raise UsageError(f"no case file (*.yaml, *.yml) found below {', '.join(paths)}")
    _refuse_shared_folders(jobs)
    return jobs


def _jobs_of(path: str) -> Iterator[Job]:
    if os.path.isdir(path):
        return _jobs_below(Path(path))
    if not os.path.exists(path):
        raise UsageError(f"{path}: no such file or folder")
    if not os.path.isfile(path) or not os.access(path, os.R_OK):
        raise UsageError(f"{path}: not a file that can be read")
    return iter([Job(path, Path(path).stem)])


def _jobs_below(folder: Path) -> Iterator[Job]:
    """Case files below a folder; what is hidden (a leading dot) is left alone, links to folders are not followed."""
    for root, folders, files in os.walk(folder, onerror=_refuse_folder):
        folders[:] = sorted(name for name in folders if not name.startswith("."))
        for name in sorted(files):
            if name.lower().endswith(SUFFIXES) and not name.startswith("."):
                path = Path(root, name)
                yield Job(str(path), path.relative_to(folder).with_suffix("").as_posix())


def _refuse_folder(error: OSError) -> None:
    raise UsageError(f"{error.filename}: {error.strerror}") from error


def _refuse_shared_folders(jobs: Sequence[Job]) -> None:
    owners: dict[str, Job] = {}
    clashes = []
    for job in jobs:
        other = owners.setdefault(os.path.normcase(job.name), job)
        if other is not job:
            clashes.append(f"{other.path} and {job.path} would share the result folder {job.name}")
    if clashes:
        raise UsageError("; ".join(clashes))
