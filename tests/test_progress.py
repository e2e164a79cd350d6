"""Progress: on a terminal only, messages unless quiet."""

import io
from pathlib import Path

import numpy as np
import pytest
from rich.console import Console

from optim.progress import Progress
from tests.search_specs import judging

DESIGNS = np.array([[np.pi / 2, 0.3, 0.6, 0.7, 0.33], [np.pi / 2, 0.3, 0.5, 0.6, 0.33]])


def shown(folder: Path, *, terminal: bool, quiet: bool) -> str:
    """Return what a stage of one generation writes."""
    text = io.StringIO()
    console = Console(file=text, force_terminal=terminal, width=160, quiet=quiet, highlight=False)
    with judging(folder) as referee, Progress(quiet=quiet, console=console) as progress:
        progress.say("a message")
        with progress.stage("scout", 3) as told:
            referee.judge(DESIGNS)
            told(referee)
    return text.getvalue()


def test_a_terminal_sees_what_is_found(tmp_path: Path) -> None:
    text = shown(tmp_path, terminal=True, quiet=False)
    assert "generation 1 of 3" in text
    # 2·500·sin 45° by 600 mm.
    assert "2 designs, 2 meet everything, smallest 4243 cm²" in text


def test_a_pipe_sees_messages_only(tmp_path: Path) -> None:
    assert shown(tmp_path, terminal=False, quiet=False).strip() == "a message"


@pytest.mark.parametrize("terminal", [True, False])
def test_quiet_sees_nothing(tmp_path: Path, terminal: bool) -> None:
    assert shown(tmp_path, terminal=terminal, quiet=True) == ""
