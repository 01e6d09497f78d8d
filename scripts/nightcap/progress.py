"""How a batch comes along: a live display on a terminal, plain lines elsewhere. Both on standard error."""

from __future__ import annotations

import sys
from types import TracebackType
from typing import TYPE_CHECKING, Protocol, Self

from nightcap.jobs import Job
from nightcap.printer import complain

if TYPE_CHECKING:
    from rich.progress import Progress, TaskID


class Display(Protocol):
    """Shows which jobs are running. Used as a context manager."""

    def __enter__(self) -> Self: ...

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None
    ) -> None: ...

    def started(self, job: Job) -> None: ...

    def round(self, job: Job, text: str) -> None: ...

    def finished(self, job: Job) -> None:
        """Makes room for what is now printed about the job."""

    def resumed(self) -> None:
        """Everything about the job is printed."""


def display(total: int) -> Display:
    """The display that suits standard error."""
    return LiveDisplay(total) if sys.stderr.isatty() else PlainDisplay(total)


class PlainDisplay:
    """A line as each job starts, for logs and pipes."""

    def __init__(self, total: int) -> None:
        self._total = total
        self._begun = 0

    def __enter__(self) -> Self:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        pass

    def started(self, job: Job) -> None:
        self._begun += 1
        complain([f"[{self._begun}/{self._total}] {job.folder}"])

    def round(self, job: Job, text: str) -> None:
        pass

    def finished(self, job: Job) -> None:
        pass

    def resumed(self) -> None:
        pass


class LiveDisplay:
    """A bar for the batch and a line for each running job; leaves nothing behind."""

    def __init__(self, total: int) -> None:
        self._progress = _progress()
        self._all = self._progress.add_task("cases", total=total, note="")
        self._tasks: dict[Job, TaskID] = {}

    def __enter__(self) -> Self:
        self._progress.start()
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        self._progress.stop()

    def started(self, job: Job) -> None:
        self._tasks[job] = self._progress.add_task(job.folder, total=None, note="")

    def round(self, job: Job, text: str) -> None:
        self._progress.update(self._tasks[job], note=text)

    def finished(self, job: Job) -> None:
        self._progress.remove_task(self._tasks.pop(job))
        self._progress.advance(self._all)
        self._progress.stop()

    def resumed(self) -> None:
        self._progress.start()


def _progress() -> Progress:
    """A display that honours NO_COLOR, as the library does by itself."""
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeElapsedColumn

    return Progress(
        TextColumn("{task.description}", markup=False),
        BarColumn(bar_width=10),
        MofNCompleteColumn(),
        TextColumn("{task.fields[note]}", markup=False),
        TimeElapsedColumn(),
        console=Console(stderr=True),
        transient=True,
    )
