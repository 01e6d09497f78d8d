"""``nightcap run``: solves cases and reports each as it is finished."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from pathlib import Path

from nightcap.batch import processors, run_batch
from nightcap.digits import EXPLANATION
from nightcap.geometry.errors import UsageError
from nightcap.jobs import Job, find_jobs
from nightcap.printer import complain, show
from nightcap.progress import Display, display
from nightcap.result import FAILED, Result
from nightcap.screen import result_lines, summary_line, summary_lines
from nightcap.work import Work


def run(paths: Sequence[str], out: Path, accuracy: float | None, processes: int | None, *, pictures: bool) -> bool:
    """Solves all cases of some paths; True if every one is met and as expected. Raises UsageError."""
    jobs = find_jobs(paths)
    _make_folder(out)
    with display(len(jobs)) as live:
        report = Report(live)
        run_batch(jobs, Work(out, accuracy, pictures), min(processes or processors(), len(jobs)), report)
    results = report.in_order(jobs)
    show(_closing(results, out))
    return all(result.is_good for result in results)


class Report:
    """Prints each result when it comes in."""

    def __init__(self, live: Display) -> None:
        self._live = live
        self._results: dict[Job, Result] = {}

    def started(self, job: Job) -> None:
        self._live.started(job)

    def round(self, job: Job, text: str) -> None:
        self._live.round(job, text)

    def finished(self, job: Job, result: Result) -> None:
        self._live.finished(job)
        self._results[job] = result
        complain(str(problem) for problem in result.problems)
        show([*result_lines(result), ""])
        self._live.resumed()

    def in_order(self, jobs: Sequence[Job]) -> list[Result]:
        """The results in the order of their jobs, whatever the order in which they came."""
        return [self._results[job] for job in jobs]


def _make_folder(out: Path) -> None:
    try:
        out.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        said = "is a file, not a folder" if out.is_file() else error.strerror
        raise UsageError(f"{out}: {said}") from error


def _closing(results: Sequence[Result], out: Path) -> Iterator[str]:
    yield from summary_lines(results) if len(results) > 1 else [summary_line(results)]
    yield f"Results are in {out}."
    if any(result.status != FAILED for result in results):
        yield EXPLANATION
