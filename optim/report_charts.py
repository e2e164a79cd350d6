"""The report's pictures as declarations: front, cuts, band curves, models compared, the search.

Interactive ones name data sets that the page's script fills (`designs`, `limits`, `cut`, `band`);
the others carry their data and become SVG. Levels in dB relative to boresight, angles in degrees
off boresight, frequencies in MHz. Colours and dashes are those of `optim.style`.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from functools import cache
from typing import Any, Final

import altair as alt
import numpy as np
import vl_convert

from optim.history import Course
from optim.quantities import minus
from optim.style import BLACK, GREY, MARKS

__all__ = [
    "as_svg",
    "band_chart",
    "course_chart",
    "cut_chart",
    "difference_chart",
    "front_chart",
    "polar_chart",
    "role_cuts_chart",
]

Spec = dict[str, Any]
Rows = Sequence[Mapping[str, Any]]
Envelope = Sequence[tuple[float, float]]

FLOOR_DB: Final = -40.0
"""Level at the foot of the cuts and in the middle of the polar pictures."""

GRAMMAR: Final = "6.4"
"""Version of the grammar that Altair writes."""

HALF_POWER_DB: Final = -3.0103

SERIES: Final = ["shown", "held"]
"""Series of the interactive cuts and curves."""

_DASHES: Final[dict[str, Any]] = {"-": [1, 0], "--": [6, 3], "-.": [6, 3, 1.5, 3], ":": [1.5, 2.5]}
_SHAPES: Final = ["square", "diamond", "triangle-up", "triangle-down", "cross", "circle"]
_LEVELS: Final[dict[str, Any]] = {"domain": [FLOOR_DB, 3.0], "clamp": True, "nice": False}
_LIMIT: Final = "#a34a1f"
_EDGES: Final[tuple[dict[str, Any], ...]] = ({"stroke": "white", "strokeWidth": 4}, {})
"""Edges of words that stand among points: first the white, then the word on it."""


def _finished(chart: Any, data: Mapping[str, Rows] | None = None, **size: Any) -> Spec:
    """Return the specification with the look that all pictures share, and the `data` it names."""
    font = "system-ui, 'DejaVu Sans', sans-serif"
    chart = (
        chart.properties(**size)
        .configure(font=font, background="white", padding=4)
        .configure_view(stroke="#767676")
        .configure_axis(
            gridColor="#e3e3e3",
            labelColor=BLACK,
            titleColor=BLACK,
            titleFontWeight="normal",
            labelFontSize=11,
            titleFontSize=12,
            domainColor="#767676",
            tickColor="#767676",
        )
        .configure_legend(labelFontSize=11, titleFontSize=12, labelColor=BLACK)
        .configure_title(fontSize=12, anchor="start", color=BLACK)
    )
    spec: Spec = chart.to_dict(validate=False)
    spec["datasets"] = {name: [dict(row) for row in rows] for name, rows in (data or {}).items()}
    return spec


def _titled(spec: Spec, title: str, data: Mapping[str, Rows]) -> Spec:
    """Return a specification with a title, and with more data."""
    return {**spec, "title": title, "datasets": {**spec["datasets"], **data}}


def _named(name: str) -> alt.Chart:
    """Return a picture of a data set that comes beside it, or from the page's script."""
    return alt.Chart(alt.NamedData(name))


def as_svg(spec: Spec, *, label: str, prefix: str) -> str:
    """Return a picture that carries its data as SVG, ids starting with `prefix`.

    Parameters
    ----------
    label : str
        What a reader who cannot see it is told; free of user's text.
    """
    svg: str = vl_convert.vegalite_to_svg(spec, vl_version=GRAMMAR)
    # The renderer numbers its clips on and on; here they start anew in every picture.
    names = dict.fromkeys(re.findall(r'id="(\w+)"', svg))
    for place, name in enumerate(names):
        svg = re.sub(rf'(id="|url\(#){name}\b', rf"\g<1>{prefix}-{place}", svg)
    return svg.replace("<svg ", f'<svg role="img" aria-label="{label}" ', 1)


