"""Small drawings of designs for the report: front view and H-plane section as SVG text.

All designs of a report are drawn to one scale, so that switching between them shows how they
differ. Lengths in mm on the drawing; only numbers go into the text, never words of a user.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from models.geometry import Reflectors
from optim.drafting import millimetres

__all__ = ["scale_of", "sketch"]

WIDTH: Final = 320.0
HEIGHT: Final = 232.0
ROOM: Final = (140.0, 150.0)
"""Most that a view may take, px."""

_MIDDLE: Final = (80.0, 104.0)
_APEX: Final = (240.0, 176.0)


def scale_of(reflectors: Reflectors) -> float:
    """Return the scale, px a metre, at which every one of n designs has room."""
    wide = float(np.max(reflectors.width))
    tall = float(np.max(np.maximum(reflectors.height, reflectors.depth)))
    return min(ROOM[0] / wide, ROOM[1] / tall)


def sketch(reflectors: Reflectors, row: int, scale: float) -> str:
    """Return the drawing of one design at `scale` px a metre."""
    r = reflectors[row]
    wide, tall, deep = (float(side[0]) for side in (r.width, r.height, r.depth))
    half, length = scale * wide / 2.0, scale * float(r.plate_length[0]) / 2.0
    feed = scale * float(r.dipole_length[0]) / 2.0
    angle, spacing = float(r.apex_angle[0]), scale * float(r.spacing[0])
    rim = scale * float(r.plate_width[0] * np.cos(r.apex_angle[0] / 2.0))
    x, y = _MIDDLE
    ax, ay = _APEX
    widths, heights, depths = (millimetres(side, decimals=1) for side in (wide, tall, deep))
    degrees, spacings = f"{np.degrees(angle):.4g}°", millimetres(float(r.spacing[0]), decimals=1)
    arc = min(24.0, 0.4 * scale * float(r.plate_width[0]))
    dx, dy = arc * np.sin(angle / 2.0), arc * np.cos(angle / 2.0)
    label = (
        f"front view {widths} mm wide and {heights} mm high, and section across the dipole "
        f"{depths} mm deep, apex angle {degrees}, spacing {spacings} mm"
    )
    foot = y + max(length, feed) + 16.0
    return (
        f'<svg class="sketch" viewBox="0 0 {WIDTH:g} {HEIGHT:g}" role="img" aria-label="{label}">'
        f'<path class="plate" d="M{x - half:.1f} {y - length:.1f}h{2 * half:.1f}v{2 * length:.1f}'
        f'h{-2 * half:.1f}z"/>'
        f'<path class="fold" d="M{x:.1f} {y - length:.1f}v{2 * length:.1f}"/>'
        f'<path class="feed" d="M{x:.1f} {y - feed:.1f}v{2 * feed:.1f}"/>'
        f'<text x="{x:g}" y="{foot:.1f}">{widths} × {heights} mm</text>'
        f'<text x="{x:g}" y="13">front</text>'
        f'<path class="sheet" d="M{ax - half:.1f} {ay - rim:.1f}L{ax:g} {ay:g}'
        f'L{ax + half:.1f} {ay - rim:.1f}"/>'
        f'<path class="fold" d="M{ax:g} {ay:g}V{ay - max(spacing, rim) - 14:.1f}"/>'
        f'<path class="arrow" d="M{ax - 3.5:.1f} {ay - max(spacing, rim) - 12:.1f}'
        f'l3.5 -8l3.5 8z"/>'
        f'<path class="arc" d="M{ax - dx:.1f} {ay - dy:.1f}A{arc:.1f} {arc:.1f} 0 0 1 '
        f'{ax + dx:.1f} {ay - dy:.1f}"/>'
        f'<circle class="rod" cx="{ax:g}" cy="{ay - spacing:.1f}" r="3"/>'
        f'<text x="{ax:g}" y="{ay + 16:g}">apex {degrees}</text>'
        f'<text x="{ax:g}" y="{ay + 31:g}">spacing {spacings} mm</text>'
        f'<text x="{ax:g}" y="{ay + 46:g}">depth {depths} mm</text>'
        f'<text x="{ax:g}" y="13">section</text></svg>'
    )
