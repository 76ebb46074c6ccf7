"""Stages on a terminal: one line each, with elapsed time; silent when piped."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager

from rich.console import Console

from reanalysis.progress import StageClock
from reanalysis.report import numbers


class TerminalClock(StageClock):
    """Measures each stage and, on a terminal, shows it while it lasts and its time afterwards."""

    def __init__(self) -> None:
        super().__init__()
        self._console = Console(file=sys.stderr, highlight=False)

    def heading(self, text: str) -> None:
        """Say which study comes next."""
        if self._console.is_terminal:
            self._console.print(text, style="bold", markup=False)

    @contextmanager
    def stage(self, name: str) -> Iterator[None]:
        """Measure one stage and show it."""
        if not self._console.is_terminal:
            with super().stage(name):
                yield
            return
        before = self.seconds.get(name, 0.0)
        with self._console.status(f"  {name}"), super().stage(name):
            yield
        took = numbers.duration(self.seconds[name] - before)
        self._console.print(f"  {name:<32}{took:>8}", markup=False)
