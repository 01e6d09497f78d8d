from dataclasses import dataclass, field

import pytest
from stand_ins import Moody

from nightcap.batch import run_batch
from nightcap.jobs import Job
from nightcap.result import FAILED, MET, Result


@dataclass
class Diary:
    """Writes down what a batch tells."""

    events: list[tuple[str, str]] = field(default_factory=list)
    results: dict[str, Result] = field(default_factory=dict)

    def started(self, job: Job) -> None:
        self.events.append(("started", job.name))

    def round(self, job: Job, text: str) -> None:
        self.events.append((text, job.name))

    def finished(self, job: Job, result: Result) -> None:
        self.results[job.name] = result


def batch(*names: str, processes: int = 2) -> Diary:
    diary = Diary()
    run_batch([Job(f"{name}.yaml", name) for name in names], Moody(), processes, diary)
    return diary


def test_workers_that_die_fail_only_the_job_they_had() -> None:
    diary = batch("good1", "die1", "fail1", "good2", "die2", "good3")
    status = {name: result.status for name, result in diary.results.items()}
    assert status == {"good1": MET, "die1": FAILED, "fail1": FAILED, "good2": MET, "die2": FAILED, "good3": MET}
    assert str(diary.results["die1"].problems[0]) == "die1.yaml: the worker process died (exit code 7)"


def test_worker_tells_of_rounds_has_one_thread_and_is_deaf_to_interrupts() -> None:
    diary = batch("good", processes=1)
    assert diary.events == [("started", "good"), ("half way", "good")]
    assert diary.results["good"].title == "1 thread, deaf"


def test_interruption_ends_the_workers_at_once() -> None:
    @dataclass
    class Impatient(Diary):
        def round(self, job: Job, text: str) -> None:  # noqa: ARG002
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        run_batch([Job("sleep.yaml", "sleep")], Moody(), 1, Impatient())  # else it would sleep for a minute
