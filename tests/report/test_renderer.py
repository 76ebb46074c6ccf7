"""The process that renders: Ctrl-C does not reach it, and its death is told in words."""

from __future__ import annotations

import signal
import threading
from concurrent.futures import Future
from concurrent.futures.process import BrokenProcessPool

import pytest

from reanalysis.errors import ReportError
from reanalysis.report import renderer
from reanalysis.report.renderer import Renderer, collect


class Pool:
    """Stands for the pool; notes what a process that starts now would do on Ctrl-C."""

    seen: list[object]

    def __init__(self, **_: object) -> None:
        type(self).seen = []

    def submit(self, *_: object) -> None:
        """Start a process, as the first job does."""
        self.seen.append(signal.getsignal(signal.SIGINT))

    def shutdown(self, **options: object) -> None:
        """Note how the pool is left."""
        self.seen.append(options)


@pytest.fixture(autouse=True)
def pool(monkeypatch: pytest.MonkeyPatch) -> type[Pool]:
    """Put the stand-in in the pool's place."""
    monkeypatch.setattr(renderer, "ProcessPoolExecutor", Pool)
    return Pool


def test_interrupt_stays_with_the_parent(pool: type[Pool]) -> None:
    """The process starts deaf to Ctrl-C; here it works as before, and a finished job waits for the pages."""
    before = signal.getsignal(signal.SIGINT)

    with Renderer():
        assert signal.getsignal(signal.SIGINT) is before

    assert pool.seen == [signal.SIG_IGN, {"wait": True, "cancel_futures": True}]


def test_stopped_run_waits_for_nothing(pool: type[Pool]) -> None:
    """When the user stops, nobody waits for pages."""
    with pytest.raises(KeyboardInterrupt), Renderer():
        raise KeyboardInterrupt

    assert pool.seen[1] == {"wait": False, "cancel_futures": True}


def test_renderer_in_a_thread(pool: type[Pool]) -> None:
    """Outside the main thread, where signals cannot be set, the process starts all the same."""
    thread = threading.Thread(target=Renderer)
    thread.start()
    thread.join()

    assert pool.seen == [signal.getsignal(signal.SIGINT)]


def test_killed_process_is_told_in_words() -> None:
    """A dead process becomes an error with advice, finished pages are handed on."""
    done: Future[dict[str, bytes]] = Future()
    done.set_result({"html": b"page"})
    dead: Future[dict[str, bytes]] = Future()
    dead.set_exception(BrokenProcessPool())

    assert collect(done) == {"html": b"page"}
    with pytest.raises(ReportError, match=r"was killed, probably for want of memory(.|\n)*free some memory"):
        collect(dead)
