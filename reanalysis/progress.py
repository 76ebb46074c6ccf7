"""Stages of a long job, with their times, for whoever wants to watch."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import AbstractContextManager, contextmanager
from typing import Protocol


class Stages(Protocol):
    """Something that is told when a stage begins and ends."""

    def stage(self, name: str) -> AbstractContextManager[None]:
        """Return a context that lasts as long as the stage."""


class StageClock:
    """Measures each stage and says nothing.

    Attributes
    ----------
    seconds : dict
        Time of each stage so far, in order of first use; a stage that comes again adds up.
    """

    def __init__(self) -> None:
        self.seconds: dict[str, float] = {}

    @contextmanager
    def stage(self, name: str) -> Iterator[None]:
        """Measure one stage."""
        start = time.perf_counter()
        try:
            yield
        finally:
            self.seconds[name] = self.seconds.get(name, 0.0) + time.perf_counter() - start
