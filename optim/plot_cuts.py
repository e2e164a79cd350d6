"""Pictures of the principal-plane cuts of one design: polar and rectangular, dB against degrees.

Levels are relative to boresight; the absolute gain (dBi), the half-power beamwidths (degrees) and
the front-to-back ratio (dB) stand beside each frequency. Angles are degrees off boresight; every
model here is mirror symmetric, so half a cut is the whole.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Final, cast

import numpy as np
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.projections.polar import PolarAxes

from models.conventions import FloatArray, decibels
from models.figures import Figures, Terms, figures_of_merit
from models.pattern import Pattern
from optim.quantities import minus
from optim.style import BLACK, FORBIDDEN, GREY, MARKS, Mark, house_style, new_figure, no_data

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["FLOOR_DB", "draw_cuts", "relative_level_db"]

FLOOR_DB: Final = -40.0
"""Level at the centre of the polar pictures and at the foot of the rectangular ones."""

_HALF_POWER_DB: Final = float(decibels(0.5))
_LINES: Final = (MARKS[1], MARKS[0], MARKS[2])
"""Low edge, centre, high edge; the centre keeps the full line."""


def relative_level_db(field: np.ndarray) -> FloatArray:
    """Return the level of a complex cut (..., n_angle) relative to its first angle, dB."""
    intensity = np.abs(field) ** 2
    with np.errstate(divide="ignore", invalid="ignore"):
        return decibels(intensity / intensity[..., :1])


def draw_cuts(
    *,
    title: str,
    pattern: Pattern,
    frequencies_hz: FloatArray,
    terms: Terms | None = None,
    model: str = "",
) -> Figure:
    """Return the picture of both cuts of the first design of `pattern`.

    Parameters
    ----------
    title : str
        Free text.
    pattern : Pattern
        Its first design is drawn, at up to three frequencies.
    frequencies_hz : (n_freq,)
        Hz, ascending; the frequencies of `pattern`.
    terms : Terms, optional
        Gives the envelope masks and the rear sector.
    model : str
        Name of the model, for the foot line.
    """
    terms = terms or Terms()
    figures = figures_of_merit(pattern, terms)
    columns = _columns(frequencies_hz.size)
    lines = _LINES[:3] if len(columns) == 3 else (_LINES[1], _LINES[2])[: len(columns)]
    degrees = np.degrees(pattern.angles)
    with house_style():
        figure = new_figure(7.2, 7.6, title=title)
        grid = figure.add_gridspec(2, 2, height_ratios=(1.15, 1.0))
        planes = (
            ("H-plane", pattern.h_field, terms.mask_h, figures.beamwidth_h_deg),
            ("E-plane", pattern.e_field, terms.mask_e, figures.beamwidth_e_deg),
        )
        for place, (name, field, mask, beamwidth) in enumerate(planes):
            level = relative_level_db(field[0][columns])
            polar = cast(PolarAxes, figure.add_subplot(grid[0, place], projection="polar"))
            flat = figure.add_subplot(grid[1, place])
            top = _top(level)
            _prepare_polar(polar, name, top)
            _prepare_flat(flat, name, top)
            if np.isnan(level).all():
                no_data(flat, "this model gives\nno such cut here")
            for row, line in zip(level, lines, strict=True):
                shown = np.maximum(row, FLOOR_DB)
                both = np.concatenate([-pattern.angles[::-1], pattern.angles])
                polar.plot(both, np.concatenate([shown[::-1], shown]), **_look(line))
                flat.plot(degrees, shown, **_look(line))
            _mark_half_power(polar, flat, beamwidth[0][columns], lines)
            if mask is not None:
                _draw_mask(polar, flat, np.array(mask))
        envelope = terms.mask_h is not None or terms.mask_e is not None
        notes = "Markers: half-power points." + " Black line: envelope asked for." * envelope
        source = f" Model: {model}." if model else ""
        figure.legend(
            handles=[
                Line2D(
                    [],
                    [],
                    label=_words(figures, column, frequencies_hz[column]),
                    marker=line.marker,
                    markersize=5,
                    **_look(line),
                )
                for column, line in zip(columns, lines, strict=True)
            ],
            loc="outside lower left",
            title=notes + source,
            alignment="left",
            title_fontsize=8.5,
            handlelength=3.2,
        )
    return figure


def _columns(count: int) -> list[int]:
    """Return low edge, centre and high edge of `count` frequencies, each once."""
    return sorted({0, (count - 1) // 2, count - 1})


def _look(line: Mark) -> dict[str, Any]:
    return {"color": line.colour, "linestyle": line.dashes}


def _top(level: FloatArray) -> float:
    """Return 0 dB, or the next 5 dB above a beam that is higher off boresight."""
    highest = float(np.nanmax(level, initial=0.0))
    return 0.0 if highest < 0.05 else 5.0 * float(np.ceil(highest / 5.0))


def _prepare_polar(axes: PolarAxes, name: str, top: float) -> None:
    axes.set_theta_zero_location("N")
    axes.set_theta_direction(-1)
    axes.set_rlim(FLOOR_DB, top)
    rings = np.arange(FLOOR_DB + 10.0, top, 10.0)
    # Ring labels stand towards the rear, where the pattern is small, off the radial lines.
    axes.set_rgrids(rings, [minus(f"{ring:.0f}") for ring in rings], angle=165.0, fontsize=8.0)
    for label in axes.get_yticklabels():
        label.set(color=GREY, backgroundcolor=(1.0, 1.0, 1.0, 0.7))
    turn = np.arange(0, 360, 30)
    axes.set_thetagrids(turn, [f"{min(t, 360 - t)}°" for t in turn])
    axes.tick_params(axis="x", pad=0)
    axes.set_title(f"{name}: dB relative to boresight (0°)", pad=10)


def _prepare_flat(axes: Axes, name: str, top: float) -> None:
    axes.set(
        xlim=(0.0, 180.0),
        ylim=(FLOOR_DB, max(top, 0.0) + 2.0),
        xlabel="angle off boresight (degrees), both sides alike",
        ylabel=f"{name} level (dB)",
    )
    axes.set_xticks(np.arange(0, 181, 30))
    axes.axhline(_HALF_POWER_DB, color=GREY, linewidth=0.8, linestyle=(0, (2, 2)))
    axes.text(178.0, _HALF_POWER_DB - 0.4, "half power", ha="right", va="top", color=GREY)


def _mark_half_power(
    polar: PolarAxes, flat: Axes, beamwidth_deg: FloatArray, lines: Sequence[Mark]
) -> None:
    for width, line in zip(beamwidth_deg, lines, strict=True):
        if np.isfinite(width) and width < 360.0:
            look: dict[str, Any] = {
                "marker": line.marker,
                "markersize": 5,
                "linestyle": "none",
                "zorder": 5,
            }
            edge = np.radians(width / 2.0)
            polar.plot([-edge, edge], [_HALF_POWER_DB] * 2, color=line.colour, **look)
            flat.plot([width / 2.0], [_HALF_POWER_DB], color=line.colour, **look)


def _draw_mask(polar: PolarAxes, flat: Axes, mask: FloatArray) -> None:
    """Draw the envelope, and shade what is above it in the rectangular picture."""
    angles = np.linspace(mask[0, 0], mask[-1, 0], 361)
    levels = np.maximum(np.interp(angles, mask[:, 0], mask[:, 1]), FLOOR_DB)
    look: dict[str, Any] = {"color": BLACK, "linewidth": 1.2, "zorder": 2.5}
    for side in (-1.0, 1.0):
        polar.plot(side * angles, levels, **look)
    ceiling = flat.get_ylim()[1]
    corners, heights = np.degrees(mask[:, 0]), np.maximum(mask[:, 1], FLOOR_DB)
    flat.plot(corners, heights, **look)
    flat.fill_between(
        corners,
        heights,
        ceiling,
        **FORBIDDEN,
    )


def _words(figures: Figures, column: int, frequency_hz: float) -> str:
    """Return the figures at one frequency in words."""
    gain, directivity = figures.gain_dbi[0, column], figures.directivity_dbi[0, column]
    said = (
        f"gain {_number(gain, 2, 'dBi')}"
        if np.isfinite(gain)
        else f"directivity {_number(directivity, 2, 'dBi')}"
    )
    return (
        f"{frequency_hz / 1e6:.6g} MHz: {said} on boresight,"
        f" half-power beamwidth H {_number(figures.beamwidth_h_deg[0, column], 1, '°')}"
        f" E {_number(figures.beamwidth_e_deg[0, column], 1, '°')},"
        f" front-to-back {_number(figures.front_to_back_db[0, column], 1, 'dB')}"
    )


def _number(value: float, digits: int, unit: str) -> str:
    gap = "" if unit == "°" else " "
    return f"{value:.{digits}f}{gap}{unit}" if np.isfinite(value) else "–"
