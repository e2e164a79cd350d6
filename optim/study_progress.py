"""Progress of a study on stderr: one bar for all runs, one for each run under way.

On a terminal the bars; piped, a line a finished run; quiet, nothing.
"""

from __future__ import annotations

from types import TracebackType
from typing import Final, Self

from rich.console import Console
from rich.progress import BarColumn, Progress, TaskID, TextColumn, TimeRemainingColumn

from optim.study_slots import Done, Told

__all__ = ["StudyProgress"]

MEMORY: Final = 1e6
"""Seconds over which the pace is taken; runs may take hours."""


class StudyProgress:
    """What the user sees while a study runs.

    Parameters
    ----------
    total, done : int
        Runs of the study, and those done before.
    quiet : bool
        Write nothing at all.
    console : Console, optional
        Where to write; stderr if left out.
    """

    def __init__(
        self, total: int, done: int, *, quiet: bool = False, console: Console | None = None
    ) -> None:
        self._console = console or Console(stderr=True, quiet=quiet, highlight=False)
        self._total, self._done = total, done
        self._bars = Progress(
            TextColumn("{task.description}"),
            BarColumn(bar_width=20),
            TextColumn("{task.completed:.0f} of {task.total:.0f}"),
            TextColumn("{task.fields[found]}"),
            TimeRemainingColumn(compact=True),
            console=self._console,
            disable=quiet or not self._console.is_terminal,
            transient=True,
            refresh_per_second=2.0,
            speed_estimate_period=MEMORY,
        )
        self._all = self._bars.add_task("runs", total=total, completed=done, found="")
        self._tasks: dict[int, TaskID] = {}

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

    def told(self, event: Told) -> None:
        """Show how a run goes."""
        words = f"run {event.number}: {event.stage}"
        task = self._tasks.get(event.number)
        if task is None:
            task = self._bars.add_task(words, total=event.total, found="")
            self._tasks[event.number] = task
        self._bars.update(
            task, description=words, total=event.total, completed=event.done, found=event.found
        )

    def done(self, event: Done, levels: dict[str, str]) -> None:
        """Show that a run is done."""
        if event.number in self._tasks:
            self._bars.remove_task(self._tasks.pop(event.number))
        self._done += 1
        self._bars.update(self._all, advance=1)
        outcome = event.outcome
        found = f", smallest {outcome.area:.4g} m²" if outcome.area is not None else ""
        where = ", ".join(f"{name} = {level}" for name, level in levels.items())
        self.say(
            f"{self._done} of {self._total}: run {event.number} ({where}): {outcome.status}{found}"
        )
