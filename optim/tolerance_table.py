"""What tolerances do to recommended designs, as lines of text and as an object of summary.json.

Yields are shares of the antennas built, 0 to 1; tolerances are in the files' units.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optim.requirements import Requirements
from optim.tolerance import Spread
from optim.units import FILE_KEYS, to_file

__all__ = ["spread_object", "spread_rows", "spread_words"]


def spread_object(spread: Spread) -> dict[str, Any]:
    """Return a spread as the object of summary.json."""
    return {
        "yield": spread.expected,
        "yield_low": spread.low,
        "yield_high": spread.high,
        "method": spread.method,
        "samples": spread.samples,
        "matters_most": FILE_KEYS[spread.matters_most],
        "dimensions": {
            FILE_KEYS[name]: {
                "plus_minus": to_file(name, influence.plus_minus),
                "share_of_spread": influence.share,
                "yield_if_exact": influence.yield_if_exact,
            }
            for name, influence in spread.influences.items()
        },
    }


def spread_rows(spreads: Mapping[str, Spread], asked: Requirements) -> Iterator[list[str]]:
    """Yield the rows of a table, one column a design: first cell its key, second what is asked."""
    least = "" if asked.min_yield is None else f"min {asked.min_yield:g}"
    yield ["yield", least, *(f"{spread.expected:.3f}" for spread in spreads.values())]
    between = [f"{spread.low:.3f} to {spread.high:.3f}" for spread in spreads.values()]
    yield ["  between", "", *between]
    for name, key in FILE_KEYS.items():
        if asked.tolerance.get(name, 0.0) > 0.0:
            cells = [
                f"{spread.influences[name].yield_if_exact:.3f}"
                + ("*" if name == spread.matters_most else "")
                for spread in spreads.values()
            ]
            yield [f"  {key} exact", f"± {to_file(name, asked.tolerance[name]):g}", *cells]


def spread_words(spreads: Mapping[str, Spread], model: str) -> Iterator[str]:
    """Yield the lines that explain the rows."""
    samples = next(iter(spreads.values())).samples
    yield "Yield: share of the antennas built that meet everything, deviations uniform in ±; from"
    yield f"{samples} solves a design by {model} at the band's points. Exact: the yield if that"
    yield "dimension were held exactly; * marks the one that moves the smallest margin most."
