"""Jobs spread over worker processes, such that none can harm another."""

from __future__ import annotations

import multiprocessing
import os
import signal
from collections import deque
from collections.abc import Iterator, Sequence
from contextlib import contextmanager, suppress
from multiprocessing.connection import Connection, wait
from typing import Protocol

from nightcap.jobs import Job
from nightcap.result import Result
from nightcap.work import Tell

THREAD_LIMITS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "VECLIB_MAXIMUM_THREADS")
KILLED = 9
"""Number of the signal that the system sends when memory runs out."""


class Watcher(Protocol):
    """Is told how a batch comes along."""

    def started(self, job: Job) -> None: ...

    def round(self, job: Job, text: str) -> None: ...

    def finished(self, job: Job, result: Result) -> None: ...


class Task(Protocol):
    """What is done with every job. Travels to the worker processes, so it must be picklable."""

    def __call__(self, job: Job, tell: Tell) -> Result: ...

    def failed(self, job: Job, text: str) -> Result:
        """Records a job whose worker died; called in the main process."""


def processors() -> int:
    """How many processors this process may use."""
    with suppress(AttributeError):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def run_batch(jobs: Sequence[Job], task: Task, processes: int, watcher: Watcher) -> None:
    """Does a task with every job, ``processes`` at a time; a worker that dies fails only the job it had."""
    waiting = deque(jobs)
    workers: list[_Worker] = []
    try:
        while waiting or workers:
            while waiting and len(workers) < processes:
                workers.append(_Worker(task, waiting[0]))
                _give_next(workers[-1], waiting, watcher)
            ready = wait([worker.pipe for worker in workers])
            for worker in [w for w in workers if w.pipe in ready]:
                if not _listen(worker, task, watcher):
                    continue
                if waiting and not worker.is_dead:
                    _give_next(worker, waiting, watcher)
                else:
                    workers.remove(worker)
                    worker.dismiss()
    finally:
        for worker in workers:
            worker.kill()


def _give_next(worker: _Worker, waiting: deque[Job], watcher: Watcher) -> None:
    worker.job = waiting.popleft()
    watcher.started(worker.job)
    with suppress(OSError):  # already dead: its pipe will say so
        worker.pipe.send(worker.job)


def _listen(worker: _Worker, task: Task, watcher: Watcher) -> bool:
    """Takes one message; True if it ends the worker's job."""
    try:
        message = worker.pipe.recv()
    except (EOFError, OSError):
        worker.is_dead = True
        message = task.failed(worker.job, f"the worker process died ({worker.last_words()})")
    if isinstance(message, str):
        watcher.round(worker.job, message)
        return False
    watcher.finished(worker.job, message)
    return True


class _Worker:
    """A process that does one job after another."""

    def __init__(self, task: Task, job: Job) -> None:
        context = multiprocessing.get_context("spawn")
        self.job = job
        """What it does now, or did last."""
        self.is_dead = False
        self.pipe, theirs = context.Pipe()
        self.process = context.Process(target=_serve, args=(theirs, task), daemon=True)
        with _interrupts_ignored(), _one_thread_each():
            self.process.start()
        theirs.close()

    def last_words(self) -> str:
        """How the process ended, for people."""
        self.process.join(5.0)
        code = self.process.exitcode
        if code is None or code >= 0:
            return f"exit code {code}"
        hint = ", often a sign of too little memory" if code == -KILLED else ""
        return f"signal {-code}, {signal.strsignal(-code)}{hint}"

    def dismiss(self) -> None:
        """Lets an idle worker end; it does so when its pipe closes."""
        self.pipe.close()
        self.process.join(5.0)

    def kill(self) -> None:
        self.process.kill()
        self.process.join(5.0)
        self.pipe.close()


def _serve(pipe: Connection, task: Task) -> None:
    """The life of a worker: jobs come in, lines about rounds and one result per job go out."""

    def tell(text: str) -> None:
        with suppress(OSError):  # nobody listens any more: finish the case nevertheless
            pipe.send(text)

    with suppress(EOFError, OSError):
        while True:
            pipe.send(task(pipe.recv(), tell))


@contextmanager
def _interrupts_ignored() -> Iterator[None]:
    """Workers start deaf to Ctrl-C, which a terminal sends to all processes; the main process ends them."""
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)


@contextmanager
def _one_thread_each() -> Iterator[None]:
    """Processes started here compute with one thread; more would fight over the processors."""
    before = {name: os.environ.get(name) for name in THREAD_LIMITS}
    os.environ.update(dict.fromkeys(THREAD_LIMITS, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value