def front_chart(across: str, upwards: str, colour: str) -> Spec:
    """Return the picture of all designs; keys of quantities are signals and can be changed."""
    axes = {"across": across, "upwards": upwards, "painted": colour}
    parameters = [alt.param(name=name, value=key) for name, key in axes.items()]
    words = [alt.param(name=f"{name}_words", value="") for name in ("across", "upwards")]
    picked = alt.param(name="picked", value=0)
    designs = (
        _named("designs")
        .transform_calculate(
            x="datum[across]",
            y="datum[upwards]",
            c="datum[painted]",
        )
        .transform_filter("isValid(datum.x) && isValid(datum.y)")
    )
    scale = alt.Scale(zero=False, nice=False, padding=26)
    x = alt.X("x:Q", title=None, scale=scale, axis=alt.Axis(tickCount=8, labelOverlap=True))
    y = alt.Y("y:Q", title=None, scale=scale)
    colours = alt.Color(
        "c:Q",
        scale=alt.Scale(scheme="cividis"),
        legend=alt.Legend(title=None, orient="bottom", gradientLength=110),
    )
    click = alt.selection_point(name="choice", fields=["id"], nearest=True, on="click", empty=False)
    brush = alt.selection_interval(name="brush", encodings=["x", "y"])
    points = (
        designs.mark_point(filled=True, size=60, stroke=BLACK, strokeWidth=0.6, opacity=1.0)
        .encode(
            x=x,
            y=y,
            color=colours,
            tooltip=[alt.Tooltip("id:Q", title="design"), alt.Tooltip("x:Q"), alt.Tooltip("y:Q")],
        )
        .add_params(click)
        .properties(name="points")
    )
    roles = designs.transform_filter("datum.role != ''")
    marks = roles.mark_point(filled=False, size=190, stroke=BLACK, strokeWidth=1.8).encode(
        x=x,
        y=y,
        shape=alt.Shape(
            "order:N", scale=alt.Scale(domain=list(range(6)), range=_SHAPES), legend=None
        ),
    )
    # Neighbours on the front often both have a role: their names stand at different heights,
    # each on a white edge that keeps it apart from the points.
    names = [
        roles.transform_filter(f"datum.order % 3 == {order}")
        .mark_text(dy=dy, fontSize=12, fontWeight="bold", **edge)
        .encode(x=x, y=y, text=alt.Text("role:N"))
        for order, dy in enumerate((-16, 22, -32))
        for edge in _EDGES
    ]
    ring = (
        designs.transform_filter("datum.id == picked")
        .mark_point(filled=False, size=420, stroke=MARKS[1].colour, strokeWidth=3.0)
        .encode(x=x, y=y)
    )
    chart = alt.layer(
        *(_limit_lines(direction) for direction in ("across", "upwards")),
        # The brush belongs to a layer of its own, below the points.
        designs.mark_point(opacity=0.0).encode(x=x, y=y).add_params(brush).properties(name="box"),
        points,
        marks,
        ring,
        *names,
        _words("across_words", x="width", y={"expr": "height + 38"}, align="right"),
        _words("upwards_words", x=0, y=-10, align="left"),
    ).add_params(*parameters, *words, picked)
    return _finished(chart, {"one": [{}]}, width="container", height=340)


def _words(parameter: str, *, x: Any, y: Any, align: Any) -> Any:
    """Return a title of an axis that follows a parameter."""
    return (
        _named("one")
        .mark_text(align=align, fontSize=12, color=BLACK)
        .encode(
            x=alt.value(x) if not isinstance(x, dict) else alt.value(alt.expr(x["expr"])),
            y=alt.value(y) if not isinstance(y, dict) else alt.value(alt.expr(y["expr"])),
            text=alt.value(alt.expr(parameter)),
        )
    )


def _limit_lines(direction: str) -> Any:
    """Return the lines of what is asked for on the quantity that an axis shows."""
    lines = _named("limits").transform_filter(f"datum.key == {direction}")
    channel: Any = alt.X if direction == "across" else alt.Y
    name = "x" if direction == "across" else "y"
    place = {name: channel("value:Q", title=None)}
    word: dict[str, Any] = (
        {"angle": 270, "align": "left", "dy": -4, "dx": 4, "y": "height"}
        if name == "x"
        else {"align": "right", "dy": -5, "x": "width"}
    )
    return alt.layer(
        lines.mark_rule(color=_LIMIT, strokeDash=[7, 3]).encode(**place),
        lines.mark_text(color=_LIMIT, fontSize=11, **word).encode(**place, text="words:N"),
    )


