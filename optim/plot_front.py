"""The picture of a front: one goal against another, usually frontal area (m²) against gain (dBi).

A guide line shows the aperture of physics: an area A lit uniformly has the directivity 4πA/λ²
(Balanis, *Antenna Theory*, §12.5). It is no bound for an antenna of about a wavelength, whose
fields reach past its rims: such designs may lie on the small side of the line.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np
from matplotlib.figure import Figure

from models.conventions import C0, FloatArray, decibels
from optim.style import BLACK, GREY, house_style, mark_of, new_figure, no_data, rule_out

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["Axis", "aperture_gain_dbi", "draw_front"]

_MARGIN: Final = 0.08
"""Air around the points, as a part of their span."""


_NEAR_DB: Final = 3.0
"""How far outside the designs' gains the aperture's line may start and still be shown, dB."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Axis:
    """One goal of a front: a value a design, and what is required of it.

    Parameters
    ----------
    label : str
        Words and unit, as in "gain, worst in the band (dBi)".
    short : str
        Name and unit for the legend's values, as in ("gain", "dBi").
    values : (n,)
        In the label's unit.
    minimum, maximum : float, optional
        The requirement, in the label's unit.
    """

    label: str
    unit: str
    values: FloatArray
    minimum: float | None = None
    maximum: float | None = None

    def limits(self) -> tuple[float, float]:
        """Return the ends of the axis: all values and requirements, with air around them."""
        asked = [limit for limit in (self.minimum, self.maximum) if limit is not None]
        seen = np.concatenate([self.values[np.isfinite(self.values)], asked])
        if seen.size == 0:
            return 0.0, 1.0
        low, high = float(seen.min()), float(seen.max())
        air = _MARGIN * (high - low) or 0.05 * abs(high) or 1.0
        return low - air, high + air


def aperture_gain_dbi(area: FloatArray, frequency_hz: float) -> FloatArray:
    """Return the directivity 4πA/λ² of a uniformly lit aperture of `area` (m²), dBi; broadcasts."""
    return decibels(4.0 * np.pi * area * (frequency_hz / C0) ** 2)


def draw_front(
    *,
    title: str,
    x: Axis,
    y: Axis,
    meets: np.ndarray,
    recommended: Mapping[str, int],
    colour: Axis | None = None,
    aperture_hz: float | None = None,
) -> Figure:
    """Return the picture of a front of n designs.

    Parameters
    ----------
    title : str
        Free text.
    x, y : Axis
        The two goals shown, (n,) values each.
    meets : (n,) of bool
        Whether the design meets every requirement; those that do not are drawn as crosses.
    recommended : mapping of str to int
        Role to row.
    colour : Axis, optional
        A third goal, shown by colour.
    aperture_hz : float, optional
        Draws the line of the uniformly lit aperture at this frequency, Hz; `x` must be an area in
        m² and `y` a gain in dBi.
    """
    with house_style():
        figure = new_figure(7.2, 4.6, title=title)
        axes = figure.add_subplot()
        axes.set(xlabel=x.label, ylabel=y.label, xlim=x.limits(), ylim=y.limits())
        for index, (role, row) in enumerate(recommended.items()):
            mark = mark_of(role, index)
            axes.plot(
                x.values[row],
                y.values[row],
                linestyle="none",
                marker=mark.marker,
                markersize=10,
                markeredgecolor=BLACK,
                color=mark.colour,
                zorder=5,
                label=f"{role.replace('_', ' ')}: {x.values[row]:.3g} {x.unit},"
                f" {y.values[row]:.2f} {y.unit}",
            )
        if aperture_hz is not None:
            _aperture(axes, aperture_hz)
        label = "ruled out by a requirement"
        for direction, axis in (("x", x), ("y", y)):
            for sense, limit in (("min", axis.minimum), ("max", axis.maximum)):
                if limit is not None:
                    rule_out(axes, direction, sense, limit, label=label)
                    label = "_"
        _designs(figure, axes, x, y, np.asarray(meets, dtype=bool), colour)
        figure.legend(loc="outside lower left", ncols=2, columnspacing=2.0, handletextpad=0.6)
    return figure


def _aperture(axes: Axes, frequency_hz: float) -> None:
    """Draw the aperture's line, and make room for its lower end if that is within a few dB."""
    left, right = axes.get_xlim()
    bottom, top = axes.get_ylim()
    area = np.linspace(max(left, 1e-3 * right), right, 200)
    gain = aperture_gain_dbi(area, frequency_hz)
    if not bottom - _NEAR_DB < gain[0] < top + _NEAR_DB:
        return
    axes.set_ylim(min(bottom, gain[0]), max(top, gain[0] + 0.5))
    axes.plot(
        area,
        gain,
        color=GREY,
        linestyle=(0, (6, 2, 1, 2)),
        linewidth=1.2,
        zorder=1,
        label=f"uniformly lit aperture of that area, {frequency_hz / 1e6:.5g} MHz:\n"
        "no bound, small antennas can lie left of it",
    )


def _designs(
    figure: Figure, axes: Axes, x: Axis, y: Axis, meets: np.ndarray, colour: Axis | None
) -> None:
    if not meets.size:
        no_data(axes, "no design to show")
    if np.any(~meets):
        axes.plot(
            x.values[~meets],
            y.values[~meets],
            linestyle="none",
            marker="x",
            color=GREY,
            zorder=3,
            label="nearest designs, requirements not met",
        )
    if not meets.any():
        return
    painted = {"color": BLACK} if colour is None else {"c": colour.values[meets], "cmap": "cividis"}
    points = axes.scatter(
        x.values[meets],
        y.values[meets],
        s=26,
        **painted,
        edgecolors=BLACK,
        linewidths=0.5,
        zorder=4,
        label="front: no design here is better in every goal",
    )
    if colour is not None:
        figure.colorbar(points, ax=axes, label=colour.label)
