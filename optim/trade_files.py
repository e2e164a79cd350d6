"""The outcome of a trade study in words and files: pictures, and a CSV of everything drawn.

Numbers are in the files' units; a figure that is missing is an empty cell.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import SupportsFloat

import numpy as np

from models import Figures
from optim.margins import SIZES
from optim.plot_band import draw_band
from optim.plot_maps import draw_map, in_file_units
from optim.plot_prices import draw_prices
from optim.quantities import FIGURES
from optim.quantities import SIZES as ABOUT
from optim.style import save
from optim.tables import aligned
from optim.trade import Trade
from optim.trade_maps import Map
from optim.trade_prices import STEPS, Price
from optim.units import FILE_KEYS, VARIABLES, to_file

__all__ = ["page", "write"]


def write(folder: Path, found: Trade) -> list[str]:
    """Write pictures, tables and text into `folder`, made if need be; return the files' names.

    Raises
    ------
    OSError
        Where something cannot be written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    title, size = found.requirements.title, found.size.name
    pictures = {
        "prices": draw_prices(
            title=title,
            found=found.prices,
            size=f"{size.replace('_', ' ')} ({ABOUT[size].unit})",
            unit=SIZES[size],
            model=found.model,
        ),
        "band": draw_band(
            title=f"{title} (by {found.model})",
            frequencies_hz=found.band,
            figures=found.curves,
            names=list(found.shown),
            bounds=found.requirements.limits,
        ),
    }
    tables = {"prices": _price_lines(found), "band": _band_lines(found)}
    for chart in found.maps:
        name = f"map_{chart.across}_{chart.upwards}"
        pictures[name] = draw_map(
            title=title,
            chart=chart,
            limits=found.requirements.limits,
            name=found.through,
            model=found.model,
            frequencies_hz=found.frequencies,
        )
        tables[name] = _map_lines(chart)
    for name, picture in pictures.items():
        save(picture, folder / f"{name}.png")
    for name, lines in tables.items():
        with (folder / f"{name}.csv").open("w", encoding="utf-8", newline="") as stream:
            csv.writer(stream, lineterminator="\n").writerows(lines)
    (folder / "trade.txt").write_text(page(found) + "\n", encoding="utf-8")
    return ["trade.txt", *(f"{n}.png" for n in pictures), *(f"{n}.csv" for n in tables)]


def page(found: Trade) -> str:
    """Return a page of plain text: what each requirement costs, and who judged."""
    return "\n".join(_words(found))


def _words(found: Trade) -> Iterator[str]:
    size, unit = found.size.name.replace("_", " "), ABOUT[found.size.name].unit
    scale = SIZES[found.size.name]
    yield found.requirements.title
    yield ""
    known = [price for price in found.prices if math.isfinite(price.asked)]
    if known:
        yield f"Smallest {size} that meets everything: {known[0].asked / scale:.4g} {unit}."
        yield from _headline(known, size)
        yield f"The maps go through the design called {found.through.replace('_', ' ')}."
    else:
        yield "No design was found that meets everything; the maps go through the nearest one."
        for price in found.prices:
            if math.isfinite(price.at(-1.0)):
                yield f"With {price.limit.label} eased to {price.value(-1.0):.4g} there is one."
            elif math.isfinite(price.dropped):
                yield f"Without {price.limit.label} there is one."
    yield ""
    yield f"Change of the {size} as one requirement is moved by its step, the others kept:"
    yield from _table(found.prices, scale, unit)
    yield ""
    low, high = found.frequencies[0] / 1e6, found.frequencies[-1] / 1e6
    yield (
        f"Judged by {found.model} at {found.frequencies.size} frequencies from {low:g} to "
        f"{high:g} MHz, {found.judged} designs. The sizes are those of the"
    )
    yield (
        "smallest designs that short searches came upon: upper bounds, to be proven by a search\n"
        "before anything is built."
    )


def _headline(known: Sequence[Price], size: str) -> Iterator[str]:
    first = known[0]
    if not first.change(-1.0) < 0.0:
        yield "No requirement, eased alone by its step, makes it smaller."
        return
    yield (
        f"{first.limit.label} = {first.limit.value:g} costs most: easing it to "
        f"{first.value(-1.0):.4g} changes the {size} by {100.0 * first.change(-1.0):+.1f} %."
    )


def _table(found: Sequence[Price], scale: float, unit: str) -> list[str]:
    lines = [
        ["requirement", "asked", "step", "eased", "half", "half harder", "harder", f"none, {unit}"]
    ]
    lines += [
        [
            price.limit.label,
            "envelope" if price.limit.key.startswith("mask") else f"{price.limit.value:g}",
            f"{price.step:.3g}",
            *(_change(price, steps) for steps in STEPS if steps),
            f"{price.dropped / scale:.4g}" if math.isfinite(price.dropped) else "not found",
        ]
        for price in found
    ]
    return aligned(lines)


def _change(price: Price, steps: float) -> str:
    """Return a change of size in percent, or what there is to say instead."""
    if math.isfinite(price.change(steps)):
        return f"{100.0 * price.change(steps) + 0.0:+.1f} %"
    if math.isfinite(price.at(steps)):
        return "a design"
    return "none found" if np.isclose(price.values, price.value(steps)).any() else "-"


def _price_lines(found: Trade) -> Iterator[list[object]]:
    size, unit = found.size.name, SIZES[found.size.name]
    yield ["requirement", "value", "asked", f"smallest_{size}", "model"]
    for price in found.prices:
        for value, smallest in zip(price.values, price.sizes, strict=True):
            asked = int(value == price.limit.value)
            yield [price.limit.label, _cell(value), asked, _cell(smallest / unit), found.model]
        yield [price.limit.label, "", 0, _cell(price.dropped / unit), found.model]


def _band_lines(found: Trade) -> Iterator[list[object]]:
    yield ["design", *FILE_KEYS.values(), "frequency_mhz", *FIGURES, "model"]
    for place, (name, design) in enumerate(found.shown.items()):
        dimensions = [to_file(v, float(x)) for v, x in zip(VARIABLES, design, strict=True)]
        for column, frequency in enumerate(found.band):
            values = (getattr(found.curves, figure)[place, column] for figure in FIGURES)
            yield [name, *dimensions, frequency / 1e6, *map(_cell, values), found.model]


def _map_lines(chart: Map) -> Iterator[list[object]]:
    names = [name for name in Figures.names() if name in FIGURES]
    yield [
        FILE_KEYS[chart.across],
        FILE_KEYS[chart.upwards],
        *names,
        "frontal_area_m2",
        "smallest_margin",
        "meets",
    ]
    x, y = in_file_units(chart.across, chart.x), in_file_units(chart.upwards, chart.y)
    for row, column in np.ndindex(y.size, x.size):
        figures = (float(chart.worst[name][row, column]) for name in names)
        margin = float(chart.smallest_margin[row, column])
        yield [
            _cell(x[column]),
            _cell(y[row]),
            *map(_cell, figures),
            _cell(chart.frontal_area[row, column]),
            _cell(margin),
            int(margin >= 0.0),
        ]


def _cell(value: SupportsFloat) -> str:
    value = float(value)
    return f"{value:.6g}" if math.isfinite(value) else ""
