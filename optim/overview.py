"""Requirements in plain words: what was understood, what was derived, what physics says to it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from models import MODELS
from models.conventions import C0
from optim.precheck import Finding, blind_spots
from optim.requirements import Requirements
from optim.space import DesignSpace
from optim.units import FILE_KEYS, VARIABLES, to_file

__all__ = ["overview", "understood"]


def overview(
    requirements: Requirements, space: DesignSpace, findings: list[Finding]
) -> Iterator[str]:
    """Yield the lines of `understood`, who can judge them, and what is ruled out."""
    yield from understood(requirements, space)
    yield from _block("models", _models(requirements, space))
    yield ""
    yield from _verdict(findings)
    if any(limit.figure == "wind_load" for limit in requirements.limits):
        yield "Wind load is the plates' drag in a steady wind. Ice, gusts and the mast are not in"
        yield "it; the codes of the place are binding."


def understood(requirements: Requirements, space: DesignSpace) -> Iterator[str]:
    """Yield the lines that tell a reader how the requirements were taken."""
    r, band = requirements, requirements.band
    yield r.title
    yield ""
    points = " (derived)" if "band.points" in r.derived else ""
    yield (
        f"band        {band.low_hz / 1e6:g} to {band.high_hz / 1e6:g} MHz, "
        f"{band.points} points{points}; λ = {1e3 * C0 / band.middle_hz:.1f} mm at the middle"
    )
    yield from _block("require", _limits(requirements))
    yield from _block("goals", [f"{_WORDS[goal.sense]} {goal.name}" for goal in r.goals])
    yield from _block("ranges", _ranges(requirements, space))
    yield from _block("steps", _steps(space))
    yield from _block("tolerance", _tolerance(requirements))


_WORDS = {"min": "minimise", "max": "maximise"}


def _block(name: str, lines: list[str]) -> Iterator[str]:
    for line in lines:
        yield f"{name:<12}{line}"
        name = ""


def _limits(requirements: Requirements) -> list[str]:
    terms = requirements.terms
    remarks = {
        "front_to_back_db": f", rear sector ± {np.degrees(terms.rear_sector):g}°",
        "vswr": f", on {terms.reference_ohm:g} Ω",
        "realized_gain_dbi": f", on {terms.reference_ohm:g} Ω",
        "wind_load_n": f", at {requirements.wind_speed:g} m/s",
    }
    lines = []
    for limit in requirements.limits:
        if limit.key in {"mask_h", "mask_e"}:
            mask = getattr(terms, limit.key)
            ends = f"{np.degrees(mask[0][0]):g}° to {np.degrees(mask[-1][0]):g}°"
            lines.append(f"{limit.key} under an envelope of {len(mask)} points, {ends}")
            continue
        word = "at least" if limit.sense == "min" else "at most"
        lines.append(f"{limit.key} {word} {limit.value:g}{remarks.get(limit.key, '')}")
    return lines


def _ranges(requirements: Requirements, space: DesignSpace) -> list[str]:
    lines = []
    for name, low, high in zip(VARIABLES, space.low, space.high, strict=True):
        note = next((n for n in space.derived if n.startswith(f"{FILE_KEYS[name]}:")), None)
        if note is None or requirements.ranges[name] is not None:
            first, last = to_file(name, low), to_file(name, high)
            ends = f"{first:g}" if low == high else f"{first:g} to {last:g}"
            lines.append(f"{FILE_KEYS[name]}: {ends}; given")
        if note is not None:
            lines.append(f"{note}; derived")
    return lines


def _steps(space: DesignSpace) -> list[str]:
    ranges = tuple(f"{key}:" for key in FILE_KEYS.values())
    given = {
        "dipole_diameter_mm": to_file("dipole_diameter", space.dipole_diameter),
        "length_step_mm": to_file("length_step", float(space.steps[1])),
        "angle_step_deg": to_file("apex_angle", float(space.steps[0])),
    }
    derived = {n.partition(":")[0]: n for n in space.derived if not n.startswith(ranges)}
    return [
        f"{derived[key]}; derived" if key in derived else f"{key}: {value:g}; given"
        for key, value in given.items()
    ]


def _tolerance(requirements: Requirements) -> list[str]:
    lines = [
        f"{FILE_KEYS[name]} ± {to_file(name, value):g}"
        for name, value in requirements.tolerance.items()
    ]
    if requirements.min_yield is not None:
        lines.append(f"min_yield {requirements.min_yield:g}")
    return lines


def _models(requirements: Requirements, space: DesignSpace) -> list[str]:
    run = requirements.run
    lines = [f"scout {run.scout}, prove {run.prove or 'none'}"]
    for name in MODELS:
        blind = blind_spots(requirements, space, name)
        judged = f"cannot judge {', '.join(blind)}" if blind else "can judge every requirement"
        lines.append(f"{name} {judged}")
    return lines


def _verdict(findings: list[Finding]) -> Iterator[str]:
    if not findings:
        yield "Nothing here is ruled out before a search."
    for finding in findings:
        yield ("Ruled out: " if finding.ruled_out else "Note: ") + finding.text
