"""What the report says, section by section, as plain values for its template; no HTML here.

Numbers are those of the deciding model, worst over the band, in the files' units. Every text of a
user stays a plain string, which the template escapes.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Final

import numpy as np

from models import MODELS
from optim.cautions import cautions
from optim.history import Course
from optim.margins import MISSING
from optim.overview import understood
from optim.quantities import FIGURES, MASKS, SIZES, minus
from optim.report_data import BAND_FIGURES
from optim.report_quantities import Quantity, asked_words, limit_words, quantities
from optim.requirements import Limit
from optim.result import Result, signed
from optim.style import mark_of
from optim.tolerance_table import spread_rows, spread_words

__all__ = ["envelope", "margin_cells", "page", "role_rows", "role_words"]

VALID: Final = {
    "image": "apex angles 180°/n, plates of no end: nothing behind the antenna",
    "ray": "plates of 0.6 λ and more",
    "modal": "any angle and plate width, plates endless along the dipole; no match",
    "moment": "any size; where its grids disagree it says so, and the design is rejected",
}
"""Where each model holds."""

GROUPS: Final = {"dimension": "Dimensions", "size": "Size", "figure": "Figures, worst in the band"}
COMPARED: Final = (
    "gain_dbi",
    "directivity_dbi",
    "beamwidth_h_deg",
    "beamwidth_e_deg",
    "front_to_back_db",
    "sidelobe_db",
    "resistance_ohm",
)
"""Figures on which two models are compared, as far as both give them."""

_USUAL: Final = frozenset(
    {"gain_dbi", "beamwidth_h_deg", "beamwidth_e_deg", "front_to_back_db", "resistance_ohm"}
)
_CSS_DASH: Final = {"-": "solid", "--": "dashed", "-.": "dashed", ":": "dotted"}


def role_words(result: Result) -> dict[str, int]:
    """Return the row of each design put before the reader, by its name in words."""
    return {name.replace("_", " "): row for name, row in result.shown()[1].items()}


def role_rows(result: Result) -> list[str]:
    """Return for every design shown its name in words, empty where it has none."""
    judged, _ = result.shown()
    names = [""] * len(judged)
    for role, row in role_words(result).items():
        names[row] = role
    return names


def page(
    result: Result,
    content: Mapping[str, Any],
    courses: list[Course],
    versions: Mapping[str, str],
) -> dict[str, Any]:
    """Return everything the template shows but pictures, data and files.

    Parameters
    ----------
    result : Result
    content : mapping
        What `optim.report_data` computed.
    courses : list of Course
    versions : mapping
        Library to version.
    """
    requirements, found = result.requirements, result.found
    judged, _ = result.shown()
    rows, band, run = role_words(result), requirements.band, requirements.run
    shown = quantities(result, judged)
    low, high = band.low_hz / 1e6, band.high_hz / 1e6
    tolerance = _tolerance(result)
    differences = compared(result, content)
    parts = [
        ("asked", "Asked and reached"),
        ("front", "The front" if result.met else "The nearest designs"),
        ("recommended", "Recommended" if result.met else "Side by side"),
        *([("tolerance", "As built")] if tolerance else []),
        *([("models", "Scout against proof")] if differences else []),
        ("search", "The search"),
        ("method", "Method"),
        ("cautions", "Cautions"),
        ("files", "Files"),
    ]
    verdict = next(iter(result.verdict())).partition(": ")[2]
    return {
        "title": requirements.title,
        "band": f"{low:g} MHz" if low == high else f"{low:g} to {high:g} MHz",
        "met": result.met,
        "verdict": verdict[:1].upper() + verdict[1:],
        "binding": _binding(result) if rows else [],
        "contents": parts,
        "roles": list(rows),
        "designs": len(judged),
        "model": found.model,
        "scout": run.scout,
        "requirements": _requirement_rows(result),
        "goals": _goal_rows(result, shown),
        "relaxations": list(result.relaxations()),
        "understood": "\n".join(understood(requirements, result.space)),
        "centre": f"{content['centre_mhz']:.6g}",
        "numbers": _numbers(shown, rows),
        "tolerance": tolerance,
        "differences": [
            {
                "words": f"{words} ({unit})" if unit else words,
                "median": minus(f"{np.median(values):+.2f}"),
                "largest": minus(f"{values[np.abs(values).argmax()]:+.2f}"),
            }
            for words, unit, _, values in differences
        ],
        "course_key": [
            (f"{c.stage}: {c.model}", *_look("", place)) for place, c in enumerate(courses)
        ],
        "evaluations": list(found.evaluations.items()),
        "method": _method(result),
        "models": _models(result),
        "file": requirements.path.name,
        "sha256": requirements.sha256,
        "seed": run.seed,
        "population": run.population,
        "generations": run.generations,
        "versions": list(versions.items()),
        **_cautions(result, content),
    }


def envelope(result: Result, plane: str) -> list[tuple[float, float]] | None:
    """Return the envelope asked for in one plane ("h" or "e"), degrees and dB."""
    mask = getattr(result.requirements.terms, f"mask_{plane}")
    return mask and [(float(np.degrees(angle)), level) for angle, level in mask]


def margin_cells(result: Result, row: int) -> list[dict[str, Any]]:
    """Return for every limit what one design reaches and its margin, as text, and in steps."""
    margins = result.shown()[0].margins[row]
    limits = result.requirements.limits
    return [_cell(limit, float(m)) for limit, m in zip(limits, margins, strict=True)]


def compared(
    result: Result, content: Mapping[str, Any]
) -> list[tuple[str, str, float, np.ndarray]]:
    """Return words, unit, step and scout minus proof (n,) of every figure that both models give."""
    if not content["scout"]:
        return []
    judged, _ = result.shown()
    proven = {quantity.key: quantity for quantity in quantities(result, judged)}
    found = []
    for key in COMPARED:
        if key not in proven:
            continue
        scouted = np.array(content["scout"][key], dtype=np.float64)
        both = np.isfinite(scouted) & np.isfinite(proven[key].values)
        if both.any():
            difference = (scouted - proven[key].values)[both]
            typical = float(np.median(proven[key].values[both]))
            step = Limit(key, key, "min", typical, key).scale
            found.append((proven[key].words, proven[key].unit, step, difference))
    return found


def _cell(limit: Limit, margin: float) -> dict[str, Any]:
    known = abs(margin) < MISSING * limit.scale
    about = (FIGURES | MASKS | SIZES)[limit.figure]
    reached = (
        f"{-margin:+.2f} dB" if limit.figure in MASKS else f"{limit.at(margin):.{about.decimals}f}"
    )
    return {
        "reached": minus(reached) if known else "–",
        "margin": minus(signed(margin)) if known else "",
        "met": margin >= 0.0,
        "steps": round(margin / limit.scale, 3),
    }


def _binding(result: Result) -> list[str]:
    """Return the requirements that bind, in words."""
    words = {
        limit.label: f"{limit_words(limit)} {asked_words(limit)}"
        for limit in result.requirements.limits
    }
    return [words.get(label, label.replace("_", " ")) for label in result.binding()]


def _requirement_rows(result: Result) -> list[dict[str, Any]]:
    each = [margin_cells(result, row) for row in role_words(result).values()]
    return [
        {
            "words": limit_words(limit),
            "asked": asked_words(limit),
            "cells": [cells[column] for cells in each],
        }
        for column, limit in enumerate(result.requirements.limits)
    ]


def _goal_rows(result: Result, shown: list[Quantity]) -> list[dict[str, Any]]:
    found = []
    for goal in result.requirements.goals:
        near = (goal.name, f"{goal.name}_dbi", f"{goal.name}_db", f"{goal.name}_deg")
        quantity = next((q for q in shown if q.key in near), None)
        if quantity is not None:
            cells = [quantity.text(row) for row in role_words(result).values()]
            words = "minimise" if goal.sense == "min" else "maximise"
            found.append({"words": f"goal: {quantity.words}", "asked": words, "cells": cells})
    return found


def _numbers(shown: list[Quantity], rows: Mapping[str, int]) -> list[tuple[str, Any]]:
    return [
        (
            words,
            [
                {"words": q.words, "cells": [q.text(row) for row in rows.values()]}
                for q in shown
                if q.group == group
            ],
        )
        for group, words in GROUPS.items()
    ]


def _tolerance(result: Result) -> dict[str, Any] | None:
    spreads = result.spreads()
    if not spreads:
        return None
    return {
        "roles": [name.replace("_", " ") for name in spreads],
        "rows": list(spread_rows(spreads, result.requirements)),
        "words": " ".join(spread_words(spreads, result.found.model)),
    }


def _method(result: Result) -> str:
    run, band = result.requirements.run, result.requirements.band
    proof = (
        f"What it found about the requirements went to {run.prove}, and the search went on there."
        if run.prove
        else "No second model was asked to prove it."
    )
    return (
        f"A genetic search with {run.scout} looked at the whole space of apex angle, spacing, "
        f"plate width, plate length and dipole length, in steps that a workshop can cut. {proof} "
        f"Every requirement was judged at {band.points} frequencies, and the designs shown again "
        f"on a grid of {band.refined().points} by {result.found.model}."
    )


def _models(result: Result) -> list[dict[str, str]]:
    run = result.requirements.run
    parts: dict[str, str] = {run.scout: "scout"}
    if run.prove:
        parts[run.prove] = "scout and proof" if run.prove == run.scout else "proof"
    return [
        {
            "name": name,
            "part": part,
            "summary": MODELS[name].summary,
            "valid": VALID.get(name, ""),
        }
        for name, part in parts.items()
    ]


def _cautions(result: Result, content: Mapping[str, Any]) -> dict[str, Any]:
    """Return the cautions for the design, of those put before the reader, with most wind load."""
    rows = role_words(result)
    if not rows:
        return {"caution_of": "no design", "cautions": []}
    judged, _ = result.shown()
    reflectors = result.space.reflectors(judged.designs)
    role, row = max(rows.items(), key=lambda item: float(reflectors.frontal_area[item[1]]))
    gains = [
        gain
        for name in ("gain_dbi", "directivity_dbi")
        for gain in content["band"].get(name, {row: []})[row]
        if gain is not None
    ]
    # Directivity is never below gain: the highest of both errs to the safe side.
    peak = max(gains, default=np.nan)
    told = cautions(
        reflectors[row],
        band=result.requirements.band,
        wind_speed=result.requirements.wind_speed,
        peak_gain_dbi=peak,
    )
    licence = "Frequency, power and pattern may need a licence or an approved antenna."
    return {
        "caution_of": f"the design “{role}”, which has the largest front of those recommended"
        if result.met
        else f"the design “{role}”",
        "cautions": [*told, ("Licences", licence)],
    }


def _look(name: str, place: int) -> tuple[str, str]:
    """Return colour and dash of a series for the style sheet."""
    mark = mark_of(name, place)
    return mark.colour, _CSS_DASH[mark.dashes]


def cards(result: Result, sketches: list[str]) -> list[dict[str, Any]]:
    """Return name, look and drawing of each design put before the reader."""
    return [
        {"role": role, "colour": colour, "dash": dash, "sketch": sketches[row]}
        for place, (role, row) in enumerate(role_words(result).items())
        for colour, dash in [_look("", place)]
    ]


def band_figures(result: Result, content: Mapping[str, Any]) -> dict[str, str]:
    """Return the figures that have curves, key to label: the usual ones and those asked about."""
    judged, _ = result.shown()
    labels = {q.key: q.label for q in quantities(result, judged)}
    asked = {limit.figure for limit in result.requirements.limits} | _USUAL
    asked |= {
        name
        for name in BAND_FIGURES
        for goal in result.requirements.goals
        if name.startswith(f"{goal.name}_") or name == goal.name
    }
    asked |= set() if "gain_dbi" in labels else {"directivity_dbi"}
    return {
        name: labels[name]
        for name in BAND_FIGURES
        if name in labels and name in asked and content["band"]
    }
