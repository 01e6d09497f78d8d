"""One case from its file to its result folder: what a worker process does."""

from __future__ import annotations

import time
import traceback
from collections.abc import Callable
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from nightcap.geometry.case import Case
from nightcap.geometry.errors import CaseError, NightcapError, Problem
from nightcap.jobs import Job
from nightcap.provenance import other_files, provenance
from nightcap.result import Result, failed_result, solved_result

Tell = Callable[[str], None]
"""Receives one line about every round of the solver."""


@dataclass(frozen=True)
class Work:
    """What is done with every job; called in the worker process. Never raises an Exception."""

    out: Path
    """Folder that receives the result folders."""
    accuracy: float | None = None
    """Instead of what the case asks."""
    pictures: bool = True

    def __call__(self, job: Job, tell: Tell) -> Result:
        from nightcap.outputs import write_outputs

        started, clock = datetime.now(UTC), time.perf_counter()
        result = self._solve(job, tell)
        seconds = time.perf_counter() - clock
        result = replace(
            result,
            seconds={**result.seconds, "total": seconds},
            provenance={**provenance(job.path, started, seconds), **result.provenance},
        )
        result = write_outputs(_marked(result, job), self.out / job.folder, job.path, pictures=self.pictures)
        return replace(result, drawing=None)

    def failed(self, job: Job, text: str) -> Result:
        """Records a job whose worker could not say itself what went wrong."""
        from nightcap.outputs import write_outputs

        result = failed_result(job.name, (Problem(job.path, None, "", text),))
        result = replace(_marked(result, job), provenance=provenance(job.path, datetime.now(UTC), 0.0))
        return write_outputs(result, self.out / job.folder, job.path, pictures=False)

    def _solve(self, job: Job, tell: Tell) -> Result:
        """The steps; every way in which they fail becomes a failed result."""
        case = None
        try:
            case = self._with_accuracy(_read(job))
            return replace(self._solved(job, case, tell), provenance=other_files(case.files))
        except CaseError as error:
            return failed_result(job.name, error.problems, case)
        except (NightcapError, OSError, MemoryError) as error:
            text = str(error) or "out of memory"
            return failed_result(job.name, (Problem(job.path, None, "", text),), case)
        except Exception as error:  # one broken case must not stop the others
            return failed_result(job.name, (Problem(job.path, None, "", internal_error(error)),), case)

    def _solved(self, job: Job, case: Case, tell: Tell) -> Result:
        from nightcap.geometry.build_layout import build_layout
        from nightcap.outputs.drawing import Drawing
        from nightcap.solver.solve import solve

        layout = build_layout(case)
        solution = solve(
            layout,
            case.accuracy,
            case.limits,
            floating=tuple(conductor.name for conductor in case.conductors if conductor.floating),
            ties=case.ties,
            progress=lambda r: tell(round_text(r)),
        )
        drawing = Drawing(case, layout, solution.conductors, solution.potentials[:, 0], solution.fields)
        return solved_result(job.name, case, solution, drawing if self.pictures else None)

    def _with_accuracy(self, case: Case) -> Case:
        return case if self.accuracy is None else replace(case, accuracy=self.accuracy)


def _read(job: Job) -> Case:
    """The case of a job. Raises CaseError."""
    if job.variant:
        from nightcap.geometry.case_file import read_variant

        return read_variant(Path(job.path), job.variant)
    from nightcap.geometry.case_file import read_case

    case = read_case(Path(job.path))
    if case.variant_name:
        raise CaseError([Problem(job.path, None, "vary", "was not there when the run began; start it again")])
    return case


def _marked(result: Result, job: Job) -> Result:
    """The result with the variant that it belongs to."""
    return replace(result, variant=dict(job.values), variant_name=job.variant)


def round_text(r: Any) -> str:
    """One line about a round of the solver. r : nightcap.solver.solve.Round."""
    return f"order {r.order}, {r.triangles} triangles, +-{r.reached:.1e}"


def internal_error(error: Exception) -> str:
    """A mistake of nightcap's own, with the place in its code that a report of it should name."""
    frames = [f for f in traceback.extract_tb(error.__traceback__) if f.name != "__call__"]
    place = f" at {Path(frames[-1].filename).name}:{frames[-1].lineno}" if frames else ""
    return f"internal error{place}, please report it: {type(error).__name__}: {error}"
