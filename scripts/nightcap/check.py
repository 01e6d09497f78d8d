"""``nightcap check``: reads cases and says what it understood; solves nothing."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from nightcap.geometry.errors import CaseError, NightcapError
from nightcap.jobs import Job, find_jobs
from nightcap.printer import complain, show


def check(paths: Sequence[str]) -> bool:
    """Describes all cases of some paths; True if every one can be used. Raises UsageError."""
    jobs = find_jobs(paths)
    good = sum([_check_one(job) for job in jobs])
    if len(jobs) > 1:
        show([f"{len(jobs)} cases: {good} can be solved, {len(jobs) - good} cannot"])
    return good == len(jobs)


def _check_one(job: Job) -> bool:
    from nightcap.description import description
    from nightcap.geometry.build_layout import build_layout
    from nightcap.geometry.case_file import read_case
    from nightcap.work import internal_error

    try:
        case = read_case(Path(job.path))
        lines = list(description(case, build_layout(case)))
    except CaseError as error:
        complain(str(problem) for problem in error.problems)
    except (NightcapError, OSError) as error:
        complain([f"{job.path}: {error}"])
    except Exception as error:  # one broken case must not hide the others
        complain([f"{job.path}: {internal_error(error)}"])
    else:
        show([f"{job.name}: understood", *lines, ""])
        return True
    show([f"{job.name}: cannot be used", ""])
    return False
