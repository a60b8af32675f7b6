"""Progress of long work: a bar on a terminal, one line per 10 % elsewhere."""

import sys
from types import TracebackType
from typing import Any, Self

from tonebench.cli.text import narrate


class Progress:
    """Report progress on stderr; ``advance`` may be called as often as convenient."""

    def __init__(self, label: str, total: int) -> None:
        self._label = label
        self._total = max(total, 1)
        self._done = 0
        self._told_tenth = 0
        self._bar: Any = None
        self._task: Any = None

    def __enter__(self) -> Self:
        if sys.stderr.isatty():
            from rich.console import Console  # noqa: PLC0415  (costs 50 ms; only where a bar is drawn)
            from rich.progress import Progress as Bar  # noqa: PLC0415

            self._bar = Bar(console=Console(stderr=True), transient=True)
            self._task = self._bar.add_task(self._label, total=self._total)
            self._bar.start()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._bar is not None:
            self._bar.stop()

    def advance(self, amount: int) -> None:
        """Add finished work."""
        self._done += amount
        if self._bar is not None:
            self._bar.update(self._task, completed=self._done)
            return
        tenth = min(10 * self._done // self._total, 10)
        if tenth > self._told_tenth:
            self._told_tenth = tenth
            narrate(f"{self._label}: {10 * tenth} %")
