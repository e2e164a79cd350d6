"""The table of a study: study.csv with one row a run, and the same in fewer columns as text.

What is varied, what became of the run, and its antenna of the smallest frontal area: dimensions in
degrees and mm, sizes and worst figures over the band as in the run's front.csv. No times, so that
the same study gives the same bytes.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping
from typing import Final

from optim.quantities import FIGURES
from optim.study_file import Study
from optim.study_folder import Outcome
from optim.tables import DIMENSION_KEYS, aligned

__all__ = ["study_csv", "study_text"]

SIZES: Final = ("width_mm", "height_mm", "depth_mm", "mass_kg")
SHOWN: Final = ("gain_dbi", "width_mm", "height_mm", "depth_mm")


def study_csv(study: Study, outcomes: Mapping[int, Outcome]) -> str:
    """Return study.csv: one line a run, in the order of the runs."""
    columns = (
        "frontal_area_m2",
        *DIMENSION_KEYS.values(),
        *SIZES,
        *FIGURES,
        "smallest_margin",
        "model",
    )
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(["run", *_varied(study), "status", "designs_on_front", *columns, "reason"])
    for run in study.runs:
        outcome = outcomes[run.number]
        writer.writerow(
            [
                run.number,
                *study.words(run).values(),
                outcome.status,
                outcome.front,
                *(outcome.smallest.get(column, "") for column in columns),
                outcome.reason,
            ]
        )
    return text.getvalue()


def study_text(
    study: Study, outcomes: Mapping[int, Outcome], others: Mapping[int, str] | None = None
) -> str:
    """Return the runs as a table to read; `others` are the states of those without an outcome."""
    lines = [["run", *_varied(study), "state", "frontal_area_m2", *SHOWN, ""]]
    for run in study.runs:
        outcome = outcomes.get(run.number)
        state = outcome.status if outcome else (others or {}).get(run.number, "waiting")
        row = outcome.smallest if outcome else {}
        cells = [row.get(column, "") for column in ("frontal_area_m2", *SHOWN)]
        reason = outcome.reason if outcome else ""
        reason = reason if len(reason) <= 80 else reason[:79] + "…"
        lines.append([str(run.number), *study.words(run).values(), state, *cells, reason])
    return "\n".join(aligned(lines))


def _varied(study: Study) -> list[str]:
    return [factor.name for factor in study.factors] + (["repeat"] if study.repeats > 1 else [])
