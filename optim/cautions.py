"""What can hurt someone about an antenna on a mast, in words for its data sheet.

Wind (N), radio exposure (m); ice, lightning and power lines in words only. Every text defers to the
codes of the place and to people qualified under them.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

import numpy as np

from models import Reflectors
from models.build import AIR_DENSITY, wind_load
from optim.exposure import KNOWN_HZ, distance, far_field_from, public_limit
from optim.requirements import Band

__all__ = ["POWERS_W", "cautions"]

POWERS_W: Final = (1.0, 10.0, 100.0)
"""Powers into the antenna for which distances are stated."""


def cautions(
    reflectors: Reflectors, *, band: Band, wind_speed: float, peak_gain_dbi: float
) -> Iterator[tuple[str, str]]:
    """Yield heading and text of each caution for the first design.

    Parameters
    ----------
    reflectors : Reflectors
    band : Band
    wind_speed : float
        m/s.
    peak_gain_dbi : float
        In the strongest direction, the highest over the band; NaN if not known.
    """
    load = float(wind_load(reflectors, wind_speed)[0])
    yield (
        "Wind and ice",
        f"A steady wind of {wind_speed:g} m/s along boresight pushes with {load:.0f} N: drag of a "
        f"flat plate of the frontal area, force coefficient 1.17 to 1.98 by its sides, air of "
        f"{AIR_DENSITY:g} kg/m³. Gusts, height, ice, cable, clamps and the mast itself are not in "
        "it, and ice adds area and weight. Have mast, clamps and foundation checked against the "
        "code of the place by someone qualified.",
    )
    yield (
        "Lightning and earthing",
        "Bond reflector, mast and cable screen to one earth, and fit a surge arrester where the "
        "cable enters the building, as the code of the place asks. No work on the antenna when "
        "thunder can be heard.",
    )
    yield (
        "Power lines",
        "Touching a power line kills. Put the mast up where neither it nor the antenna can reach a "
        "line if they fall, keep the distance that the code of the place asks, and never work "
        "alone.",
    )
    yield "Radio exposure", " ".join(_exposure(reflectors, band, peak_gain_dbi))


def _exposure(reflectors: Reflectors, band: Band, peak_gain_dbi: float) -> Iterator[str]:
    limit = public_limit(band.low_hz)
    known = np.isfinite(limit) and np.isfinite(public_limit(band.high_hz))
    if not known:
        low, high = (f / 1e6 for f in KNOWN_HZ)
        yield (
            f"This band is not within {low:g} to {high:g} MHz: the limit for people must be looked "
            "up. In the far field the power density is EIRP/(4πR²)."
        )
    elif np.isfinite(peak_gain_dbi):
        far = ", ".join(
            f"{distance(power, peak_gain_dbi, limit):.2g} m for {power:g} W" for power in POWERS_W
        )
        yield (
            f"People stay farther off in front than {far} into the antenna, sent without pause: "
            f"EIRP/(4πR²) at the peak gain of {peak_gain_dbi:.1f} dBi against the limit for the "
            f"general public of {limit / 10.0:.3g} mW/cm² (f/1500 at {band.low_hz / 1e6:g} MHz, "
            "47 CFR 1.1310)."
        )
    side = float(np.hypot(reflectors.width[0], reflectors.height[0]))
    near = far_field_from(side, band.high_hz)
    yield (
        f"The formula holds in free space beyond {near:.2g} m (2D²/λ): keep that distance where a "
        "shorter one comes out, or measure. Ground that reflects can double the distance. Nobody "
        "inside or right in front of the reflector while it transmits. The codes of the place and "
        "licensed practice decide."
    )
