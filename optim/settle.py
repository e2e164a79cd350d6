"""Settling a choice among judged designs: what is chosen has been judged at all frequencies."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from optim.archive import IntArray, Judged
from optim.referee import Referee

__all__ = ["settled"]

ROUNDS: Final = 12


def settled(deciding: Referee, pick: Callable[[Judged], IntArray]) -> Judged:
    """Return the designs that `pick` takes, all of them judged at all frequencies.

    What it takes is judged at the rest of them, and it picks again with what that showed, until
    nothing is new: a design that fails there makes room for the next.
    """
    for _ in range(ROUNDS):
        known = deciding.archive.all
        chosen = known[pick(known)]
        if deciding.whole(chosen).all():
            return chosen
        deciding.judge(chosen.designs, lambda judged: np.ones(len(judged), dtype=bool))
    known = deciding.archive.all
    known = known[deciding.whole(known)]
    return known[pick(known)]
