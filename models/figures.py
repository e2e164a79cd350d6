"""Figures of merit from any pattern: directivity, gains, beamwidths, ratios, match.

Terms after IEEE Std 145. Directivity, gain (conductor loss in) and realized gain (mismatch in) are
those on boresight. Half-power beamwidths are measured from boresight outwards against the boresight
level. Levels of side lobes and masks are relative to the boresight level.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Final

import numpy as np

from models.conventions import FloatArray, decibels
from models.pattern import Pattern

__all__ = ["Figures", "Terms", "figures_of_merit", "vswr"]


WELL_INSIDE: Final = -60.0
"""Excess over an envelope that stands for 'not to the point', dB."""

FAR_BELOW: Final = -400.0
"""Level that stands for a null where levels are interpolated, dB."""


@dataclass(frozen=True, kw_only=True)
class Terms:
    """What the figures are asked against.

    Parameters
    ----------
    rear_sector : float
        Half-width of the sector about the rear in which the strongest level counts for
        `front_to_back_db`, radians.
    reference_ohm : float
        Reference impedance of VSWR and realized gain.
    impedance_ratio : float
        Terminal impedance over that of the plain dipole: 1, or 4 for a folded dipole of two equal
        wires.
    mask_h, mask_e : tuple of (angle, level) pairs, optional
        Envelope: radians off boresight and dB, straight lines between the points. Outside the
        first and last point the envelope does not apply.
    """

    rear_sector: float = np.pi / 6.0
    reference_ohm: float = 50.0
    impedance_ratio: float = 1.0
    mask_h: tuple[tuple[float, float], ...] | None = None
    mask_e: tuple[tuple[float, float], ...] | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class Figures:
    """Figures of merit, each (n, n_freq); NaN where the model cannot give the figure.

    `mask_h_db` and `mask_e_db` are the highest excess of the cut over its envelope (negative:
    inside). `doubt_db` is the model's own estimate of its error in directivity, `inf` where it
    cannot vouch for the design.
    """

    directivity_dbi: FloatArray
    gain_dbi: FloatArray
    realized_gain_dbi: FloatArray
    beamwidth_h_deg: FloatArray
    beamwidth_e_deg: FloatArray
    front_to_back_db: FloatArray
    front_to_back_180_db: FloatArray
    sidelobe_db: FloatArray
    boresight_dip_db: FloatArray
    resistance_ohm: FloatArray
    reactance_ohm: FloatArray
    vswr: FloatArray
    mask_h_db: FloatArray
    mask_e_db: FloatArray
    doubt_db: FloatArray

    @classmethod
    def names(cls) -> tuple[str, ...]:
        """Return the names of the figures, in order."""
        return tuple(field.name for field in fields(cls))

    @classmethod
    def concatenate(cls, parts: list[Figures]) -> Figures:
        """Return the figures of all `parts`, designs in order."""
        return cls(
            **{name: np.concatenate([getattr(p, name) for p in parts]) for name in cls.names()}
        )


def vswr(resistance: FloatArray, reactance: FloatArray, reference_ohm: float) -> FloatArray:
    """Return the voltage standing wave ratio of an impedance (Ω) on a line of `reference_ohm`."""
    size = np.minimum(reflection(resistance, reactance, reference_ohm), 1.0)
    with np.errstate(divide="ignore"):
        return np.asarray((1.0 + size) / (1.0 - size))


def reflection(resistance: FloatArray, reactance: FloatArray, reference_ohm: float) -> FloatArray:
    """Return the magnitude of the voltage reflection coefficient; NaN stays NaN."""
    impedance = resistance + 1j * reactance
    with np.errstate(invalid="ignore"):  # a complex NaN divided is an invalid operation
        return np.asarray(np.abs((impedance - reference_ohm) / (impedance + reference_ohm)))


def figures_of_merit(pattern: Pattern, terms: Terms | None = None) -> Figures:
    """Return the figures of `pattern`, each (n, n_freq)."""
    terms = terms or Terms()
    angles = pattern.angles
    h_power, e_power = _intensity(pattern.h_field), _intensity(pattern.e_field)
    front = h_power[..., :1]
    with np.errstate(divide="ignore", invalid="ignore"):
        # Each cut by its own value on boresight: the two agree but for rounding, which an envelope
        # of 0 dB there would not forgive.
        h_level, e_level = decibels(h_power / front), decibels(e_power / e_power[..., :1])
        directivity = decibels(front[..., 0] / pattern.power)
    rear = angles >= np.pi - terms.rear_sector - 1e-9
    rear_level = np.maximum(h_level[..., rear].max(axis=-1), e_level[..., rear].max(axis=-1))
    resistance = pattern.resistance * terms.impedance_ratio
    reactance = pattern.reactance * terms.impedance_ratio
    gain = directivity + decibels(pattern.efficiency)
    mismatch = 1.0 - reflection(resistance, reactance, terms.reference_ohm) ** 2
    h_half, e_half = half_power_angle(angles, h_level), half_power_angle(angles, e_level)
    return Figures(
        directivity_dbi=directivity,
        gain_dbi=gain,
        realized_gain_dbi=gain + decibels(mismatch),
        beamwidth_h_deg=np.degrees(2.0 * h_half),
        beamwidth_e_deg=np.degrees(2.0 * e_half),
        front_to_back_db=-rear_level,
        front_to_back_180_db=-h_level[..., -1],
        sidelobe_db=np.maximum(
            highest_side_lobe(angles, h_level, h_half), highest_side_lobe(angles, e_level, e_half)
        ),
        boresight_dip_db=np.maximum(h_level.max(axis=-1), e_level.max(axis=-1)),
        resistance_ohm=resistance,
        reactance_ohm=reactance,
        vswr=vswr(resistance, reactance, terms.reference_ohm),
        mask_h_db=_excess(angles, h_level, terms.mask_h),
        mask_e_db=_excess(angles, e_level, terms.mask_e),
        doubt_db=pattern.doubt_db,
    )


def _intensity(field: np.ndarray) -> FloatArray:
    return np.asarray(field.real**2 + field.imag**2)


def half_power_angle(angles: FloatArray, level_db: FloatArray) -> FloatArray:
    """Return the angle off boresight where the level first falls to half, radians.

    Parameters
    ----------
    angles : (n_angle,)
        Radians from boresight.
    level_db : (..., n_angle)
        Level relative to boresight.

    Returns
    -------
    (...,)
        Parabolic interpolation in dB; π where the level never falls to half.
    """
    half = decibels(0.5)
    below = level_db < half
    after = np.maximum(below.argmax(axis=-1), 1)[..., None]

    def level(index: np.ndarray) -> FloatArray:
        inside = np.clip(index, 0, angles.size - 1)
        return np.asarray(np.maximum(np.take_along_axis(level_db, inside, axis=-1), FAR_BELOW))

    high, low = level(after - 1), level(after)
    # A parabola's correction to the straight line: mean second difference of the four neighbours.
    bend = (level(np.abs(after - 2)) - high - low + level(after + 1)) / 4.0
    with np.errstate(divide="ignore", invalid="ignore"):
        part = (high - half) / (high - low)
        bent = part + np.clip(bend * part * (part - 1.0) / (high - low), -0.25, 0.25)
    part = np.where(after < angles.size - 1, np.clip(bent, 0.0, 1.0), part)
    crossing = (angles[after - 1] + part * (angles[after] - angles[after - 1]))[..., 0]
    known = ~np.isnan(level_db).any(axis=-1)
    return np.where(known, np.where(below.any(axis=-1), crossing, np.pi), np.nan)


def highest_side_lobe(angles: FloatArray, level_db: FloatArray, half: FloatArray) -> FloatArray:
    """Return the highest level beyond the main beam, dB relative to boresight, (...,).

    The main beam ends at the first minimum past the half-power angle `half` (...,), radians. A cut
    that falls all the way to the rear has no side lobe: the level at the rear stands in.
    """
    rising = level_db[..., 1:] > level_db[..., :-1]
    outside = rising & (angles[:-1] >= half[..., None])
    beyond = np.logical_or.accumulate(outside, axis=-1)
    lobes = np.where(beyond, level_db[..., 1:], -np.inf).max(axis=-1)
    return np.asarray(np.maximum(lobes, level_db[..., -1]))


def _excess(
    angles: FloatArray, level_db: FloatArray, mask: tuple[tuple[float, float], ...] | None
) -> FloatArray:
    if mask is None:
        return np.full(level_db.shape[:-1], np.nan)
    corners = np.array(mask)
    inside = angles[(angles > corners[0, 0]) & (angles < corners[-1, 0])]
    checked = np.concatenate([corners[:, 0], inside])
    allowed = np.concatenate([corners[:, 1], np.interp(inside, corners[:, 0], corners[:, 1])])
    step = angles[1] - angles[0]
    left = np.minimum((checked / step).astype(np.intp), angles.size - 2)
    part = checked / step - left
    finite = np.maximum(level_db, FAR_BELOW)  # a null times no part of it would be no number
    level = finite[..., left] * (1.0 - part) + finite[..., left + 1] * part
    # One null is a null; a stretch of nothing is where the model has no answer.
    nothing = np.isneginf(level_db)
    level[nothing[..., left] & nothing[..., left + 1]] = np.nan
    # Levels are relative to boresight: where 0 dB is allowed, keeping it is no close call.
    kept = (allowed >= 0.0) & (level <= allowed + 1e-9)
    return np.asarray(np.where(kept, WELL_INSIDE, level - allowed).max(axis=-1))
