"""The papers of recommended designs: what a workshop, a colleague and a mast owner need of each.

In papers/ROLE/: drawing.pdf and drawing.svg, blank.dxf and plate.dxf (one bent sheet, or each of
two plates), cut_list.txt and cut_list.csv, pattern_h.csv, pattern_e.csv and sphere.csv (where the
model gives it), match.s1p (where the model gives a match), sheet.pdf. The same run gives the same
bytes. Names of files come from roles, never from titles.
"""

from __future__ import annotations

import io
import re
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Final

from matplotlib.figure import Figure
from threadpoolctl import threadpool_limits

from models import MODELS, radiate, sphere
from optim.cut_list import cut_list_csv, cut_list_text
from optim.cutting import blank_of, plate_of
from optim.datasheet import data_sheet
from optim.datasheet_plots import shown_columns
from optim.drawing import draw_sheet
from optim.dxf import blank_dxf
from optim.patterns import GRID, cut_csv, sphere_csv
from optim.style import house_style, save
from optim.subject import Subject
from optim.touchstone import one_port

if TYPE_CHECKING:
    from optim.result import Result

__all__ = ["FOLDER", "subjects_of", "write_papers", "write_run"]

FOLDER: Final = "papers"


def write_run(folder: Path, result: Result) -> list[Path]:
    """Write the papers of every recommended design of `result` into `folder`; return the files.

    Nothing is written where no design meets the requirements: what misses them is not to be built.

    Raises
    ------
    OSError
        Where a file cannot be written.
    """
    if not result.met:
        return []
    return [path for subject in subjects_of(result) for path in write_papers(folder, subject)]


def subjects_of(result: Result) -> Iterator[Subject]:
    """Yield every design that `result` puts before its reader, with its pattern."""
    judged, rows = result.shown()
    requirements, model = result.requirements, result.found.model
    names, places = list(rows), list(rows.values())
    if not names:
        return
    reflectors = result.space.reflectors(judged.designs[places])
    frequencies = requirements.band.refined().frequencies()
    with threadpool_limits(1):
        pattern = radiate(reflectors, frequencies, model=model, build=requirements.build)
    for row, name in enumerate(names):
        spread = result.found.spreads.get(judged.keys[places[row]])
        yield Subject(
            requirements=requirements,
            reflectors=reflectors[row],
            role=name,
            model=model,
            pattern=pattern.rows([row]),
            yields=None if spread is None else (spread.expected, spread.low, spread.high),
        )


def write_papers(folder: Path, subject: Subject) -> list[Path]:
    """Write the papers of one design into `folder`/papers/ROLE; return the files.

    Raises
    ------
    ValueError
        For a role that is no plain name.
    OSError
        Where a file cannot be written.
    """
    if not re.fullmatch(r"[a-z0-9_]+", subject.role):
        msg = f"role: {subject.role!r} given, allowed: small letters, digits and underscores"
        raise ValueError(msg)
    place = folder / FOLDER / subject.role
    place.mkdir(parents=True, exist_ok=True)
    written = []
    for name, content in _contents(subject):
        path = place / name
        if isinstance(content, Figure):
            save(content, path)
        elif isinstance(content, bytes):
            path.write_bytes(content)
        else:
            path.write_text(content, encoding="utf-8", newline="\n")
        written.append(path)
    return written


def _contents(subject: Subject) -> Iterator[tuple[str, Figure | bytes | str]]:
    """Yield name and content of each paper."""
    asked, reflectors = subject.requirements, subject.reflectors
    build, band, terms = asked.build, asked.band, asked.terms
    drawing = draw_sheet(
        reflectors,
        title=asked.title,
        name=subject.role,
        build=build,
        band_hz=(band.low_hz, band.high_hz),
    )
    yield "sheet.pdf", data_sheet(subject)
    yield "drawing.pdf", _pdf(drawing)
    yield "drawing.svg", drawing
    blank = blank_of(reflectors, build)
    if blank is not None:
        yield "blank.dxf", blank_dxf(blank, name=subject.name)
    yield "plate.dxf", blank_dxf(plate_of(reflectors, build), name=subject.name)
    folded = terms.impedance_ratio != 1.0
    yield "cut_list.txt", cut_list_text(reflectors, build, name=subject.role, folded=folded)
    yield "cut_list.csv", cut_list_csv(reflectors, build)
    for plane in ("h", "e"):
        yield f"pattern_{plane}.csv", cut_csv(subject.pattern, subject.frequencies, plane=plane)
    model = MODELS[subject.model]
    if model.sphere is not None:
        frequencies = subject.frequencies[list(shown_columns(subject.frequencies.size))]
        with threadpool_limits(1):
            around = sphere(
                reflectors,
                frequencies,
                theta=GRID[0],
                phi=GRID[1],
                model=subject.model,
                build=build,
            )
        yield "sphere.csv", sphere_csv(around, frequencies)
    about = f"{subject.name} corner reflector, input impedance by {subject.model}"
    port = one_port(
        subject.figures, subject.frequencies, reference_ohm=terms.reference_ohm, about=about
    )
    if port is not None:
        yield "match.s1p", port


def _pdf(figure: Figure) -> bytes:
    held = io.BytesIO()
    with house_style():
        figure.savefig(held, format="pdf", metadata={"Creator": "apexfront", "CreationDate": None})
    return held.getvalue()
