"""What stands in a run's folder beside its data: papers, pictures, patterns, and the report.

Everything is made from the folder, the same way right after a search and years later, and the same
folder gives the same bytes. The parts are written side by side on several processes.
"""

from __future__ import annotations

import shlex
from pathlib import Path
from typing import Final

from joblib import Parallel, delayed, parallel_config

from optim.evaluate import leave_interrupts_to_main
from optim.outcome import read_outcome
from optim.papers import write_run
from optim.plots import FOLDER as PICTURES
from optim.plots import draw_run
from optim.report import make_report
from optim.report_data import compute, is_current, write_data

__all__ = ["finish"]

PARTS: Final = ("papers", "pictures", "patterns")
"""What is written side by side, the longest first."""


def finish(folder: Path, jobs: int = 1) -> Path:
    """Write all of it for the finished search in `folder`; return the report.

    Patterns are computed only where those of the designs are not there yet.

    Raises
    ------
    SpecError, JournalError
        For a folder without a finished search, and for damaged files.
    OSError
        Where a file cannot be read or written.
    KeyboardInterrupt
        When interrupted, with the words how to go on.
    """
    result, _ = read_outcome(folder)
    current = is_current(folder, len(result.shown()[0]))
    parts = [part for part in PARTS if part != "patterns" or not current]
    try:
        with parallel_config("loky", inner_max_num_threads=1, initializer=leave_interrupts_to_main):
            Parallel(n_jobs=min(jobs, len(PARTS)), batch_size=1)(
                delayed(_write)(folder, part) for part in parts
            )
        return make_report(folder)
    except KeyboardInterrupt as interrupt:
        again = shlex.join(["apexfront", "report", str(folder)])
        msg = f"interrupted; what the search found is saved. Go on with: {again}"
        raise KeyboardInterrupt(msg) from interrupt


def _write(folder: Path, part: str) -> None:
    result, _ = read_outcome(folder)
    if part == "patterns":
        write_data(folder, compute(result))
    elif part == "papers":
        write_run(folder, result)
    else:
        draw_run(folder / PICTURES, result)
