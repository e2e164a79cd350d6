"""What the report shows beyond the judged numbers: patterns, band curves, the scout's opinion.

Both cuts (dB relative to boresight, every 2° off boresight) at the band's centre and figures at a
few frequencies, by the deciding model; figures worst over the band by the scout's. Of at most
`MOST` designs, kept in patterns.json, so that a report can be made again without any model.
"""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Any, Final

import numpy as np
from joblib import Parallel, delayed, parallel_config
from threadpoolctl import threadpool_limits

from models import Build, Figures, Reflectors, radiate
from models.conventions import FloatArray, decibels
from models.figures import figures_of_merit
from models.pattern import CUT_ANGLES, Pattern
from optim.faults import Fault, SpecError
from optim.margins import Judge
from optim.outcome import FILE as FOUND
from optim.quantities import FIGURES
from optim.requirements import Band
from optim.result import Result

__all__ = [
    "BAND_FIGURES",
    "FILE",
    "compute",
    "is_current",
    "read_data",
    "shown_points",
    "write_data",
]

FILE: Final = "patterns.json"
CHUNK: Final = 25
"""Designs solved at a time; not to depend on the number of workers."""

FLOOR_DB: Final = -60.0
LARGEST: Final = 1e12
"""No number in the file comes near it."""

MOST_POINTS: Final = 5
"""Frequencies of the band curves."""

BAND_FIGURES: Final = (
    "gain_dbi",
    "directivity_dbi",
    "realized_gain_dbi",
    "beamwidth_h_deg",
    "beamwidth_e_deg",
    "front_to_back_db",
    "sidelobe_db",
    "resistance_ohm",
    "reactance_ohm",
    "vswr",
)
"""Figures that have a curve."""


def compute(result: Result, jobs: int = 1) -> dict[str, Any]:
    """Return the numbers as plain lists, one entry a design shown; solved on `jobs` processes."""
    requirements = result.requirements
    judged, _ = result.shown()
    reflectors = result.space.reflectors(judged.designs)
    frequencies = shown_points(requirements.band)
    scout = requirements.run.scout
    proven = requirements.run.prove is not None and scout != result.found.model
    fine = requirements.band.refined().frequencies()
    designs = reflectors.matrix() if len(judged) else np.empty((0, 6))
    chunks = [designs[i : i + CHUNK] for i in range(0, len(designs), CHUNK)]
    build = requirements.build
    tasks = [(chunk, frequencies, result.found.model, build) for chunk in chunks]
    tasks += [(chunk, fine, scout, build) for chunk in chunks] if proven else []
    with parallel_config("loky", inner_max_num_threads=1):
        answers = Parallel(n_jobs=jobs, batch_size=1)(delayed(_radiated)(*task) for task in tasks)
    decided, scouted = answers[: len(chunks)], answers[len(chunks) :]
    terms = requirements.terms
    figures = [figures_of_merit(pattern, terms) for pattern in decided]
    centre = frequencies.size // 2
    content: dict[str, Any] = {
        "model": result.found.model,
        "centre_mhz": frequencies[centre] / 1e6,
        "mhz": (frequencies / 1e6).tolist(),
        "h_tenths_db": [_tenths(row) for p in decided for row in p.h_field[:, centre]],
        "e_tenths_db": [_tenths(row) for p in decided for row in p.e_field[:, centre]],
        "band": {},
        "scout": {},
    }
    if figures:
        merged = Figures.concatenate(figures)
        content["band"] = {
            name: _rounded(getattr(merged, name), FIGURES[name].decimals) for name in BAND_FIGURES
        }
    if scouted:
        merged = Figures.concatenate([figures_of_merit(pattern, terms) for pattern in scouted])
        worst = Judge(requirements).worst(merged)
        content["scout"] = {
            name: _rounded(worst[name], FIGURES[name].decimals + 1) for name in BAND_FIGURES
        }
    return content


def shown_points(band: Band) -> FloatArray:
    """Return an odd number of frequencies from edge to edge, Hz; at most `MOST_POINTS`."""
    if band.low_hz == band.high_hz:
        return np.array([band.low_hz])
    return np.linspace(band.low_hz, band.high_hz, 3 if band.points <= 3 else MOST_POINTS)


def write_data(folder: Path, content: dict[str, Any]) -> None:
    """Write the numbers into `folder`, with the mark of the designs that they belong to."""
    content = {"found_sha256": _mark(folder), **content}
    text = json.dumps(content, separators=(",", ":"), allow_nan=False)
    (folder / FILE).write_text(text + "\n", encoding="utf-8")


def read_data(folder: Path, designs: int) -> dict[str, Any]:
    """Return the numbers kept in `folder` of so many `designs`.

    Raises
    ------
    SpecError
        For a file that is missing or damaged, or belongs to other designs.
    """
    path = folder / FILE
    given = "a damaged file"
    try:
        content = json.loads(path.read_text(encoding="utf-8"))
        if content["found_sha256"] != _mark(folder):
            given = "a file of other designs"
        elif _is_whole(content, designs):
            return dict(content)
    except FileNotFoundError:
        given = "no file"
    except (KeyError, TypeError, ValueError, RecursionError):
        pass
    raise SpecError([Fault(str(path), "", given, "what apexfront report writes")])


def is_current(folder: Path, designs: int) -> bool:
    """Return whether `folder` holds the numbers of the `designs` found there."""
    try:
        read_data(folder, designs)
    except SpecError:
        return False
    return True


def _is_whole(content: dict[str, Any], designs: int) -> bool:
    """Return whether every number that the report reads is there; KeyError, TypeError if not."""
    places = len(content["mhz"])
    tables = [
        ([[content["centre_mhz"], *content["mhz"]]], (1, 1 + places)),
        *((content[f"{plane}_tenths_db"], (designs, CUT_ANGLES.size)) for plane in "he"),
        *((content["band"][name], (designs, places)) for name in BAND_FIGURES if designs),
        *((content["scout"][name], (designs,)) for name in BAND_FIGURES if content["scout"]),
    ]
    return None not in tables[0][0][0] and all(_is_table(*table) for table in tables)


def _is_table(value: Any, shape: tuple[int, ...]) -> bool:
    """Return whether `value` is nested lists of this shape with numbers, or None, in them."""
    if not shape:
        number = isinstance(value, int | float) and not isinstance(value, bool)
        return value is None or (number and abs(value) < LARGEST)
    size, *rest = shape
    return (
        isinstance(value, list)
        and len(value) == size
        and all(_is_table(inner, tuple(rest)) for inner in value)
    )


def _mark(folder: Path) -> str:
    return hashlib.sha256((folder / FOUND).read_bytes()).hexdigest()


def _radiated(designs: FloatArray, frequencies: FloatArray, model: str, build: Build) -> Pattern:
    with threadpool_limits(1):
        return radiate(Reflectors.from_matrix(designs), frequencies, model=model, build=build)


def _tenths(field: np.ndarray) -> list[int | None]:
    """Return the level of a cut relative to its first angle, in tenths of a decibel."""
    intensity = np.abs(field) ** 2
    with np.errstate(divide="ignore", invalid="ignore"):
        level = np.maximum(decibels(intensity / intensity[0]), FLOOR_DB)
    return [round(10.0 * x) if np.isfinite(x) else None for x in level.tolist()]


def _rounded(values: FloatArray, digits: int) -> Any:
    """Return `values` as nested lists of short numbers, None where one is missing."""
    if values.ndim > 1:
        return [_rounded(row, digits) for row in values]
    return [round(x, digits) if np.isfinite(x) else None for x in values.tolist()]
