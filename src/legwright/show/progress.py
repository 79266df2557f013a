"""How far long work has come: a bar on a terminal, sparse plain lines elsewhere; all on stderr."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from time import monotonic

Told = Callable[[int, int], None]
#: off a terminal a line comes after this share of the work, or after so many seconds if that is later
_SHARE, _SECONDS = 0.1, 10.0


@contextmanager
def progress(what: str) -> Iterator[Told]:
    """A function that hears how much is done and asked, and says it with rate and time left."""
    if not sys.stderr.isatty():
        yield _Lines(what)
        return
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    rate = TextColumn("{task.fields[rate]}")
    with Progress(
        TextColumn(what),
        BarColumn(),
        MofNCompleteColumn(),
        rate,
        TimeRemainingColumn(),
        console=Console(stderr=True),
    ) as bar:
        task = bar.add_task(what, total=None, rate="")

        def told(done: int, asked: int) -> None:
            speed = bar.tasks[0].finished_speed or bar.tasks[0].speed
            bar.update(task, completed=done, total=asked, rate=f"{speed:.3g} a second" if speed else "")

        yield told


class _Lines:
    """Plain lines, so sparse that a log stays readable."""

    def __init__(self, what: str) -> None:
        self.what = what
        self.began = self.last = monotonic()
        self.first: int | None = None
        self.said = 0

    def __call__(self, done: int, asked: int) -> None:
        now = monotonic()
        if self.first is None:
            self.first = self.said = done
            return
        late_enough = now - self.last >= _SECONDS and done - self.said >= _SHARE * asked
        if done < asked and not late_enough:
            return
        rate = (done - self.first) / max(now - self.began, 1e-9)
        left = (asked - done) / rate if rate > 0 else 0.0
        sys.stderr.write(f"{self.what}: {done} of {asked}, {rate:.3g} a second, {left:.0f} s left\n")
        self.last, self.said = now, done
