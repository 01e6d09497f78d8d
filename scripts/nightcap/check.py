"""``nightcap check``: reads cases and says what it understood; solves nothing."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from nightcap.geometry.case import Case
from nightcap.geometry.errors import CaseError, NightcapError, Problem
from nightcap.jobs import Job, find_jobs
from nightcap.printer import complain, show


def check(paths: Sequence[str], drawings: Path | None = None) -> bool:
    """Describes all cases of some paths; True if every one can be used. Raises UsageError.

    drawings : folder that receives a drawing of each case that could be read, right or wrong.
    """
    jobs = find_jobs(paths)
    good = sum([_check_one(job, drawings) for job in jobs])
    if len(jobs) > 1:
        show([f"{len(jobs)} cases: {good} can be solved, {len(jobs) - good} cannot"])
    return good == len(jobs)


def _check_one(job: Job, drawings: Path | None) -> bool:
    from nightcap.description import description
    from nightcap.geometry.build_layout import build_layout
    from nightcap.geometry.case_file import read_case
    from nightcap.work import internal_error

    case: Case | None = None
    problems: tuple[Problem, ...] = ()
    lines: list[str] = []
    try:
        case = read_case(Path(job.path))
        lines = list(description(case, build_layout(case)))
    except CaseError as error:
        problems = error.problems
        complain(str(problem) for problem in problems)
    except (NightcapError, OSError) as error:
        complain([f"{job.path}: {error}"])
    except Exception as error:  # one broken case must not hide the others
        complain([f"{job.path}: {internal_error(error)}"])
    show([f"{job.name}: {'understood' if lines else 'cannot be used'}", *lines])
    drawn = True
    if drawings and case:
        drawn = _draw(case, problems, drawings / job.name)
    elif drawings:
        show(["  not drawn: correct the file first"])
    show([""])
    return bool(lines) and drawn


def _draw(case: Case, problems: Sequence[Problem], folder: Path) -> bool:
    """Writes the drawing of a case; True if that went well."""
    from nightcap.outputs.sheet import FILES, write_sheet

    try:
        write_sheet(case, problems, folder)
    except OSError as error:
        complain([f"{folder}: the drawing could not be written: {error.strerror or error}"])
        return False
    show([f"  drawn in {folder / name}" for name in FILES])
    return True
