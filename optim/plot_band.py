"""The picture of the figures of merit across the band against their requirements.

One small panel a figure: frequency (MHz) against gain (dBi), beamwidths (degrees), ratios and
levels (dB relative to boresight), resistance (Ω), VSWR. What a requirement rules out is shaded; a
figure that the model cannot give, and nobody asks for, has no panel.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Final, Protocol

import numpy as np
from matplotlib.figure import Figure

from models.conventions import FloatArray
from models.figures import Figures
from optim.quantities import FIGURES, MASKS
from optim.style import house_style, mark_of, new_figure, no_data, rule_out

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["PANELS", "Bound", "draw_band"]

PANELS: Final = {
    name: (FIGURES | MASKS)[name].label.replace("(°)", "(degrees)")
    for name in (
        "gain_dbi",
        "realized_gain_dbi",
        "beamwidth_h_deg",
        "beamwidth_e_deg",
        "front_to_back_db",
        "sidelobe_db",
        "mask_h_db",
        "mask_e_db",
        "resistance_ohm",
        "vswr",
    )
}
"""What is shown, in this order, and its axis."""

_COLUMNS: Final = 3


class Bound(Protocol):
    """A requirement on one figure: least or most allowed value, in the figure's unit."""

    @property
    def figure(self) -> str:
        """Name of the figure."""

    @property
    def sense(self) -> str:
        """Either "min" or "max"."""

    @property
    def value(self) -> float:
        """The limit."""


def draw_band(
    *,
    title: str,
    frequencies_hz: FloatArray,
    figures: Figures,
    names: Sequence[str],
    bounds: Sequence[Bound] = (),
) -> Figure:
    """Return the picture of n designs across the band.

    Parameters
    ----------
    title : str
        Free text.
    frequencies_hz : (n_freq,)
        Hz, ascending.
    figures : Figures
        (n, n_freq).
    names : sequence of str, n
        What each design is called; roles keep their colours.
    bounds : sequence of Bound
        Requirements; those on other things than figures are passed over.
    """
    asked = {bound.figure for bound in bounds}
    shown = [p for p in PANELS if p in asked or np.isfinite(getattr(figures, p)).any()]
    rows = max(-(-len(shown) // _COLUMNS), 1)
    with house_style():
        figure = new_figure(7.6, 0.9 + 1.95 * rows, title=title)
        panels = figure.subplots(rows, _COLUMNS, sharex=True, squeeze=False).ravel()
        for axes, name in zip(panels, shown, strict=False):
            _panel(
                axes,
                label=PANELS[name],
                mhz=frequencies_hz / 1e6,
                values=getattr(figures, name),
                names=names,
                bounds=[bound for bound in bounds if bound.figure == name],
            )
        for axes in panels[len(shown) :]:
            axes.remove()
        for axes in panels[max(len(shown) - _COLUMNS, 0) : len(shown)]:
            axes.set_xlabel("frequency (MHz)")
            axes.tick_params(labelbottom=True)
        handles = {
            label: handle
            for axes in panels[: len(shown)]
            for handle, label in zip(*axes.get_legend_handles_labels(), strict=True)
        }
        if handles:
            figure.legend(
                list(handles.values()),
                list(handles),
                loc="outside lower left",
                ncols=4,
                handlelength=3.2,
            )
    return figure


def _panel(
    axes: Axes,
    *,
    label: str,
    mhz: FloatArray,
    values: FloatArray,
    names: Sequence[str],
    bounds: Sequence[Bound],
) -> None:
    axes.set_title(label)
    for index, (name, row) in enumerate(zip(names, values, strict=True)):
        mark = mark_of(name, index)
        axes.plot(
            mhz,
            np.where(np.isfinite(row), row, np.nan),
            color=mark.colour,
            linestyle=mark.dashes,
            marker=mark.marker,
            markersize=4,
            markevery=max((mhz.size - 1) // 4, 1),
            label=name.replace("_", " "),
        )
    seen = values[np.isfinite(values)]
    if not seen.size:
        no_data(axes, "not given\nby this model")
    limits = [bound.value for bound in bounds]
    everything = np.concatenate([seen, limits]) if limits else seen
    if everything.size:
        low, high = float(everything.min()), float(everything.max())
        # A flat curve gets an axis of its own size, not one of rounding noise.
        air = max(0.12 * (high - low), 0.02 * max(abs(low), abs(high)), 0.1)
        axes.set_ylim(low - air, high + air)
    if mhz.size > 1:
        axes.set_xlim(mhz[0], mhz[-1])
    axes.locator_params(axis="x", nbins=4)
    axes.locator_params(axis="y", nbins=5)
    for bound in bounds:
        rule_out(axes, "y", bound.sense, bound.value, label="ruled out by a requirement")
