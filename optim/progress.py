"""Progress of a run on stderr: a bar, what has been found so far, and the time left.

On a terminal only; piped or quiet, nothing of it is written. Plain messages go there as well, and
are left out only when quiet.
"""

from __future__ import annotations

import math
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import partial
from types import TracebackType
from typing import Any, Final, Self

from rich.console import Console
from rich.progress import BarColumn, TaskID, TextColumn, TimeRemainingColumn
from rich.progress import Progress as Bars

from optim.referee import Referee
from optim.streams import silence

__all__ = ["Display", "Progress", "found"]

REDRAW: Final = 0.5
"""Least time between two pictures of the bar, s; drawing one takes some milliseconds."""

SQUARE_CENTIMETRES: Final = 1e4
"""cm² in a square metre."""


class Stderr(Console):
    """Standard error; where nobody reads it any more the work goes on in silence."""

    def on_broken_pipe(self) -> None:
        """Write no more."""
        self.quiet = True
        silence(sys.stderr)


class Display:
    """Bars on a terminal and messages of one line; nothing at all when quiet.

    Parameters
    ----------
    count : str
        How a bar tells where it stands.
    quiet : bool
        Write nothing at all.
    console : Console, optional
        Where to write; stderr if left out.
    **options
        Of the bars.
    """

    def __init__(self, count: str, *, quiet: bool, console: Console | None, **options: Any) -> None:
        self._console = console or Stderr(stderr=True, quiet=quiet, highlight=False)
        self._bars = Bars(
            TextColumn("{task.description}"),
            BarColumn(bar_width=20),
            TextColumn(count),
            TextColumn("{task.fields[found]}"),
            TimeRemainingColumn(compact=True),
            console=self._console,
            disable=quiet or not self._console.is_terminal,
            transient=True,
            **options,
        )

    def __enter__(self) -> Self:
        self._bars.start()
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self._bars.stop()

    def say(self, message: str) -> None:
        """Write a message on a line of its own."""
        self._console.print(message, markup=False, soft_wrap=True)


class Progress(Display):
    """What the user sees while a search runs; `quiet` and `console` as in `Display`."""

    def __init__(self, *, quiet: bool = False, console: Console | None = None) -> None:
        super().__init__(
            "generation {task.completed:.0f} of {task.total:.0f}",
            quiet=quiet,
            console=console,
            auto_refresh=False,
        )
        self._drawn = -math.inf

    @contextmanager
    def stage(self, name: str, generations: int) -> Iterator[Callable[[Referee], None]]:
        """Show a bar of `generations` steps; call what it gives after each of them."""
        task = self._bars.add_task(name, total=generations, found="")
        yield partial(self.tell, task)
        self._bars.remove_task(task)

    def tell(self, task: TaskID, referee: Referee) -> None:
        """Show one more generation of a stage."""
        if not self._bars.disable:
            due = time.monotonic() - self._drawn > REDRAW
            self._bars.update(task, advance=1, found=found(referee), refresh=due)
            self._drawn = time.monotonic() if due else self._drawn


def found(referee: Referee) -> str:
    """Return in a few words what a stage has found so far."""
    archive = referee.archive
    if not len(archive.front):
        return f"{len(archive)} designs, none meets everything yet"
    smallest = referee.space.reflectors(archive.front.designs).frontal_area.min()
    return (
        f"{len(archive)} designs, {archive.feasible} meet everything, "
        f"smallest {smallest * SQUARE_CENTIMETRES:.0f} cm²"
    )
