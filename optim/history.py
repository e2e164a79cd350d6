"""How a search went: share of designs that meet everything, and hypervolume, batch by batch.

Read from a run's journal. A batch is what one generation asked for that was not yet known.
Hypervolume is that of the feasible front so far, every goal as a share of its extent over the
feasible designs of the stage, against the worst of each (Zitzler & Thiele 1998), as a share of the
stage's last.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np
from moocore import hypervolume

from models import MODELS
from models.conventions import FloatArray
from optim.archive import nondominated
from optim.journal import JournalError, read_batches, read_header

__all__ = ["STAGES", "Course", "courses"]

STAGES: Final = ("scout", "prove")
"""Stages of a journal that search; what else is in it are antennas built off their dimensions."""

AIR: Final = 0.05
"""The reference lies this share of a goal's extent beyond the worst."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Course:
    """The course of one stage.

    Parameters
    ----------
    stage, model : str
    designs : (n_batches,)
        Designs judged until then.
    feasible : (n_batches,)
        Share of the batch that meets every condition, 0 to 1.
    volume : (n_batches,)
        Hypervolume of the front so far over the last, 0 to 1; all 0 where nothing was feasible.
    """

    stage: str
    model: str
    designs: FloatArray
    feasible: FloatArray
    volume: FloatArray


def courses(journal: Path) -> list[Course]:
    """Return the course of every stage of the journal at `journal` that searched.

    Raises
    ------
    JournalError
        For a file that cannot be read or is damaged.
    """
    header = read_header(journal)
    if header is None:
        return []
    batches: dict[str, list[FloatArray]] = {}
    models = {"scout": header.scout, "prove": header.prove}
    sound = set(models.values()) <= {*MODELS, "none"}
    for stage, numbers in read_batches(journal, header):
        batches.setdefault(stage, []).append(numbers)
        judged = [not name.startswith("worst ") for name in header.columns[stage]]
        sound &= bool(np.isfinite(numbers[:, judged]).all())
    if not sound:
        msg = f"{journal}: holds models or numbers that no search writes"
        raise JournalError(msg)
    return [
        course_of(stage, models[stage], header.columns[stage], batches[stage])
        for stage in STAGES
        if stage in batches
    ]


def course_of(stage: str, model: str, columns: list[str], batches: list[FloatArray]) -> Course:
    """Return the course of one stage; `columns` name the numbers of its `batches`, (n, n_numbers).

    The names start with "goal" and "violation" as `optim.referee.columns` writes them.
    """
    goals = [i for i, name in enumerate(columns) if name.startswith("goal ")]
    conditions = [i for i, name in enumerate(columns) if name.startswith("violation ")]
    feasible = [(batch[:, conditions] <= 0.0).all(axis=1) for batch in batches]
    good = [batch[rows][:, goals] for batch, rows in zip(batches, feasible, strict=True)]
    return Course(
        stage=stage,
        model=model,
        designs=np.cumsum([len(batch) for batch in batches]).astype(np.float64),
        feasible=np.array([rows.mean() for rows in feasible]),
        volume=volumes(good),
    )


def volumes(batches: list[FloatArray]) -> FloatArray:
    """Return the hypervolume after each of the batches (n, n_goals) over the last, (n_batches,).

    Goals are to be minimised.
    """
    seen = np.concatenate(batches)
    if not len(seen):
        return np.zeros(len(batches))
    low, extent = seen.min(axis=0), np.ptp(seen, axis=0)
    scale = np.where(extent > 0.0, extent, 1.0)
    front = np.empty((0, seen.shape[1]))
    found = []
    for batch in batches:
        front = np.concatenate([front, (batch - low) / scale])
        front = front[nondominated(front)]
        found.append(hypervolume(front, ref=1.0 + AIR) if len(front) else 0.0)
    return np.asarray(found) / found[-1]
