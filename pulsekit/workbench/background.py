"""Work that must not hold up a hand on a slider: the newest job runs when the hand rests, older ones are told to stop."""

from __future__ import annotations

import threading
from collections.abc import Callable

__all__ = ["Latest"]


class Latest:
    """Runs jobs in a thread, one at a time; a new one stops the one before it.

    A job is called with ``stop``, which returns True once a newer job waits or `halt` was called.
    """

    def __init__(self, *, rest: float = 0.25) -> None:
        self.rest = rest
        self._turn = 0
        self._lock = threading.Lock()
        self._working = threading.Lock()
        self._wake = threading.Condition(self._lock)
        self._open = 0

    def submit(self, job: Callable[[Callable[[], bool]], None], *, rest: float | None = None) -> None:
        """Run a job once nothing newer came for ``rest`` seconds."""
        with self._lock:
            self._turn += 1
            turn = self._turn
            self._open += 1
            self._wake.notify_all()
        threading.Thread(target=self._run, args=(job, turn, self.rest if rest is None else rest), daemon=True).start()

    def halt(self) -> None:
        """Tell the running job to stop; nothing else is started."""
        with self._lock:
            self._turn += 1
            self._wake.notify_all()

    def wait(self, timeout: float = 60.0) -> bool:
        """Wait until no job waits or runs; False if that took longer than ``timeout`` seconds."""
        with self._lock:
            return self._wake.wait_for(lambda: self._open == 0, timeout)

    def _run(self, job: Callable[[Callable[[], bool]], None], turn: int, rest: float) -> None:
        try:
            with self._lock:
                newer = self._wake.wait_for(lambda: self._turn != turn, rest) if rest > 0 else self._turn != turn
            if newer:
                return
            with self._working:
                if self._turn == turn:
                    job(lambda: self._turn != turn)
        finally:
            with self._lock:
                self._open -= 1
                self._wake.notify_all()
