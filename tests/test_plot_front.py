"""The front's picture shows every design where its numbers say, and an honest aperture line."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.figure import Figure

from models.conventions import C0
from optim.plot_front import Axis, aperture_gain_dbi, draw_front
from tests.picture_checks import assert_readable, words_of


def _front(count: int = 12, **extra: object) -> Figure:
    area = np.linspace(0.08, 0.2, count)
    arguments: dict[str, object] = {
        "title": "Reading gate",
        "x": Axis(label="frontal area (m²)", unit="m²", values=area, maximum=0.18),
        "y": Axis(
            label="gain, worst in the band (dBi)",
            unit="dBi",
            values=9.0 + 20.0 * area,
            minimum=10.5,
        ),
        "meets": area < 0.18,
        "recommended": {"smallest": 0, "balanced": 3, "most_margin": 7} if count else {},
        "aperture_hz": 868e6,
    }
    return draw_front(**(arguments | extra))  # type: ignore[arg-type]


def test_uniform_aperture_of_a_square_wavelength() -> None:
    # D = 4πA/λ² (Balanis, Antenna Theory, eq. 12-37): 4π = 10.992 dB at A = λ².
    assert float(aperture_gain_dbi(np.array(1.0), C0)) == pytest.approx(10.992, abs=1e-3)
    assert float(aperture_gain_dbi(np.array(0.25), 2.0 * C0)) == pytest.approx(10.992, abs=1e-3)


def test_aperture_line_is_drawn_for_its_frequency() -> None:
    axes = _front().axes[0]
    (line,) = [ln for ln in axes.lines if "868 MHz" in str(ln.get_label())]
    area, gain = np.asarray(line.get_xdata()), np.asarray(line.get_ydata())
    wavelength = C0 / 868e6
    np.testing.assert_allclose(10.0 ** (gain / 10.0) * wavelength**2 / (4.0 * np.pi), area)


def test_a_far_aperture_line_is_left_out_and_a_near_one_is_in_view() -> None:
    def line_of(frequency_hz: float) -> tuple[bool, bool]:
        axes = _front(aperture_hz=frequency_hz).axes[0]
        found = [ln for ln in axes.lines if "uniformly" in str(ln.get_label())]
        low, high = axes.get_ylim()
        gains = [g for ln in found for g in np.asarray(ln.get_ydata(), dtype=np.float64)]
        return bool(found), any(low < g < high for g in gains)

    assert line_of(868e6) == (True, True)
    assert line_of(5e9) == (False, False)


def test_roles_stand_on_their_designs_and_are_named() -> None:
    figure = _front()
    area = np.linspace(0.08, 0.2, 12)
    for role, row in (("smallest", 0), ("balanced", 3), ("most margin", 7)):
        (mark,) = [ln for ln in figure.axes[0].lines if str(ln.get_label()).startswith(role)]
        assert np.asarray(mark.get_xdata()).item() == pytest.approx(area[row])
        assert any(w.text.startswith(role) for w in words_of(figure))


def test_designs_that_fail_are_told_apart() -> None:
    axes = _front().axes[0]
    (crosses,) = [ln for ln in axes.lines if "not met" in str(ln.get_label())]
    assert np.asarray(crosses.get_xdata()).size == np.sum(np.linspace(0.08, 0.2, 12) >= 0.18)


@pytest.mark.parametrize(
    "figure",
    [
        _front,
        lambda: _front(count=0),
        lambda: _front(count=1, recommended={"smallest": 0}),
        lambda: _front(meets=np.zeros(12, dtype=bool), recommended={}),
        lambda: _front(colour=Axis(label="mass (kg)", unit="kg", values=np.linspace(1, 2, 12))),
    ],
)
def test_readable(figure: object) -> None:
    assert callable(figure)
    assert_readable(figure())


def test_axes_carry_their_units() -> None:
    axes = _front().axes[0]
    assert "(m²)" in axes.get_xlabel()
    assert "(dBi)" in axes.get_ylabel()