def _series(domain: Sequence[str]) -> dict[str, Any]:
    marks = MARKS[: len(domain)]
    return {
        "color": alt.Color(
            "series:N",
            sort=list(domain),
            scale=alt.Scale(domain=list(domain), range=[m.colour for m in marks]),
            legend=None,
        ),
        "strokeDash": alt.StrokeDash(
            "series:N",
            scale=alt.Scale(domain=list(domain), range=[_DASHES[m.dashes] for m in marks]),
            legend=None,
        ),
    }


def cut_chart(plane: str, envelope: Envelope | None) -> Spec:
    """Return the rectangular picture of one cut; `envelope` in degrees and dB."""
    flat = _finished_flat(tuple(SERIES), bool(envelope), width="container", height=210)
    return _titled(flat, f"{plane}-plane", _beside(envelope))


@cache
def _finished_flat(domain: tuple[str, ...], enveloped: bool, **size: Any) -> Spec:  # noqa: FBT001
    return _finished(_flat(domain, enveloped=enveloped), **size)


def _beside(envelope: Envelope | None) -> dict[str, Rows]:
    """Return the data that stands beside the cuts: half power, and the envelope's corners."""
    corners = [{"angle": angle, "level": max(level, FLOOR_DB)} for angle, level in envelope or ()]
    return {"half": [{"level": HALF_POWER_DB}], "envelope": corners}


def _flat(domain: Sequence[str], *, enveloped: bool) -> Any:
    x = alt.X(
        "angle:Q",
        title="degrees off boresight",
        scale=alt.Scale(domain=[0, 180], nice=False),
        axis=alt.Axis(values=list(range(0, 181, 30))),
    )
    y = alt.Y("level:Q", title="dB", scale=alt.Scale(**_LEVELS))
    lines = _named("cut").mark_line(strokeWidth=2, clip=True).encode(x=x, y=y, **_series(domain))
    half = _named("half").mark_rule(color=GREY, strokeDash=[2, 2]).encode(y=y)
    layers = [half, lines]
    if enveloped:
        # Straight between its points, as the requirement is judged.
        layers.append(_named("envelope").mark_line(color=_LIMIT, strokeWidth=1.6).encode(x=x, y=y))
    return alt.layer(*layers)


def polar_chart(plane: str) -> Spec:
    """Return the polar picture of one cut, boresight upwards."""
    return _titled(_polar(), f"{plane}-plane", {})


@cache
def _polar() -> Spec:
    radius, angle = f"clamp(1 - datum.level / {FLOOR_DB}, 0, 1.05)", "datum.angle * PI / 180"
    x = alt.X("x:Q", axis=None, scale=alt.Scale(domain=[-1.12, 1.12], nice=False))
    y = alt.Y("y:Q", axis=None, scale=alt.Scale(domain=[-1.12, 1.12], nice=False))
    line = (
        _named("cut")
        .transform_calculate(r=radius, a=angle)
        .transform_calculate(x="datum.r * sin(datum.a)", y="datum.r * cos(datum.a)")
        .mark_line(strokeWidth=2)
        .encode(x=x, y=y, order="angle:Q", **_series(SERIES))
    )
    chart = alt.layer(
        _named("rings")
        .mark_line(color="#d0d0d0", strokeWidth=1)
        .encode(x=x, y=y, order="at:Q", detail="ring:N"),
        _named("spokes").mark_rule(color="#e3e3e3").encode(x=x, y=y, x2="x2:Q", y2="y2:Q"),
        line,
        _named("degrees").mark_text(fontSize=10, color=BLACK).encode(x=x, y=y, text="words:N"),
        _named("levels").mark_text(fontSize=10, color=GREY, dx=12).encode(x=x, y=y, text="words:N"),
    )
    spec = _finished(chart, _web(), width=250, height=250)
    spec["config"]["view"] = {"stroke": None}
    return spec


