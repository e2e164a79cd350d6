"""The design space: ranges of the five variables, given or derived, and the steps they are cut in.

A row of the space is (apex angle, spacing, plate width, plate length, dipole length), radians and
metres. Derived ranges come from the band's middle wavelength λ and the size caps; they are wide
enough for the usual proportions (apertures of 1-2 λ, spacings of λ/3 to 2λ/3: Balanis, *Antenna
Theory*, corner-reflector chapter, from memory), and as wide as a gain asked for needs.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from models import Reflectors
from models.conventions import C0, FloatArray
from optim.requirements import Limit, Requirements
from optim.units import FILE_KEYS, VARIABLES, from_file, to_file

__all__ = ["DesignSpace"]

APEX_ANGLE: Final = (np.radians(50.0), np.radians(130.0))
SPACING: Final = (0.25, 0.75)
PLATE: Final = (0.4, 2.0)
DIPOLE: Final = (0.47, 0.47)
DIPOLE_MATCHED: Final = (0.38, 0.54)
"""Derived ranges, wavelengths; the second dipole where a match is asked for."""

LARGEST_PLATE: Final = 6.0
"""No derived plate is larger, whatever the gain asked for, wavelengths."""

APERTURE_EFFICIENCY: Final = 0.5
"""Share of a plate's area that a corner turns into gain (common practice), to size the ranges."""


@dataclass(frozen=True)
class DesignSpace:
    """Ranges and steps; build it with `from_requirements`.

    Parameters
    ----------
    low, high, steps : (5,)
        In the order of `optim.units.VARIABLES`; radians for the first, metres for the rest.
    dipole_diameter : float
        m, the same for every design.
    derived : tuple of str
        One note for each range and step that the requirements left out.
    """

    low: FloatArray
    high: FloatArray
    steps: FloatArray
    dipole_diameter: float
    derived: tuple[str, ...]

    @classmethod
    def from_requirements(cls, requirements: Requirements) -> DesignSpace:
        """Return the space the requirements give, with what they leave out derived."""
        steps = np.full(len(VARIABLES), requirements.length_step)
        steps[0] = requirements.angle_step
        ranges, notes = _ranges(requirements)
        low, high = (np.array([ranges[name][end] for name in VARIABLES]) for end in (0, 1))
        space = cls(low, high, steps, requirements.dipole_diameter, ())
        for column, (lowest, highest) in enumerate(space._counts()):
            if low[column] < high[column] and highest < lowest:
                key = FILE_KEYS[VARIABLES[column]]
                notes.append(f"{key}: no whole step lies in the range, its ends are used")
        return replace(space, derived=(*notes, *_single_values(requirements)))

    @property
    def fixed(self) -> np.ndarray:
        """Which variables are fixed, booleans (5,)."""
        return np.asarray(self.low == self.high)

    def snap(self, x: FloatArray) -> FloatArray:
        """Return designs on whole steps inside the ranges; fixed variables at their value.

        Parameters
        ----------
        x : (n, 5)
            Any finite rows; outside the ranges they are brought to the nearest step inside.

        Returns
        -------
        (n, 5)
            Where a range holds no whole step, its nearer end.
        """
        snapped = np.empty(x.shape)
        for column, (name, (lowest, highest)) in enumerate(
            zip(VARIABLES, self._counts(), strict=True)
        ):
            low, high = self.low[column], self.high[column]
            inside = np.clip(x[:, column], low, high)
            if low == high or highest < lowest:
                snapped[:, column] = np.where(inside - low <= high - inside, low, high)
                continue
            counts = np.clip(np.rint(inside / self.steps[column]), lowest, highest)
            step = to_file(name, self.steps[column])
            # In the file's unit first, so that a design file reads back as the very same number.
            whole = np.round(counts * step, 9)
            snapped[:, column] = np.clip(
                np.radians(whole) if name == "apex_angle" else whole / 1000.0, low, high
            )
        return snapped

    def reflectors(self, x: FloatArray) -> Reflectors:
        """Return the designs of the rows `x`, (n, 5), as they stand (snap them first)."""
        columns = {name: x[:, column] for column, name in enumerate(VARIABLES)}
        return Reflectors(**columns, dipole_diameter=self.dipole_diameter)

    def rows(self, reflectors: Reflectors) -> FloatArray:
        """Return the rows of designs, (n, 5)."""
        return np.stack([getattr(reflectors, name) for name in VARIABLES], axis=1)

    def _counts(self) -> list[tuple[float, float]]:
        """Return the first and last whole step inside each range."""
        slack = 1e-9
        return [
            (float(np.ceil(low / step - slack)), float(np.floor(high / step + slack)))
            for low, high, step in zip(self.low, self.high, self.steps, strict=True)
        ]


def _ranges(requirements: Requirements) -> tuple[dict[str, tuple[float, float]], list[str]]:
    """Return the range of every variable and a note on each that was derived."""
    wavelength = C0 / requirements.band.middle_hz
    given = requirements.ranges
    plate = _plate_for_gain(requirements)
    dipole = DIPOLE_MATCHED if requirements.needs_match else DIPOLE
    derived = {
        "apex_angle": APEX_ANGLE,
        "spacing": (SPACING[0] * wavelength, SPACING[1] * wavelength),
        "plate_width": (PLATE[0] * wavelength, plate * wavelength),
        "plate_length": (PLATE[0] * wavelength, plate * wavelength),
        "dipole_length": (dipole[0] * wavelength, dipole[1] * wavelength),
    }
    ranges = {name: given[name] or derived[name] for name in VARIABLES}
    cuts = _largest(requirements, ranges)
    notes = []
    for name in VARIABLES:
        if given[name] is not None:
            continue
        low, high = ranges[name]
        cut, by = cuts.get(name, (np.inf, ""))
        steps = requirements.angle_step if name == "apex_angle" else requirements.length_step
        if cut < high:
            high = max(cut, low)
        low, high = _whole(name, low, high, steps)
        ranges[name] = (low, high)
        reason = f", cut by {by}" if by and cut < derived[name][1] else ""
        notes.append(_note(name, low, high, wavelength, reason))
    return ranges, notes


