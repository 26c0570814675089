"""What is going on, on stderr, for anything that takes more than two seconds."""

from __future__ import annotations

import contextlib
import sys
import threading
from collections.abc import Iterator
from types import TracebackType
from typing import Any

PATIENCE = 2.0  # seconds without a word

_running: list[Step] = []


class Step:
    """A piece of work under way: ``step.say("solving, 2 of 7")`` changes what is shown."""

    def __init__(self, text: str, patience: float = PATIENCE):
        self.text = text
        self._status: Any = None
        self._lock = threading.Lock()
        self._over = False
        self._timer = threading.Timer(patience, self._show)
        self._timer.daemon = True

    def say(self, text: str) -> None:
        """Change the text; nothing is printed for it where stderr is not a terminal."""
        with self._lock:
            self.text = text
            if self._status is not None:
                self._status.update(f"{text} …")

    def __enter__(self) -> Step:
        self._timer.start()
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self._timer.cancel()
        with self._lock:
            self._over = True
            if self._status is not None:
                self._status.stop()
                self._status = None

    def _show(self) -> None:
        """Called by the timer when patience runs out: a spinner, or one plain line."""
        with self._lock:
            if self._over:
                return
            if not sys.stderr.isatty():
                with contextlib.suppress(OSError):
                    sys.stderr.write(f"fluidev: {self.text} …\n")
                    sys.stderr.flush()
                return
            from rich.console import Console

            self._status = Console(stderr=True).status(f"{self.text} …")
            self._status.start()


@contextlib.contextmanager
def progress(text: str, patience: float = PATIENCE) -> Iterator[Step]:
    """A step that is shown on stderr once it has lasted longer than patience (s).

    On a terminal a spinner with the text, gone when the step ends; elsewhere one plain line. A
    step within a step changes the text of the outer one for as long as it lasts.
    """
    if _running:
        outer = _running[-1]
        before = outer.text
        outer.say(text)
        try:
            yield outer
        finally:
            outer.say(before)
        return
    with Step(text, patience) as step:
        _running.append(step)
        try:
            yield step
        finally:
            _running.remove(step)
