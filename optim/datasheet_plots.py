"""The pictures of a data sheet: both cuts, gain, impedance and match over the band.

Cuts in dB relative to boresight at the edges and the middle of the band; frequency in MHz, gain in
dBi, impedance in Ω. What a requirement rules out is shaded.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Final

import numpy as np
from matplotlib.projections.polar import PolarAxes

from models.conventions import FloatArray
from optim.plot_cuts import FLOOR_DB, relative_level_db
from optim.quantities import minus
from optim.style import GREY, MARKS, no_data, rule_out

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from optim.subject import Subject

__all__ = ["LINES", "cut", "gain", "impedance", "match", "shown_columns"]

LINES: Final = (MARKS[1], MARKS[0], MARKS[2])
"""Low edge, middle and high edge of the band; the middle keeps the full line."""


def shown_columns(count: int) -> dict[int, int]:
    """Return which of `count` frequencies the cuts show, and the line of each."""
    return {0: 0, (count - 1) // 2: 1, count - 1: 2} if count > 2 else {c: c for c in range(count)}


def cut(axes: PolarAxes, subject: Subject, plane: str) -> None:
    """Draw the cut of `plane`, "h" or "e"."""
    field = {"h": subject.pattern.h_field, "e": subject.pattern.e_field}[plane][0]
    level = np.maximum(relative_level_db(field), FLOOR_DB)
    angles = subject.pattern.angles
    axes.set_theta_zero_location("N")
    axes.set_theta_direction(-1)
    top = max(0.0, 5.0 * float(np.ceil(np.nanmax(level, initial=0.0) / 5.0 - 0.01)))
    axes.set_rlim(FLOOR_DB, top)
    rings = np.arange(FLOOR_DB + 10.0, top + 0.1, 10.0)
    axes.set_rgrids(
        rings, [minus(f"{r:.0f}") for r in rings], angle=165.0, fontsize=8.0, color=GREY
    )
    turn = np.arange(0, 360, 30)
    axes.set_thetagrids(turn, [f"{min(t, 360 - t)}°" for t in turn], fontsize=8.0)
    axes.tick_params(axis="x", pad=-1)
    axes.set_title(f"{plane.upper()}-plane, dB relative to boresight", pad=8, loc="center")
    both = np.concatenate([-angles[:0:-1], angles])
    for column, place in shown_columns(level.shape[0]).items():
        row = level[column]
        axes.plot(
            both,
            np.concatenate([row[:0:-1], row]),
            color=LINES[place].colour,
            linestyle=LINES[place].dashes,
            linewidth=1.3,
        )


def gain(axes: Axes, subject: Subject) -> None:
    """Draw gain and realized gain over the band."""
    figures = subject.figures
    _curves(
        axes,
        subject,
        title="gain on boresight (dBi)",
        curves={"gain": figures.gain_dbi[0], "realized": figures.realized_gain_dbi[0]},
        ruled_by="gain_dbi",
    )


def impedance(axes: Axes, subject: Subject) -> None:
    """Draw resistance and reactance over the band."""
    figures = subject.figures
    _curves(
        axes,
        subject,
        title="input impedance R + jX (Ω)",
        curves={"R": figures.resistance_ohm[0], "X": figures.reactance_ohm[0]},
    )


def match(axes: Axes, subject: Subject) -> None:
    """Draw VSWR over the band."""
    reference = subject.requirements.terms.reference_ohm
    _curves(
        axes,
        subject,
        title=f"VSWR on {reference:g} Ω",
        curves={"VSWR": subject.figures.vswr[0]},
        ruled_by="vswr",
    )


def _curves(
    axes: Axes,
    subject: Subject,
    *,
    title: str,
    curves: dict[str, FloatArray],
    ruled_by: str = "",
) -> None:
    mhz = subject.frequencies / 1e6
    axes.set_title(title)
    seen = np.concatenate(list(curves.values()))
    seen = seen[np.isfinite(seen)]
    if not seen.size:
        no_data(axes, "not given\nby this model")
    for (name, values), mark in zip(curves.items(), MARKS, strict=False):
        look: dict[str, Any] = {"color": mark.colour, "linestyle": mark.dashes}
        if np.isfinite(values).any():
            known = np.where(np.isfinite(values), values, np.nan)
            every = max((mhz.size - 1) // 6, 1)
            axes.plot(
                mhz, known, marker=mark.marker, markersize=3.5, markevery=every, label=name, **look
            )
    limits = [limit for limit in subject.requirements.limits if limit.figure == ruled_by]
    everything = np.concatenate([seen, [limit.value for limit in limits]])
    if everything.size:
        low, high = float(everything.min()), float(everything.max())
        air = max(0.12 * (high - low), 0.02 * max(abs(low), abs(high)), 0.1)
        # Room above for the legend.
        axes.set_ylim(low - air, high + air + 0.35 * (high - low + air))
    if mhz.size > 1:
        axes.set_xlim(mhz[0], mhz[-1])
    axes.locator_params(axis="x", nbins=3)
    axes.locator_params(axis="y", nbins=5)
    axes.set_xlabel("MHz")
    for limit in limits:
        rule_out(axes, "y", limit.sense, limit.value, label="_")
    if len(curves) > 1 and seen.size:
        axes.legend(loc="upper left", ncols=2, handlelength=1.8, columnspacing=1.0, borderpad=0.2)
