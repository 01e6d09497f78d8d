"""``nightcap check``: reads cases and says what it understood; solves nothing."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from nightcap.geometry.case import Case
from nightcap.geometry.errors import CaseError, NightcapError, Problem
from nightcap.jobs import Job, find_jobs
from nightcap.printer import complain, show

if TYPE_CHECKING:
    from nightcap.geometry.layout import Layout

MOST_LAYOUTS = 50
"""Of so many variants the layout is resolved, spread evenly; of the others only the file is checked."""


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
    from nightcap.geometry.case_file import read_variants
    from nightcap.work import internal_error

    cases: tuple[Case, ...] = ()
    problems: tuple[Problem, ...] = ()
    lines: list[str] = []
    try:
        cases = read_variants(Path(job.path))
        lines = list(_described(job, cases))
    except CaseError as error:
        problems = error.problems
        complain(str(problem) for problem in problems)
    except (NightcapError, OSError) as error:
        complain([f"{job.path}: {error}"])
    except Exception as error:  # one broken case must not hide the others
        complain([f"{job.path}: {internal_error(error)}"])
    show([f"{job.name}: {'understood' if lines else 'cannot be used'}", *lines])
    drawn = True
    if drawings and cases:
        drawn = _draw(cases[0], problems, drawings / job.name)
    elif drawings:
        show(["  not drawn: correct the file first"])
    show([""])
    return bool(lines) and drawn


def _draw(case: Case, problems: Sequence[Problem], folder: Path) -> bool:
    """Writes the drawing of a case; True if that went well."""
    from nightcap.outputs.sheet import FILES, write_sheet
    from nightcap.work import internal_error

    try:
        write_sheet(case, problems, folder)
    except OSError as error:
        complain([f"{folder}: the drawing could not be written: {error.strerror or error}"])
        return False
    except Exception as error:  # one drawing must not stop the others
        complain([f"{folder}: {internal_error(error)}"])
        return False
    show([f"  drawn in {folder / name}" for name in FILES])
    return True


def _described(job: Job, cases: Sequence[Case]) -> Iterator[str]:
    """Lines about a case and its variants. Raises CaseError with the mistakes of all layouts that were resolved."""
    from nightcap.description import description, variant_lines
    from nightcap.geometry.case_file import told_together

    chosen = _spread(cases)
    layout, problems = _layout(job, chosen[0])
    found = [problems, *(_layout(job, case)[1] for case in chosen[1:])]
    if layout is None or any(found):
        raise CaseError(told_together([(c.variant_name, p) for c, p in zip(chosen, found, strict=True)]))
    yield from description(cases[0], layout)
    yield from variant_lines([case.variant_name for case in cases])
    if len(chosen) < len(cases):
        yield f"    layouts of {len(chosen)} of them resolved, spread evenly"


def _layout(job: Job, case: Case) -> tuple[Layout | None, tuple[Problem, ...]]:
    """The layout of a case, or what is wrong with it."""
    from nightcap.geometry.build_layout import build_layout

    try:
        return build_layout(case), ()
    except CaseError as error:
        return None, error.problems
    except NightcapError as error:
        return None, (Problem(job.path, None, "", str(error)),)


def _spread(cases: Sequence[Case]) -> list[Case]:
    """At most MOST_LAYOUTS of the cases, the first and the last among them."""
    if len(cases) <= MOST_LAYOUTS:
        return list(cases)
    return [cases[k * (len(cases) - 1) // (MOST_LAYOUTS - 1)] for k in range(MOST_LAYOUTS)]
