"""A line on stderr that says how far long work is; nothing for short work, nothing where nobody watches."""

from __future__ import annotations

import sys
import time

_PATIENCE_S = 1.0
_PAUSE_S = 0.2


class ProgressLine:
    """Used as a context; called with what is done, how far, of how much."""

    def __init__(self) -> None:
        self._wanted = sys.stderr.isatty()
        self._due = time.monotonic() + _PATIENCE_S
        self._shown = 0

    def __enter__(self) -> ProgressLine:
        return self

    def __exit__(self, *_: object) -> None:
        if self._shown:
            sys.stderr.write("\r" + " " * self._shown + "\r")
            sys.stderr.flush()

    def __call__(self, what: str, done: int, total: int) -> None:
        """Show it, where the work has lasted over a second and the last line is not quite new."""
        now = time.monotonic()
        if not self._wanted or now < self._due:
            return
        self._due = now + _PAUSE_S
        line = f"{what}, {done} of {total}"
        sys.stderr.write("\r" + line.ljust(self._shown))
        sys.stderr.flush()
        self._shown = max(self._shown, len(line))
