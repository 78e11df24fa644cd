"""A bar on standard error for what takes long: only on a terminal, and only after half a second."""

import sys
from contextlib import AbstractContextManager
from time import monotonic
from types import TracebackType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.progress import Progress, TaskID

PATIENCE = 0.5  # s


class Bar(AbstractContextManager["Bar"]):
    """Told how much is done of how much, it shows a bar if that takes longer than somebody's patience."""

    def __init__(self, what: str) -> None:
        self.what = what
        self.since = monotonic()
        self.shown: tuple[Progress, TaskID] | None = None
        self.wanted = sys.stderr is not None and sys.stderr.isatty()

    def __call__(self, done: int, total: int) -> None:
        """Take note of what is done."""
        if not self.wanted or (self.shown is None and monotonic() - self.since < PATIENCE):
            return
        if self.shown is None:
            from rich.console import Console
            from rich.progress import Progress

            bar = Progress(console=Console(stderr=True), transient=True)
            self.shown = bar, bar.add_task(self.what, total=total)
            bar.start()
        bar, task = self.shown
        bar.update(task, completed=done, total=total)

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Take the bar away."""
        if self.shown is not None:
            self.shown[0].stop()
