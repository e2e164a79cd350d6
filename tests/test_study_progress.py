"""One display for all runs of a study: bars on a terminal, lines when piped, nothing when quiet."""

from __future__ import annotations

import io

from rich.console import Console

from optim.study_folder import Outcome
from optim.study_progress import StudyProgress
from optim.study_slots import Done, Told

MET = Done(2, Outcome(status="met", smallest={"frontal_area_m2": "0.125"}))
LEVELS = {"require.gain_dbi.min": "11"}


def shown(*, terminal: bool, quiet: bool = False) -> str:
    out = io.StringIO()
    console = Console(file=out, force_terminal=terminal, quiet=quiet, width=200, highlight=False)
    with StudyProgress(4, 1, quiet=quiet, console=console) as progress:
        progress.told(Told(2, "scout (ray)", 3, 9, "40 designs"))
        progress.told(Told(3, "prove (moment)", 1, 31, "12 designs"))
        progress._bars.refresh()
        progress.done(MET, LEVELS)
    return out.getvalue()


def test_a_terminal_shows_all_runs_under_way() -> None:
    told = shown(terminal=True)
    for words in ("1 of 4", "run 2: scout (ray)", "3 of 9", "40 designs", "run 3: prove (moment)"):
        assert words in told
    assert "2 of 4: run 2 (require.gain_dbi.min = 11): met, smallest 0.125 m²" in told


def test_piped_is_a_line_a_run() -> None:
    assert shown(terminal=False).splitlines() == [
        "2 of 4: run 2 (require.gain_dbi.min = 11): met, smallest 0.125 m²"
    ]


def test_quiet_is_quiet() -> None:
    assert shown(terminal=True, quiet=True) == ""
