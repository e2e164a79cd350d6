"""Progress of a study on stderr: one bar for all runs, one for each run under way.

On a terminal the bars; piped, a line a finished run; quiet, nothing.
"""

from __future__ import annotations

from typing import Final

from rich.console import Console
from rich.progress import TaskID

from optim.progress import Display
from optim.study_slots import Done, Told

__all__ = ["StudyProgress"]

MEMORY: Final = 1e6
"""Seconds over which the pace is taken; runs may take hours."""


class StudyProgress(Display):
    """What the user sees while a study runs; `quiet` and `console` as in `Display`.

    Parameters
    ----------
    total, done : int
        Runs of the study, and those done before.
    """

    def __init__(
        self, total: int, done: int, *, quiet: bool = False, console: Console | None = None
    ) -> None:
        super().__init__(
            "{task.completed:.0f} of {task.total:.0f}",
            quiet=quiet,
            console=console,
            refresh_per_second=2.0,
            speed_estimate_period=MEMORY,
        )
        self._total, self._done = total, done
        self._all = self._bars.add_task("runs", total=total, completed=done, found="")
        self._tasks: dict[int, TaskID] = {}

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
