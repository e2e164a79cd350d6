"""How far people must stay off a transmitting antenna: public exposure, W/m², in its far field.

Limit: f/1500 mW/cm², f in MHz, for the general public from 300 to 1500 MHz (47 CFR 1.1310); NaN
elsewhere, where it must be looked up. Power density S = EIRP/(4πR²) (OET Bulletin 65) holds in free
space and in the far field; ground that reflects can raise it fourfold. Local codes decide.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from models.conventions import C0

__all__ = ["KNOWN_HZ", "distance", "far_field_from", "public_limit"]

KNOWN_HZ: Final = (300e6, 1500e6)
"""Where `public_limit` knows a limit."""


def public_limit(frequency_hz: float) -> float:
    """Return the limit on power density for the general public, W/m²; NaN where not known here."""
    if not KNOWN_HZ[0] <= frequency_hz <= KNOWN_HZ[1]:
        return float("nan")
    return frequency_hz / 1e6 / 1500.0 * 10.0  # 1 mW/cm² = 10 W/m²


def distance(power_w: float, gain_dbi: float, limit_w_m2: float) -> float:
    """Return R at which EIRP/(4πR²) falls to the limit, m.

    Parameters
    ----------
    power_w : float
        Into the antenna, W.
    gain_dbi : float
        In the strongest direction.
    limit_w_m2 : float
    """
    eirp = power_w * 10.0 ** (gain_dbi / 10.0)
    return float(np.sqrt(eirp / (4.0 * np.pi * limit_w_m2)))


def far_field_from(largest_size: float, frequency_hz: float) -> float:
    """Return 2D²/λ, where the far field of an antenna of `largest_size` (m) begins, m."""
    return 2.0 * largest_size**2 * frequency_hz / C0
