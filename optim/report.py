"""report.html of a run: one page that needs no network, made from the run's folder alone.

Texts are escaped by the template, data inside scripts by `embedded`; a policy in the page lets only
its own two scripts run and forbids every request. The same folder gives the same bytes.
"""

from __future__ import annotations

import base64
import hashlib
import json
from collections.abc import Iterator, Mapping
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any, Final
from urllib.parse import quote

import vl_convert
from altair.utils.schemapi import debug_mode
from jinja2 import Environment, StrictUndefined
from markupsafe import Markup

from optim import report_charts as charts
from optim.history import courses
from optim.outcome import read_outcome
from optim.report_data import read_data
from optim.report_page import (
    band_figures,
    cards,
    compared,
    envelope,
    margin_cells,
    page,
    role_rows,
    role_words,
)
from optim.report_quantities import Quantity, asked_words, limit_words, quantities
from optim.report_sketch import scale_of, sketch
from optim.result import Result

__all__ = ["FILE", "embedded", "make_report"]

FILE: Final = "report.html"
JOURNAL: Final = "journal.jsonl"

GROUPS: Final = {
    ".": "Results",
    "recommended": "Design files",
    "nearest": "Design files",
    "papers": "Papers",
    "pictures": "Pictures",
    "trade": "Trade",
}
"""Parts of a run's folder that the report links to."""

_AT_THE_TOP: Final = ("front.csv", "summary.json", "requirements.toml", JOURNAL)
_TRADE: Final = ("trade.txt", "trade/trade.txt")


def make_report(folder: Path) -> Path:
    """Write the report of the finished run in `folder` from what is kept there; return its path.

    Raises
    ------
    SpecError, JournalError
        For a folder without a finished run, and for damaged files.
    OSError
        Where a file cannot be read or written.
    """
    result, versions = read_outcome(folder)
    # Charts are checked against their grammar by the tests, not once more in every report.
    with debug_mode(arg=False):
        html = _html(folder, result, read_data(folder, len(result.shown()[0])), versions)
    path = folder / FILE
    path.write_text(html, encoding="utf-8", newline="\n")
    return path