def _web() -> dict[str, Rows]:
    """Return rings every 10 dB and spokes every 30° of the polar pictures, with their words."""

    def place(turn: float, radius: float, **more: Any) -> dict[str, Any]:
        x, y = np.sin(np.radians(turn)), np.cos(np.radians(turn))
        return {"x": round(radius * float(x), 4), "y": round(radius * float(y), 4), **more}

    radii = {level: 1.0 - level / FLOOR_DB for level in (0.0, -10.0, -20.0, -30.0)}
    return {
        "rings": [
            place(turn, radius, at=turn, ring=level)
            for level, radius in radii.items()
            for turn in range(0, 361, 6)
        ],
        "spokes": [place(turn, 1.0, x2=0.0, y2=0.0) for turn in range(0, 360, 30)],
        "degrees": [place(t, 1.09, words=f"{min(t, 360 - t)}°") for t in range(0, 360, 30)],
        "levels": [
            place(180.0, radius, words=minus(f"{level:.0f}"))
            for level, radius in radii.items()
            if level < 0.0
        ],
    }


def band_chart(label: str, limits: Sequence[tuple[str, float]]) -> Spec:
    """Return the curve of one figure over the band; `limits` are words and value."""
    asked = [{"words": words, "value": value} for words, value in limits]
    return _titled(_band(), label, {"asked": asked})


@cache
def _band() -> Spec:
    x = alt.X(
        "mhz:Q", title="MHz", scale=alt.Scale(zero=False, nice=False), axis=alt.Axis(tickCount=4)
    )
    y = alt.Y("value:Q", title=None, scale=alt.Scale(zero=False, padding=8))
    lines = (
        _named("band")
        .transform_filter("isValid(datum.value)")
        .mark_line(strokeWidth=2, point={"size": 22, "filled": True})
        .encode(x=x, y=y, **_series(SERIES))
    )
    asked = _named("asked")
    chart = alt.layer(
        asked.mark_rule(color=_LIMIT, strokeDash=[7, 3]).encode(y=y),
        asked.mark_text(align="right", x="width", dy=-5, color=_LIMIT, fontSize=11).encode(
            y=y, text="words:N"
        ),
        lines,
    )
    return _finished(chart, width="container", height=130)


def role_cuts_chart(
    plane: str,
    cuts: Mapping[str, Sequence[float | None]],
    envelope: Envelope | None,
) -> Spec:
    """Return one cut of every recommended design, role to levels every 2°, dB."""
    rows = [
        {"series": role, "angle": 2 * i, "level": level}
        for role, levels in cuts.items()
        for i, level in enumerate(levels)
    ]
    flat = _finished_flat(tuple(cuts), bool(envelope), width=330, height=210)
    return _titled(flat, f"{plane}-plane", {"cut": rows, **_beside(envelope)})


def difference_chart(rows: Sequence[Mapping[str, Any]]) -> Spec:
    """Return the spread of scout minus proof in steps; rows of `figure` and `difference`."""
    order = list(dict.fromkeys(row["figure"] for row in rows))
    y = alt.Y("figure:N", sort=order, title=None, axis=alt.Axis(labelLimit=180))
    x = alt.X("difference:Q", title="scout − proof, in steps")
    base = _named("designs")
    chart = alt.layer(
        base.mark_tick(color=MARKS[0].colour, opacity=0.5, thickness=1.5).encode(x=x, y=y),
        base.mark_point(filled=True, color=BLACK, shape="diamond", size=60).encode(
            x=alt.X("median(difference):Q", title="scout − proof, in steps"), y=y
        ),
        _named("none").mark_rule(color=GREY).encode(x=x),
    )
    data = {"designs": rows, "none": [{"difference": 0.0}]}
    return _finished(chart, data, width=210, height=26 * len(order))


def course_chart(courses: Sequence[Course], quantity: str, title: str) -> Spec:
    """Return `quantity` ("feasible" or "volume") of every stage over designs judged."""
    names = [f"{course.stage}: {course.model}" for course in courses]
    rows = [
        {"series": name, "designs": float(n), "share": round(float(100 * share), 3)}
        for name, course in zip(names, courses, strict=True)
        for n, share in zip(course.designs, getattr(course, quantity), strict=True)
    ]
    look = _series(names)
    chart = (
        _named("course")
        .properties(title=title)
        .mark_line(strokeWidth=2, point={"size": 12})
        .encode(
            x=alt.X("designs:Q", title="designs judged in the stage"),
            y=alt.Y("share:Q", title="%", scale=alt.Scale(domain=[0, 100])),
            **look,
        )
    )
    return _finished(chart, {"course": rows}, width=330, height=190)
