"""Pattern data as CSV: absolute gain (dBi) over angle and frequency, on both cuts and all around.

Lines that start with # say what the columns are. Where a model gives no efficiency the directivity
stands in, and its name with it. Levels below `FLOOR_DBI` are written as that.

Frame: boresight +x, the dipole and the apex line along z. H-plane cut: in the xy plane, the angle
from boresight towards +y. E-plane cut: in the xz plane, from boresight towards +z. Sphere: θ from
+z, φ from boresight towards +y.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from typing import Final

import numpy as np

from models.conventions import FloatArray, decibels
from models.pattern import Pattern, Sphere

__all__ = ["FLOOR_DBI", "GRID", "cut_csv", "sphere_csv"]

FLOOR_DBI: Final = -100.0

GRID: Final = (np.radians(np.arange(0.0, 181.0, 5.0)), np.radians(np.arange(-180.0, 180.0, 5.0)))
"""θ and φ at which the sphere is sampled, radians."""

_PLANES: Final = {
    "h": "H-plane cut, in the xy plane: angle from boresight +x towards +y",
    "e": "E-plane cut, in the xz plane: angle from boresight +x towards +z (the dipole's axis)",
}


def cut_csv(pattern: Pattern, frequencies_hz: FloatArray, *, plane: str) -> str:
    """Return one full cut of the first design, −180° to 180°, one column a frequency.

    Parameters
    ----------
    pattern : Pattern
        (n, n_freq, n_angle).
    frequencies_hz : (n_freq,)
        Hz, those of `pattern`.
    plane : {"h", "e"}
    """
    field = {"h": pattern.h_field, "e": pattern.e_field}[plane][0]
    lossy = bool(np.isfinite(pattern.efficiency[0]).all())
    scale = (pattern.efficiency[0] if lossy else 1.0) / pattern.power[0]
    half = _level(np.abs(field) ** 2 * scale[:, None])
    # The antenna is its own mirror image: left like right, up like down.
    both = np.concatenate([half[:, :0:-1], half], axis=1)
    degrees = np.degrees(np.concatenate([-pattern.angles[:0:-1], pattern.angles]))
    quantity = "gain" if lossy else "directivity"
    columns = [f"{quantity}_dbi_at_{f / 1e6:.10g}_mhz" for f in frequencies_hz.tolist()]
    head = [_PLANES[plane], f"absolute {quantity} in dBi, polarisation along the dipole (E_theta)"]
    rows = ([f"{a:.1f}", *map(_cell, levels)] for a, levels in zip(degrees, both.T, strict=True))
    return _table([*head, *_FOOT], ["angle_deg", *columns], rows)


def sphere_csv(sphere: Sphere, frequencies_hz: FloatArray) -> str:
    """Return the gain of the first design all around, one line a frequency and direction.

    Parameters
    ----------
    sphere : Sphere
        (n, n_freq, n_theta, n_phi).
    frequencies_hz : (n_freq,)
        Hz, those of `sphere`.
    """
    along_theta, along_phi = (gain[0] for gain in sphere.gains())
    levels = [_level(gain) for gain in (along_theta + along_phi, along_theta, along_phi)]
    head = [
        "whole sphere: theta from +z (the dipole's axis), phi from boresight +x towards +y",
        "absolute gain in dBi: both polarisations together, E_theta alone, E_phi alone",
    ]
    names = ["gain_dbi", "gain_theta_dbi", "gain_phi_dbi"]
    theta, phi = np.degrees(sphere.theta), np.degrees(sphere.phi)
    grid = np.meshgrid(frequencies_hz / 1e6, theta, phi, indexing="ij")
    numbers = np.stack([*grid, *levels], axis=-1).reshape(-1, 6)
    rows = (
        [f"{mhz:.10g}", f"{t:.1f}", f"{p:.1f}", *map(_cell, gains)]
        for mhz, t, p, *gains in numbers.tolist()
    )
    return _table([*head, *_FOOT], ["frequency_mhz", "theta_deg", "phi_deg", *names], rows)


_FOOT: Final = (
    "boresight +x, apex line and dipole along z, origin in the middle of the apex line",
    f"levels below {FLOOR_DBI:g} dBi are written as {FLOOR_DBI:g}",
)


def _level(ratio: FloatArray) -> FloatArray:
    return np.asarray(np.maximum(decibels(ratio), FLOOR_DBI))


def _cell(level: float) -> str:
    return f"{level:.3f}" if np.isfinite(level) else ""


def _table(head: Sequence[str], columns: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    text = io.StringIO()
    text.writelines(f"# {line}\n" for line in head)
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    writer.writerows(rows)
    return text.getvalue()
