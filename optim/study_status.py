"""How far a study is, read from its files while it runs or after it was stopped."""

from __future__ import annotations

import json
import shlex
from collections import Counter

from optim.run import JOURNAL
from optim.study_file import Study, StudyError
from optim.study_folder import StudyFolder
from optim.study_table import study_text

__all__ = ["again", "status_text"]


def status_text(study: Study, folder: StudyFolder) -> str:
    """Return the state of every run and of the whole; nothing is written.

    Raises
    ------
    StudyError
        For a folder that holds no study, or another one.
    """
    header = folder.header()
    if header is None:
        msg = f"{folder.path}: holds no study yet"
        raise StudyError(msg)
    if header.get("study_sha256") != study.sha256:
        msg = f"{folder.path}: holds another study, or the study file was changed since"
        raise StudyError(msg)
    outcomes, others = {}, {}
    working = folder.in_use()
    for run in study.runs:
        outcome = folder.outcome(run.number)
        if outcome is not None:
            outcomes[run.number] = outcome
        elif folder.started(run.number):
            state = "under way" if working else "stopped"
            others[run.number] = f"{state}: {_far(folder, run.number)}"
    counts = Counter(outcome.status for outcome in outcomes.values())
    states = [f"{counts[state]} {state}" for state in ("met", "not met", "failed")]
    waiting = len(study.runs) - len(outcomes) - len(others)
    words = f"{len(others)} {'under way' if working else 'stopped on the way'}, {waiting} waiting"
    return "\n".join(
        [
            f"{study.title}: {len(outcomes)} of {len(study.runs)} runs done "
            f"({', '.join(states)}), {words}.",
            _what_next(study, folder, working=working, left=len(study.runs) - len(outcomes)),
            "",
            study_text(study, outcomes, others),
        ]
    )


def _what_next(study: Study, folder: StudyFolder, *, working: bool, left: int) -> str:
    if working:
        return "A process is working on it."
    if left:
        return f"Nothing is working on it; go on with: {again(study, folder)}"
    return "Nothing is working on it; it is done."


def again(study: Study, folder: StudyFolder, *options: str) -> str:
    """Return the command that goes on with a study."""
    return shlex.join(
        ["apexfront", "study", str(study.path), "--out", str(folder.path), "--resume", *options]
    )


def _far(folder: StudyFolder, number: int) -> str:
    """Return how far a run is by the whole lines of its journal."""
    content = (folder.run(number) / JOURNAL).read_bytes()
    lines = content[: content.rfind(b"\n") + 1].splitlines()
    if len(lines) < 2:
        return "starting"
    try:
        stage = json.loads(lines[-1])["stage"]
    except (ValueError, KeyError, TypeError):
        stage = "?"
    return f"{stage}, {len(lines) - 1} batches"
