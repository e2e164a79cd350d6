"""The same data gives the same bytes, whatever the user's settings; free text is text."""

from __future__ import annotations

from pathlib import Path

import matplotlib as mpl
import numpy as np
import pytest
from matplotlib.figure import Figure

from optim.style import MARKS, house_style, mark_of, new_figure, plain, rule_out, save, text_width
from tests.picture_checks import assert_readable, words_of


def _picture(title: str = "A picture") -> Figure:
    with house_style():
        figure = new_figure(4.0, 3.0, title=title)
        axes = figure.add_subplot()
        axes.plot([0.0, 1.0], [0.0, 2.0], label="line")
        axes.legend()
    return figure


@pytest.mark.parametrize("suffix", [".png", ".svg"])
def test_same_picture_same_bytes(tmp_path: Path, suffix: str) -> None:
    save(_picture(), tmp_path / f"a{suffix}")
    with mpl.rc_context({"font.size": 20.0, "svg.hashsalt": None, "axes.grid": False}):
        save(_picture(), tmp_path / f"b{suffix}")
    first = (tmp_path / f"a{suffix}").read_bytes()
    assert first == (tmp_path / f"b{suffix}").read_bytes()
    assert first.startswith(b"\x89PNG" if suffix == ".png" else b"<?xml")


def test_other_suffix_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match=r"'\.pdf' given, allowed: \.png, \.svg"):
        save(_picture(), tmp_path / "a.pdf")


def test_the_users_settings_are_left_alone() -> None:
    before = dict(mpl.rcParams)
    _picture()
    assert dict(mpl.rcParams) == before


def test_letters_that_the_type_does_not_have_are_no_trouble(tmp_path: Path) -> None:
    save(_picture("東京 \N{TELEVISION}"), tmp_path / "a.png")  # warnings are errors here
    assert (tmp_path / "a.png").stat().st_size > 0


def test_free_text_is_shown_as_it_stands() -> None:
    figure = _picture("Cost $5 to $9, 100 % \\alpha {x}_2 & <b>")
    assert "Cost $5 to $9, 100 % \\alpha {x}_2 & <b>" in {w.text for w in words_of(figure)}
    assert_readable(figure)


def test_long_text_is_broken_and_cut() -> None:
    for text in ("word " * 100, "x" * 300, "W" * 300, "i" * 900):
        lines = plain(text, width=60.0).splitlines()
        assert len(lines) == 2
        assert 45.0 < max(map(text_width, lines)) <= 60.0
        assert lines[-1].endswith("…")


def test_control_characters_become_blanks() -> None:
    assert plain("a\x07b\nc", width=60.0) == "a b c"
    assert plain(" \n ", width=60.0) == ""


def test_a_very_long_title_stays_on_the_picture() -> None:
    assert_readable(_picture("W" * 400))


def test_roles_keep_their_marks() -> None:
    assert mark_of("most_margin", 0) == mark_of("most_margin", 5) == MARKS[2]
    assert len({(m.colour, m.marker) for m in MARKS}) == len(MARKS)


@pytest.mark.parametrize(
    ("sense", "value", "expected"),
    [("min", 0.5, (0.0, 0.5)), ("max", 0.5, (0.5, 2.0)), ("min", 3.0, (0.0, 3.0))],
)
def test_what_is_ruled_out_is_on_the_wrong_side(
    sense: str, value: float, expected: tuple[float, float]
) -> None:
    with house_style():
        axes = new_figure(3.0, 3.0).add_subplot()
        axes.set_ylim(0.0, 2.0)
        rule_out(axes, "y", sense, value, label="ruled out")
    (shade,) = axes.patches
    extent = shade.get_path().vertices
    y = np.asarray(shade.get_patch_transform().transform(extent))[:, 1]
    assert (y.min(), y.max()) == pytest.approx(expected)
