"""Where the time goes."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field


@dataclass
class Stopwatch:
    """Seconds spent on each kind of work."""

    seconds: dict[str, float] = field(default_factory=dict)

    @contextmanager
    def on(self, work: str) -> Iterator[None]:
        """Adds the time spent inside to a kind of work."""
        start = time.perf_counter()
        try:
            yield
        finally:
            self.seconds[work] = self.seconds.get(work, 0.0) + time.perf_counter() - start