def embedded(data: Any) -> Markup:
    """Return `data` as JSON that can stand in a script element, whatever texts are in it."""
    text = json.dumps(data, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    for sign in "<>&\u2028\u2029":
        text = text.replace(sign, f"\\u{ord(sign):04x}")
    return Markup(text)


def _html(folder: Path, result: Result, content: dict[str, Any], versions: dict[str, str]) -> str:
    judged, _ = result.shown()
    went = courses(folder / JOURNAL)
    library, script, style = _library(), _asset("report.js"), _asset("report.css")
    reflectors = result.space.reflectors(judged.designs) if len(judged) else None
    scale = 1.0 if reflectors is None else scale_of(reflectors)
    sketches = [
        sketch(reflectors, row, scale) for row in range(len(judged)) if reflectors is not None
    ]
    shown = page(result, content, went, versions)
    figures = band_figures(result, content)
    environment = Environment(
        autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    return environment.from_string(_asset("report.html")).render(
        **shown,
        policy=_policy(library, script),
        style=Markup(style),
        library=Markup(library),
        script=Markup(script),
        band_figures=list(figures.items()),
        cards=cards(result, [Markup(s) for s in sketches]),
        **_stills(result, content, went),
        trade=_trade(folder),
        files=list(_files(folder)),
        data=embedded(_data(result, content, sketches, figures)) if sketches else "",
    )


def _data(
    result: Result, content: dict[str, Any], sketches: list[str], figures: Mapping[str, str]
) -> dict[str, Any]:
    """Return what the page's script reads."""
    judged, _ = result.shown()
    shown = quantities(result, judged)
    axes = _axes(result, shown)
    rows = role_words(result)
    limits = result.requirements.limits
    drawn = {
        "front": charts.front_chart(**axes, colour=_colour(axes, shown)),
        **{f"polar_{plane}": charts.polar_chart(plane.upper()) for plane in "he"},
        **{
            f"cut_{plane}": charts.cut_chart(plane.upper(), envelope(result, plane))
            for plane in "he"
        },
    }
    for name, label in figures.items():
        asked = [(asked_words(limit), limit.value) for limit in limits if limit.figure == name]
        drawn[f"band_{name}"] = charts.band_chart(label, asked)
    return {
        "first": next(iter(rows.values()), 0),
        "roles": role_rows(result),
        "axes": {**axes, "painted": _colour(axes, shown)},
        "quantities": [
            {
                "key": q.key,
                "group": q.group,
                "words": q.words,
                "unit": q.unit,
                "decimals": q.decimals,
                "values": [
                    round(v, q.decimals + 4) if abs(v) < 1e300 else None for v in q.values.tolist()
                ],
            }
            for q in shown
        ],
        "limits": [{"words": limit_words(x), "asked": asked_words(x)} for x in limits],
        "margins": [margin_cells(result, row) for row in range(len(judged))],
        "limit_lines": list(_limit_lines(result, shown)),
        "cuts": {"h": content["h_tenths_db"], "e": content["e_tenths_db"]},
        "mhz": content["mhz"],
        "band": {name: content["band"][name] for name in figures},
        "sketches": sketches,
        "charts": drawn,
    }


def _axes(result: Result, shown: list[Quantity]) -> dict[str, str]:
    """Return the quantities first shown across and upwards: a size and a figure of the goals."""
    known = {q.key: q.group for q in shown}
    keys = [
        key
        for goal in result.requirements.goals
        for key in (goal.name, *(f"{goal.name}_{unit}" for unit in ("dbi", "db", "deg")))
        if key in known
    ]
    across = [key for key in keys if known[key] == "size"] or ["frontal_area"]
    upwards = [key for key in keys if known[key] == "figure"]
    upwards += [key for key in ("gain_dbi", "directivity_dbi") if key in known]
    return {"across": across[0], "upwards": (upwards or ["apex_angle_deg"])[0]}


def _colour(axes: Mapping[str, str], shown: list[Quantity]) -> str:
    goal = [q.key for q in shown if q.key == "smallest_margin"]
    return (goal or [axes["upwards"]])[0]


def _limit_lines(result: Result, shown: list[Quantity]) -> Iterator[dict[str, Any]]:
    """Yield what is asked for where a picture of the designs has room for it."""
    known = {q.key: q for q in shown}
    for limit in result.requirements.limits:
        quantity = known.get(limit.figure)
        if quantity is None:
            continue
        values = quantity.values[abs(quantity.values) < 1e300]
        room = float(values.max() - values.min()) or abs(limit.value)
        if values.min() - room <= limit.value <= values.max() + room:
            yield {"key": limit.figure, "value": limit.value, "words": asked_words(limit)}


def _stills(result: Result, content: dict[str, Any], went: list[Any]) -> dict[str, Any]:
    """Return the pictures that do not move, as SVG."""
    rows = role_words(result)
    cuts = [
        _still(
            charts.role_cuts_chart(
                plane.upper(),
                {
                    role: [
                        None if x is None else x / 10 for x in content[f"{plane}_tenths_db"][row]
                    ]
                    for role, row in rows.items()
                },
                envelope(result, plane),
            ),
            f"{plane.upper()}-plane cuts of the designs side by side",
            f"roles-{plane}",
        )
        for plane in "he"
        if rows
    ]
    differences = [
        {"figure": words, "difference": round(float(value) / step, 4)}
        for words, _, step, values in compared(result, content)
        for value in values
    ]
    spread = "Difference of scout and proof, one tick a design"
    titles = {"feasible": "meets everything, share of the batch", "volume": "space covered"}
    return {
        "role_cuts": cuts,
        "difference_picture": _still(charts.difference_chart(differences), spread, "difference")
        if differences
        else "",
        "course_pictures": [
            _still(charts.course_chart(went, quantity, title), title, f"course-{quantity}")
            for quantity, title in titles.items()
            if went
        ],
    }


def _still(specification: dict[str, Any], label: str, prefix: str) -> Markup:
    return Markup(charts.as_svg(specification, label=label, prefix=prefix))


def _files(folder: Path) -> Iterator[tuple[str, list[tuple[str, str]]]]:
    """Yield heading and links (address, name) of what there is in the folder, by its parts."""
    for part, heading in GROUPS.items():
        place = folder / part
        found = (
            [place / name for name in _AT_THE_TOP]
            if part == "."
            else sorted(place.rglob("*"))
            if place.is_dir() and not place.is_symlink()
            else []
        )
        names = [path.relative_to(folder).as_posix() for path in found if path.is_file()]
        if names:
            yield heading, [(quote(name), name.removeprefix(f"{part}/")) for name in names]


def _trade(folder: Path) -> str:
    """Return the words of a trade study kept with the run, empty if there is none."""
    for name in _TRADE:
        if (folder / name).is_file():
            return (folder / name).read_text(encoding="utf-8", errors="replace")
    return ""


def _policy(*scripts: str) -> str:
    """Return what the page may do: run these scripts, style itself, and nothing else."""
    hashes = " ".join(
        f"'sha256-{base64.b64encode(hashlib.sha256(s.encode()).digest()).decode()}'"
        for s in scripts
    )
    return (
        f"default-src 'none'; script-src {hashes}; style-src 'unsafe-inline'; img-src data:; "
        "base-uri 'none'; form-action 'none'"
    )


@cache
def _library() -> str:
    """Return the script that draws the pictures that move."""
    # Nothing is to be added to what the bundle sets up by itself.
    snippet: Any = None
    return vl_convert.javascript_bundle(snippet, vl_version=charts.GRAMMAR)


def _asset(name: str) -> str:
    return files("optim").joinpath(name).read_text(encoding="utf-8")
