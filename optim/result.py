"""The outcome of a run in words and files: what is met, by what, what binds, what to relax."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

import numpy as np

from models import Reflectors
from optim.archive import Judged
from optim.designfile import Design, write_design
from optim.recommend import binding_limits, roles
from optim.requirements import Requirements
from optim.search import Found
from optim.space import DesignSpace
from optim.tables import (
    DIMENSION_KEYS,
    aligned,
    dimensions,
    figures,
    front_csv,
    margins,
    relaxation,
    sizes,
    summary_json,
)
from optim.tolerance import Spread
from optim.tolerance_table import spread_object, spread_rows, spread_words

__all__ = ["Result", "signed"]

MOST_TITLE: Final = 180
"""Letters of the title in a design file, which takes 200 with the role behind."""


@dataclass(frozen=True)
class Result:
    """A finished search.

    Parameters
    ----------
    requirements : Requirements
    space : DesignSpace
    found : Found
    """

    requirements: Requirements
    space: DesignSpace
    found: Found

    @property
    def met(self) -> bool:
        """Whether some design meets every requirement."""
        return len(self.found.front) > 0

    def shown(self) -> tuple[Judged, dict[str, int]]:
        """Return the designs to put before the reader and the row of each by its name.

        The recommended ones by role; if nothing meets the requirements, the nearest by number.
        """
        front = self.found.front
        if not self.met:
            nearest = self.found.nearest
            return nearest, {f"nearest_{row + 1}": row for row in range(len(nearest))}
        area = self.space.reflectors(front.designs).frontal_area
        return front, roles(front, self.requirements.goals, area)

    def write(self, folder: Path, about: dict[str, Any]) -> None:
        """Write front.csv, summary.json and the design files into `folder`.

        Parameters
        ----------
        folder : Path
        about : dict
            What else belongs into the summary: seconds, seed, versions, models.

        Raises
        ------
        OSError
            Where something cannot be written.
        """
        front = self.found.front
        reflectors = self.space.reflectors(front.designs)
        table = front_csv(front, reflectors, self.requirements, self.found.model)
        (folder / "front.csv").write_text(table, encoding="utf-8")
        group = "recommended" if self.met else "nearest"
        (folder / group).mkdir(exist_ok=True)
        judged, rows = self.shown()
        spreads = self.spreads()
        entries: list[dict[str, Any]] = []
        for name, row in rows.items():
            file = f"{group}/{name.removeprefix('nearest_')}.toml"
            write_design(folder / file, self._design(judged, row, name))
            entries.append({"role": name, "design_file": file, **self._numbers(judged, row)})
            if name in spreads:
                entries[-1]["tolerance"] = spread_object(spreads[name])
        relaxed = self.found.relaxed
        summary = {
            "title": self.requirements.title,
            "status": "met" if self.met else "not met",
            "recommended": entries if self.met else [],
            "binding": self.binding(),
            "nearest": [] if self.met else entries,
            "relaxations": [
                {
                    "limits": [
                        {"requirement": limit.label, "from": limit.value, "to": value}
                        for limit, value in relaxation(relaxed, row, self.requirements)
                    ],
                    **self._numbers(relaxed, row),
                }
                for row in range(len(relaxed))
            ]
            + [{"limits": [relaxed]} for relaxed in self.relaxed_yield()],
            "designs_on_front": len(front),
            "decided_by": self.found.model,
            "evaluations": self.found.evaluations,
            **about,
            "spec_sha256": self.requirements.sha256,
        }
        (folder / "summary.json").write_text(summary_json(summary), encoding="utf-8")

    def text(self) -> str:
        """Return the outcome as a page of plain text."""
        lines = [*self.verdict(), "", *self._table()]
        if not self.met:
            lines += ["", *self.relaxations()]
        if spreads := self.spreads():
            lines += ["", *spread_words(spreads, self.found.model)]
        return "\n".join(lines)

    def binding(self) -> list[str]:
        """Return the requirements that the designs shown miss or barely meet."""
        judged, rows = self.shown()
        labels = [limit.label for limit in self.requirements.limits]
        binding = binding_limits(judged[list(rows.values())])
        return [labels[column] for column in binding] + [
            relaxed["requirement"] for relaxed in self.relaxed_yield()
        ]

    def spreads(self) -> dict[str, Spread]:
        """Return the spreads of the designs shown, by their names."""
        judged, rows = self.shown()
        found = self.found.spreads
        known = {name: found.get(judged.keys[row]) for name, row in rows.items()}
        return {name: spread for name, spread in known.items() if spread is not None}

    def relaxed_yield(self) -> list[dict[str, Any]]:
        """Return by how much to relax the yield, if it alone is what the nearest designs miss."""
        spreads = self.spreads()
        if self.met or not spreads:
            return []
        best = max(spread.expected for spread in spreads.values())
        reached = float(np.floor(1e3 * best) / 1e3)
        asked = self.requirements.min_yield
        return [{"requirement": "min_yield", "from": asked, "to": reached}]

    def _reflectors(self, judged: Judged) -> Reflectors:
        return self.space.reflectors(judged.designs)

    def _design(self, judged: Judged, row: int, name: str) -> Design:
        asked = self.requirements
        return Design(
            title=f"{asked.title[:MOST_TITLE]}: {name.replace('_', ' ')}",
            reflectors=self._reflectors(judged)[[row]],
            band=asked.band,
            build=asked.build,
            terms=asked.terms,
        )

    def _numbers(self, judged: Judged, row: int) -> dict[str, Any]:
        reflectors = self._reflectors(judged)
        size = sizes(reflectors, self.requirements)
        return {
            "dimensions": dimensions(reflectors, row),
            "sizes": {name: values[row] for name, values in size.items()},
            "figures": figures(judged, row),
            "margins": margins(judged, row, self.requirements),
            "smallest_margin": judged.smallest_margin[row],
        }

    def verdict(self) -> Iterator[str]:
        """Yield whether the requirements are met, by which model and where."""
        band, model = self.requirements.band, self.found.model
        points = band.refined().points
        where = f"{points} frequencies from {band.low_hz / 1e6:g} to {band.high_hz / 1e6:g} MHz"
        if points == 1:
            where = f"{band.low_hz / 1e6:g} MHz"
        if self.met:
            count = len(self.found.front)
            yield f"Met: {count} design{'s' * (count > 1)} on the front, by {model} at {where}."
        else:
            yield f"Not met: no design found meets every requirement, by {model} at {where}."
            yield "The designs that come nearest:"

    def _table(self) -> list[str]:
        judged, rows = self.shown()
        reflectors = self._reflectors(judged)
        size = sizes(reflectors, self.requirements)
        lines = [["", "asked", *(name.replace("_", " ") for name in rows)]]
        each = {name: dimensions(reflectors, row) for name, row in rows.items()}
        lines += [
            [key, "", *(f"{each[name][key]:g}" for name in rows)] for key in DIMENSION_KEYS.values()
        ]
        for key, values in size.items():
            lines.append([key, "", *(f"{values[row]:.4g}" for row in rows.values())])
        for column, limit in enumerate(self.requirements.limits):
            asked = "envelope" if limit.key.startswith("mask") else f"{limit.sense} {limit.value:g}"
            found = judged.margins[list(rows.values()), column]
            cells = [f"{limit.at(m):.4g} ({signed(m)})" for m in found]
            lines.append([limit.key, asked, *cells])
        for goal_column, goal in enumerate(self.requirements.goals):
            sign = 1.0 if goal.sense == "min" else -1.0
            found = sign * judged.objectives[list(rows.values()), goal_column]
            lines.append([f"goal {goal.name}", goal.sense, *(f"{value:.4g}" for value in found)])
        if spreads := self.spreads():
            lines += spread_rows(spreads, self.requirements)
        return aligned(lines)

    def relaxations(self) -> Iterator[str]:
        """Yield what to relax for a design to exist; nothing if one does."""
        if self.met:
            return
        relaxed = self.found.relaxed
        short = self.relaxed_yield()
        for value in short:
            yield f"Relax min_yield from {value['from']:g} to {value['to']:g} and a design exists."
        if not len(relaxed) and not short:
            yield "No relaxing of limits alone lets one of the designs found in."
        for row in range(len(relaxed)):
            words = " and ".join(
                f"{limit.label} from {limit.value:g} to {value:g}"
                for limit, value in relaxation(relaxed, row, self.requirements)
            )
            yield f"Relax {words} and a design exists."


def signed(margin: float) -> str:
    """Return a margin with its sign, two digits or whole numbers."""
    return f"{margin:+.0f}" if abs(margin) >= 99.5 else f"{margin:+.2g}"
