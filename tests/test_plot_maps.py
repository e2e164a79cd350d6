"""Map pictures: readable, units on the axes, hatched where ruled out, free text harmless."""

from __future__ import annotations

import numpy as np

from models import Figures
from optim.plot_maps import draw_map, in_file_units
from optim.requirements import Limit
from optim.trade_maps import Map
from tests.picture_checks import assert_readable, words_of

NAMES = ("gain_dbi", "beamwidth_h_deg", "beamwidth_e_deg", "front_to_back_db", "vswr")
LIMITS = (
    Limit("gain_dbi", "gain_dbi", "min", 10.0, "gain_dbi.min"),
    Limit("width_mm", "width", "max", 500.0, "width_mm.max"),
    Limit("resistance_ohm", "resistance_ohm", "min", 10.0, "resistance_ohm.min"),
)


def chart(*, met: bool = False) -> Map:
    x, y = np.linspace(0.1, 0.25, 9), np.radians(np.linspace(50.0, 130.0, 9))
    u, v = np.meshgrid(np.linspace(-1.0, 1.0, 9), np.linspace(-1.0, 1.0, 9))
    gain = 11.0 - u**2 - 2.0 * v**2
    none = np.full((9, 9), np.nan)
    margins = np.stack([gain - 10.0, -300.0 * v, np.full((9, 9), 5.0)], axis=2)
    margins = np.abs(margins) if met else margins
    worst = dict.fromkeys(Figures.names(), none) | dict.fromkeys(NAMES, gain)
    worst["resistance_ohm"] = gain
    return Map(
        across="spacing",
        upwards="apex_angle",
        x=x,
        y=y,
        at=np.array([y[4], x[8], 0.35, 0.45, 0.163]),
        worst=worst,
        frontal_area=0.2 + 0.05 * v,
        margins=margins,
        violations=-margins,
    )


def test_readable_with_units_and_provenance() -> None:
    figure = draw_map(
        title='$\\frac{a}{b}$ <script>alert("x")</script> \x07 ' + "long " * 60,
        chart=chart(),
        limits=LIMITS,
        name="most_margin",
        model="moment",
        frequencies_hz=np.array([863e6, 866e6, 870e6]),
    )
    assert_readable(figure)
    words = " ".join(w.text for w in words_of(figure))
    for expected in (
        "spacing (mm)",
        "apex angle (degrees)",
        "gain (dBi)",
        "frontal area (m²)",
        "by moment",
        "863 to 870 MHz",
        "most margin; held: plate width 350 mm",
    ):
        assert expected in words
    # Resistance rules nothing out here and is none of the figures always shown.
    assert "input resistance" not in words


def test_hatched_where_its_own_requirement_rules_out() -> None:
    figure = draw_map(
        title="",
        chart=chart(),
        limits=LIMITS,
        name="smallest",
        model="ray",
        frequencies_hz=np.array([866e6]),
    )
    counts = {axes.get_title(loc="left"): len(axes.collections) for axes in figure.axes}
    # Shade and border everywhere; hatch and line where the panel has a requirement.
    assert counts["gain (dBi)"] == counts["VSWR"] + 2
    assert counts["frontal area (m²), caps"] == counts["VSWR"] + 2


def test_nothing_hatched_where_all_is_met() -> None:
    figure = draw_map(
        title="",
        chart=chart(met=True),
        limits=LIMITS,
        name="smallest",
        model="ray",
        frequencies_hz=np.array([866e6]),
    )
    drawn = [len(axes.collections) for axes in figure.axes if axes.get_title(loc="left")]
    assert drawn == [1] * len(drawn)


def test_units_of_files() -> None:
    assert in_file_units("apex_angle", np.array([np.pi])).tolist() == [180.0]
    assert in_file_units("spacing", np.array([0.125])).tolist() == [125.0]
