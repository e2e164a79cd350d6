"""What can be said about requirements before any search: what is ruled out, who can judge what.

A verdict ("ruled out") is given only where no design in the ranges can meet a requirement; a rule
of common practice is no more than a hint. Gain against aperture area is such a rule for small
antennas, which may have more than 4πA/λ² of their box: half a wavelength is added to both sides
before anything is ruled out.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

import numpy as np

from models import MODELS, Reflectors, evaluate
from models.build import drag_coefficient, mass, wind_load
from models.conventions import C0
from optim.margins import SIZES
from optim.quantities import OF_A_MATCH
from optim.requirements import Limit, Requirements
from optim.space import DesignSpace
from optim.units import VARIABLES

__all__ = ["Finding", "aperture_gain_dbi", "blind_spots", "findings"]

UNIFORM_BEAMWIDTH_DEG: Final = 51.0
"""Half-power beamwidth of a uniform aperture one wavelength wide (derived: 50.8°); a rule here."""


@dataclass(frozen=True)
class Finding:
    """One thing found; `ruled_out` is a verdict, otherwise it is a hint."""

    ruled_out: bool
    text: str


def aperture_gain_dbi(width: float, height: float, frequency_hz: float) -> float:
    """Return 4πA/λ² in dBi of a box of `width` by `height` (m), λ/2 added to both sides."""
    wavelength = C0 / frequency_hz
    area = (width + wavelength / 2.0) * (height + wavelength / 2.0)
    return float(10.0 * np.log10(4.0 * np.pi * area / wavelength**2))


def findings(requirements: Requirements, space: DesignSpace) -> list[Finding]:
    """Return what is ruled out, then hints."""
    found = [
        *_caps(requirements, space),
        *_gain(requirements, space),
        *_beamwidth(requirements, space),
        *_masks(requirements),
        *_judges(requirements, space),
    ]
    return sorted(found, key=lambda finding: not finding.ruled_out)


def blind_spots(requirements: Requirements, space: DesignSpace, model: str) -> list[str]:
    """Return the labels of limits that `model` cannot judge, tried on one design of the space."""
    limits = [limit for limit in requirements.limits if limit.figure not in SIZES]
    figures = evaluate(
        _sample(requirements, space),
        requirements.band.middle_hz,
        model=model,
        build=requirements.build,
        terms=requirements.terms,
    )
    honest = MODELS[model].gives_match
    return [
        limit.label
        for limit in limits
        if not np.isfinite(getattr(figures, limit.figure)).all()
        or (limit.figure in OF_A_MATCH and not honest)
    ]


def _sample(requirements: Requirements, space: DesignSpace) -> Reflectors:
    """Return one usual design, brought into the ranges: 90°, λ/2 spacing, plates of a wavelength.

    Ranges that leave out 90° give the angle 180°/n inside them, if there is one, for the image
    model's sake.
    """
    wavelength = C0 / requirements.band.middle_hz
    row = np.array([np.pi / 2.0, 0.5 * wavelength, wavelength, wavelength, 0.47 * wavelength])
    low, high = space.low[0], space.high[0]
    angles = [np.pi / n for n in (2, 3, 4, 5, 6, 1) if low <= np.pi / n <= high]
    row[0] = angles[0] if angles else row[0]
    return space.reflectors(np.clip(row, space.low, space.high)[None, :])


def _extremes(requirements: Requirements, space: DesignSpace) -> tuple[float, float]:
    """Return the widest and tallest box (m) that ranges and caps allow, each for itself."""
    high = dict(zip(VARIABLES, space.high, strict=True))
    width = 2.0 * high["plate_width"] * np.sin(high["apex_angle"] / 2.0)
    height = max(high["plate_length"], high["dipole_length"])
    caps = {limit.figure: limit.value * SIZES[limit.figure] for limit in _size_caps(requirements)}
    return min(width, caps.get("width", np.inf)), min(height, caps.get("height", np.inf))


def _size_caps(requirements: Requirements) -> list[Limit]:
    return [limit for limit in requirements.limits if limit.figure in SIZES]


def _caps(requirements: Requirements, space: DesignSpace) -> Iterator[Finding]:
    """Find caps below the smallest size of any design in the ranges."""
    narrow = space.reflectors(space.low[None, :])
    flat = space.low.copy()
    flat[0] = space.high[0]
    least = {name: float(getattr(narrow, name)[0]) for name in ("width", "height", "frontal_area")}
    least["depth"] = float(space.reflectors(flat[None, :]).depth[0])
    least["mass"] = float(mass(narrow, requirements.build)[0])
    squarest = drag_coefficient(np.ones(1)) / drag_coefficient(_side_ratio(narrow))
    least["wind_load"] = float((wind_load(narrow, requirements.wind_speed) * squarest)[0])
    for limit in _size_caps(requirements):
        smallest = least[limit.figure] / SIZES[limit.figure]
        if smallest > limit.value * (1.0 + 1e-9):
            text = (
                f"{limit.label} = {limit.value:g}: no design in the ranges is below {smallest:.4g}"
            )
            yield Finding(ruled_out=True, text=text)


def _side_ratio(reflectors: Reflectors) -> np.ndarray:
    sides = reflectors.width, reflectors.plate_length
    return np.asarray(np.maximum(*sides) / np.minimum(*sides))


def _gain(requirements: Requirements, space: DesignSpace) -> Iterator[Finding]:
    width, height = _extremes(requirements, space)
    area = min(
        (limit.value for limit in requirements.limits if limit.figure == "frontal_area"),
        default=np.inf,
    )
    # With the product capped, the sum of the sides is largest at either end.
    boxes = ((width, min(height, area / width)), (min(width, area / height), height))
    low = requirements.band.low_hz
    most, (wide, tall) = max((aperture_gain_dbi(*box, low), box) for box in boxes)
    for limit in requirements.limits:
        if limit.key in {"gain_dbi", "realized_gain_dbi"} and limit.value > most:
            yield Finding(
                ruled_out=True,
                text=f"{limit.label} = {limit.value:g} dBi: the largest aperture allowed, "
                f"{1e3 * wide:.0f} × {1e3 * tall:.0f} mm, gives at most {most:.1f} dBi at "
                f"{low / 1e6:g} MHz, with half a wavelength added to both sides",
            )


def _beamwidth(requirements: Requirements, space: DesignSpace) -> Iterator[Finding]:
    wavelength = C0 / requirements.band.low_hz
    sides = dict(zip("he", _extremes(requirements, space), strict=True))
    for limit in requirements.limits:
        if not limit.key.startswith("beamwidth") or limit.sense != "max":
            continue
        side = sides[limit.key[len("beamwidth_")]]
        rule = UNIFORM_BEAMWIDTH_DEG * wavelength / side
        if limit.value < rule:
            yield Finding(
                ruled_out=False,
                text=f"{limit.label} = {limit.value:g}°: by the rule 51° λ/D (common practice) the "
                f"largest box allowed, {1e3 * side:.0f} mm, has about {rule:.0f}° at "
                f"{requirements.band.low_hz / 1e6:g} MHz",
            )


def _masks(requirements: Requirements) -> Iterator[Finding]:
    for name in ("mask_h", "mask_e"):
        mask = getattr(requirements.terms, name)
        if mask is not None and mask[0][0] == 0.0 and mask[0][1] < 0.0:
            text = f"{name}: {mask[0][1]:g} dB on boresight, where every level is 0 dB"
            yield Finding(ruled_out=True, text=text)


def _judges(requirements: Requirements, space: DesignSpace) -> Iterator[Finding]:
    """Say where the models chosen cannot judge what is asked for."""
    run = requirements.run
    last = run.prove or run.scout
    unjudged = blind_spots(requirements, space, last)
    if unjudged:
        able = [name for name in MODELS if not blind_spots(requirements, space, name)]
        others = f"; {', '.join(able)} can" if able else "; no model here can judge all of them"
        text = f"the model with the last word, {last}, cannot judge {', '.join(unjudged)}{others}"
        yield Finding(ruled_out=False, text=text)
