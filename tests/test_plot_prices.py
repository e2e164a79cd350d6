"""Price pictures: readable, easier to the left, what was not found said."""

from __future__ import annotations

import numpy as np
import pytest

from optim.plot_prices import draw_prices, words_of
from optim.requirements import Limit
from optim.trade_prices import Price
from tests.picture_checks import assert_readable
from tests.picture_checks import words_of as drawn_words

GAIN = Limit("gain_dbi", "gain_dbi", "min", 11.0, "gain_dbi.min")
BEAM = Limit("beamwidth_h_deg", "beamwidth_h_deg", "max", 60.0, "beamwidth_h_deg.max")
WIDTH = Limit("width_mm", "width", "max", 500.0, "width_mm.max")
WIND = Limit("wind_load_n", "wind_load", "max", 300.0, "wind_load_n.max")


def price(limit: Limit, values: list[float], sizes: list[float], dropped: float) -> Price:
    return Price(
        limit=limit, step=1.0, values=np.array(values), sizes=np.array(sizes), dropped=dropped
    )


FOUND = [
    price(GAIN, [10, 10.5, 11, 11.5, 12], [0.12, 0.15, 0.17, 0.21, np.nan], 0.1),
    price(BEAM, [70, 65, 60, 55, 50], [0.17, 0.17, 0.17, 0.18, 0.2], 0.17),
    *(price(limit, [3, 2, 1], [0.17] * 3, 0.17) for limit in [WIDTH, WIND] * 6),
]


@pytest.mark.parametrize("found", [FOUND, [], FOUND[:1] * 12])
def test_readable(found: list[Price]) -> None:
    title = "$x^2$ & <b>" + "W" * 200
    figure = draw_prices(title=title, found=found, size="frontal area (m²)", unit=1.0, model="ray")
    assert_readable(figure)


def test_what_is_drawn() -> None:
    figure = draw_prices(
        title="Prices", found=FOUND, size="longest side (mm)", unit=1e-3, model="ray"
    )
    gain, beam = figure.axes
    assert gain.get_title(loc="left") == "gain (dBi) at least"
    assert beam.get_xlim()[0] > beam.get_xlim()[1]
    assert np.asarray(gain.lines[0].get_ydata())[0] == pytest.approx(120.0)
    words = " ".join(w.text for w in drawn_words(figure))
    assert "no design found" in words
    assert "No effect within a step: width (mm) at most; wind load (N) at most" in words
    assert "judged by ray" in words


def test_words_of_limits() -> None:
    assert words_of(WIND) == "wind load (N) at most"
    assert words_of(BEAM) == "H-plane beamwidth (°) at most"
    assert words_of(Limit("frontal_area_m2", "frontal_area", "max", 1.0, "")) == (
        "frontal area (m²) at most"
    )