def _whole(name: str, low: float, high: float, step: float) -> tuple[float, float]:
    """Return a derived range with its ends on whole steps, the upper one rounded down."""
    unit = to_file(name, step)
    ends = np.rint(low / step), np.floor(high / step + 1e-9)
    first = max(float(ends[0]), 1.0)
    last = first if low == high else max(float(ends[1]), first)
    return from_file(name, round(first * unit, 9)), from_file(name, round(last * unit, 9))


def _plate_for_gain(requirements: Requirements) -> float:
    """Return the side, in wavelengths, of a square aperture that gives the gain asked for."""
    asked = [
        limit.value
        for limit in requirements.limits
        if limit.key in {"gain_dbi", "realized_gain_dbi"}
    ]
    gain = 10.0 ** (min(max(asked, default=0.0), 100.0) / 10.0)
    side = np.sqrt(gain / (4.0 * np.pi * APERTURE_EFFICIENCY))
    return float(np.clip(side, PLATE[1], LARGEST_PLATE))


def _largest(
    requirements: Requirements, ranges: dict[str, tuple[float, float]]
) -> dict[str, tuple[float, str]]:
    """Return the largest value each size cap leaves a variable, with the cap that leaves it.

    The other variables are taken where they leave most room, so no design that fits is lost.
    """
    caps = {limit.figure: limit for limit in requirements.limits if limit.key in _CAPS}
    value = {name: cap.value * _CAPS[cap.key] for name, cap in caps.items()}
    narrow = np.sin(ranges["apex_angle"][0] / 2.0)
    short, slim = ranges["plate_length"][0], ranges["plate_width"][0]
    cuts: dict[str, list[tuple[float, str]]] = {name: [] for name in VARIABLES}

    def cut(name: str, largest: float, cap: Limit) -> None:
        cuts[name].append((float(largest), cap.label))

    if "height" in caps:
        cut("plate_length", value["height"], caps["height"])
        cut("dipole_length", value["height"], caps["height"])
    if "depth" in caps:
        cut("spacing", value["depth"] - requirements.dipole_diameter / 2.0, caps["depth"])
    if "width" in caps or "depth" in caps:
        box = value.get("width", np.inf), value.get("depth", np.inf)
        cut("plate_width", _widest(*box, *ranges["apex_angle"]), caps.get("width") or caps["depth"])
    if "frontal_area" in caps:
        cap, area = caps["frontal_area"], value["frontal_area"]
        height = max(short, ranges["dipole_length"][0])
        cut("plate_width", area / (2.0 * narrow * height), cap)
        cut("plate_length", area / (2.0 * narrow * slim), cap)
    if "mass" in caps:
        build = requirements.build
        area = value["mass"] / (build.sheet_thickness * build.sheet_density)
        cut("plate_width", area / (2.0 * short), caps["mass"])
        cut("plate_length", area / (2.0 * slim), caps["mass"])
    return {name: min(found) for name, found in cuts.items() if found}


_CAPS: Final = {
    "width_mm": 1e-3,
    "height_mm": 1e-3,
    "depth_mm": 1e-3,
    "frontal_area_m2": 1.0,
    "mass_kg": 1.0,
}
"""Caps that cut ranges, and their unit in SI."""


def _widest(width: float, depth: float, narrow: float, wide: float) -> float:
    """Return the widest plate (m) that fits into width and depth (m) at some apex angle.

    The width asks for a narrow corner, the depth for a wide one; both bind where they meet.
    """
    if np.isinf(width):
        best = wide
    elif np.isinf(depth):
        best = narrow
    else:
        best = float(np.clip(2.0 * np.arctan2(width / 2.0, depth), narrow, wide))
    across = width / (2.0 * np.sin(best / 2.0))
    cosine = np.cos(best / 2.0)
    return float(min(across, depth / cosine if cosine > 1e-9 else np.inf))


def _note(name: str, low: float, high: float, wavelength: float, reason: str) -> str:
    ends = (
        f"{to_file(name, low):g}"
        if low == high
        else (f"{to_file(name, low):g} to {to_file(name, high):g}")
    )
    if name == "apex_angle":
        return f"{FILE_KEYS[name]}: {ends}"
    shares = " to ".join(f"{end / wavelength:.2f}" for end in dict.fromkeys((low, high)))
    return f"{FILE_KEYS[name]}: {ends} ({shares} λ{reason})"


def _single_values(requirements: Requirements) -> list[str]:
    """Return a note on each step and on the dipole's diameter where the file leaves it out."""
    wavelength = C0 / requirements.band.middle_hz
    diameter, step = requirements.dipole_diameter, requirements.length_step
    notes = {
        "dipole_diameter_mm": f"{1000.0 * diameter:g} (λ/{wavelength / diameter:.0f})",
        "length_step_mm": f"{1000.0 * step:g} (λ/{wavelength / step:.0f})",
        "angle_step_deg": f"{np.degrees(requirements.angle_step):g}",
    }
    return [
        f"{key}: {note}" for key, note in notes.items() if f"build.{key}" in requirements.derived
    ]
