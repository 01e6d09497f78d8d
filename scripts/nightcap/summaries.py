"""The tables of variants, kept up to date while a batch runs."""

from __future__ import annotations

import time
from collections.abc import Sequence
from contextlib import suppress
from pathlib import Path

from nightcap.jobs import Job
from nightcap.outputs import clear_folder
from nightcap.outputs.summary_csv import FILE, write_summary
from nightcap.printer import complain
from nightcap.result import Result

INTERVAL = 10.0
"""s between two writings of one table: a power cut costs no more, and thousands of variants do not slow each other."""


class Summaries:
    """One table for each case that has variants."""

    def __init__(self, out: Path, jobs: Sequence[Job]) -> None:
        self.out = out
        self.jobs: dict[str, list[Job]] = {}
        for job in jobs:
            if job.variant:
                self.jobs.setdefault(job.name, []).append(job)
        self.results: dict[str, dict[Job, Result]] = {name: {} for name in self.jobs}
        self.written: dict[str, float] = {}
        """Time at which each table was last written, s."""
        self.unwritten: set[str] = set()
        """Cases whose table is not up to date because it could not be written."""

    def begin(self, jobs: Sequence[Job]) -> None:
        """Takes away what an earlier run left, and writes the tables without results."""
        for job in jobs:
            if not job.variant:
                with suppress(OSError):
                    (self.out / job.name / FILE).unlink(missing_ok=True)
        for name in self.jobs:
            with suppress(OSError):  # a folder that cannot be changed will be said to be so by its variants
                clear_folder(self.out / name)
            self._write(name)

    def finished(self, job: Job, result: Result) -> None:
        """Takes a result; writes the table if it is complete, or has not been written for a while."""
        if not job.variant:
            return
        results = self.results[job.name]
        results[job] = result
        is_complete = len(results) == len(self.jobs[job.name])
        if is_complete or time.monotonic() - self.written.get(job.name, 0.0) > INTERVAL:
            self._write(job.name)

    def end(self) -> None:
        """Writes the tables of cases that were cut short, and says which tables could not be written."""
        for name, jobs in self.jobs.items():
            if len(self.results[name]) < len(jobs) or name in self.unwritten:
                self._write(name)
        complain(f"{self.out / name / FILE}: could not be written" for name in sorted(self.unwritten))

    def _write(self, name: str) -> None:
        self.written[name] = time.monotonic()
        try:
            write_summary(self.out / name, self.jobs[name], self.results[name])
            self.unwritten.discard(name)
        except OSError:  # numbers are in the folders of the variants; the table is tried again
            self.unwritten.add(name)
