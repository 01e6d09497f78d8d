"""``nightcap run``: solves cases and reports each as it is finished."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from pathlib import Path

from nightcap.batch import processors, run_batch
from nightcap.digits import EXPLANATION
from nightcap.geometry.errors import UsageError
from nightcap.jobs import Job, find_jobs, with_variants
from nightcap.printer import complain, show
from nightcap.progress import Display, display
from nightcap.result import FAILED, Result
from nightcap.screen import result_lines, summary_line, summary_lines, variant_counts, variant_lines
from nightcap.summaries import Summaries
from nightcap.work import Work


def run(paths: Sequence[str], out: Path, accuracy: float | None, processes: int | None, *, pictures: bool) -> bool:
    """Solves all cases of some paths; True if every one is met and as expected. Raises UsageError."""
    jobs = with_variants(find_jobs(paths))
    _make_folder(out)
    summaries = Summaries(out, jobs)
    summaries.begin(jobs)
    show(variant_counts(jobs))
    try:
        with display(len(jobs)) as live:
            report = Report(live, summaries)
            run_batch(jobs, Work(out, accuracy, pictures), min(processes or processors(), len(jobs)), report)
    finally:
        summaries.end()
    results = report.in_order(jobs)
    show(_closing(results, out))
    return all(result.is_good for result in results) and not summaries.unwritten


class Report:
    """Prints each result when it comes in."""

    def __init__(self, live: Display, summaries: Summaries) -> None:
        self._live = live
        self._summaries = summaries
        self._results: dict[Job, Result] = {}

    def started(self, job: Job) -> None:
        self._live.started(job)

    def round(self, job: Job, text: str) -> None:
        self._live.round(job, text)

    def finished(self, job: Job, result: Result) -> None:
        self._live.finished(job)
        self._results[job] = result
        complain(str(problem) for problem in result.problems)
        show(variant_lines(result) if job.variant else [*result_lines(result), ""])
        self._live.resumed()
        self._summaries.finished(job, result)

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
    if any(result.variant_name for result in results):
        yield "The table of a case's variants is summary.csv in its folder."
    if any(result.status != FAILED and not result.variant_name for result in results):
        yield EXPLANATION
