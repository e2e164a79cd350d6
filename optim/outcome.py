"""A finished run on disk: what was asked and what was found, bit for bit, to report it again.

requirements.toml is the text of the file that was asked for; found.json holds the settings of
the run and every design found with the numbers it was judged by (64-bit floats as in the journal).
Designs are rows of the five variables, SI and radians.
"""

from __future__ import annotations

import codecs
import hashlib
import json
from collections.abc import Mapping
from dataclasses import asdict, fields, replace
from pathlib import Path
from typing import Annotated, Any, Final, Literal

import numpy as np
from pydantic import AfterValidator, BaseModel, ConfigDict, Field, NonNegativeInt, PositiveInt

from models import MODELS, Figures
from models.conventions import C0
from optim.archive import Judged
from optim.faults import Fault, SpecError, printable
from optim.journal import decode, encode
from optim.margins import Judge
from optim.requirements import Requirements, RunSettings, read_requirements
from optim.result import Result
from optim.schema import Title
from optim.search import Found
from optim.space import DesignSpace
from optim.tolerance import Influence, Spread
from optim.units import VARIABLES

__all__ = ["FILE", "REQUIREMENTS", "read_outcome", "write_outcome"]

FILE: Final = "found.json"
REQUIREMENTS: Final = "requirements.toml"
FORMAT: Final = 1

LENGTHS: Final = (1e-3, 20.0)
"""Lengths of a design lie between these, wavelengths; what lies outside was never judged."""

_PARTS: Final = ("front", "nearest", "relaxed")


class _Table(BaseModel):
    model_config = ConfigDict(extra="forbid", allow_inf_nan=False)


def _one_line(text: str) -> str:
    if not text.isprintable():
        msg = "text on one line"
        raise ValueError(msg)
    return text


def _known(name: str) -> str:
    if name not in MODELS:
        msg = "a model"
        raise ValueError(msg)
    return name


_Line = Annotated[str, Field(max_length=1000), AfterValidator(_one_line)]
_Model = Annotated[str, AfterValidator(_known)]
_Share = Annotated[float, Field(ge=0.0, le=1.0)]


class _Part(_Table):
    rows: NonNegativeInt
    columns: dict[str, int]
    numbers: str


class _Spread(_Table):
    design: str
    expected: _Share
    low: _Share
    high: _Share
    method: Literal["fit", "count"]
    samples: PositiveInt
    influences: dict[str, Influence]
    reach: str


class _Content(_Table):
    """What the file holds."""

    format: Literal[1]
    title: Title
    file: _Line
    spec_sha256: _Line
    run: RunSettings
    versions: dict[_Line, _Line]
    model: _Model
    evaluations: dict[_Model, NonNegativeInt]
    parts: dict[str, _Part]
    spreads: list[_Spread]


def write_outcome(folder: Path, result: Result, versions: Mapping[str, str]) -> None:
    """Write `result` into `folder`, with the versions of the libraries that computed it.

    Raises
    ------
    OSError
        Where a file cannot be written.
    """
    requirements, found = result.requirements, result.found
    content = {
        "format": FORMAT,
        "title": requirements.title,
        "file": printable(requirements.path.name),
        "spec_sha256": requirements.sha256,
        "run": asdict(requirements.run),
        "versions": dict(versions),
        "model": found.model,
        "evaluations": found.evaluations,
        "parts": {name: _written(getattr(found, name)) for name in _PARTS},
        "spreads": [
            {
                "design": encode(np.frombuffer(key, dtype=np.float64)[None]),
                **{f.name: getattr(spread, f.name) for f in fields(Spread)},
                "influences": {name: asdict(one) for name, one in spread.influences.items()},
                "reach": encode(spread.reach[None]),
            }
            for key, spread in found.spreads.items()
        ],
    }
    (folder / REQUIREMENTS).write_bytes(requirements.text.encode("utf-8"))
    text = json.dumps(content, ensure_ascii=False, indent=1, allow_nan=False)
    (folder / FILE).write_text(text + "\n", encoding="utf-8")


def read_outcome(folder: Path) -> tuple[Result, dict[str, str]]:
    """Return the run in `folder` and the versions of the libraries that computed it.

    Raises
    ------
    SpecError
        For a folder without a finished run, and for files that are damaged or were changed.
    """
    path = folder / FILE
    try:
        content = _Content.model_validate(json.loads(path.read_text(encoding="utf-8")))
    except FileNotFoundError:
        given, allowed = "a folder without it", "the folder of a finished search"
        raise SpecError([Fault(str(path), "", given, allowed)]) from None
    except (ValueError, RecursionError) as error:
        raise _damaged(path) from error
    requirements = _requirements(folder / REQUIREMENTS, content)
    try:
        result = _result(content, requirements)
    except (KeyError, TypeError, ValueError) as error:
        raise _damaged(path) from error
    return result, content.versions


def _requirements(path: Path, content: _Content) -> Requirements:
    """Return the requirements as they were when the search ran."""
    requirements = read_requirements(path)
    # The file as it came may have had a mark before its text, which is not kept.
    texts = (mark + requirements.text.encode() for mark in (b"", codecs.BOM_UTF8))
    if content.spec_sha256 not in {hashlib.sha256(text).hexdigest() for text in texts}:
        given, allowed = "a file changed since the search", "the file as apexfront search left it"
        raise SpecError([Fault(str(path), "", given, allowed)])
    return replace(
        requirements,
        title=content.title,
        path=Path(content.file),
        sha256=content.spec_sha256,
        run=content.run,
    )


def _result(content: _Content, requirements: Requirements) -> Result:
    """Return what the file holds; ValueError where the numbers are none of these requirements."""
    rules = Judge(requirements)
    columns = {
        "designs": len(VARIABLES),
        "objectives": len(requirements.goals),
        "margins": len(rules.limits),
        "violations": len(rules.constraints),
        "worst": len(Figures.names()),
    }
    spreads = {}
    for entry in content.spreads:
        key = decode(entry.design, 1)[0].tobytes()
        known = dict(entry) | {"reach": decode(entry.reach, 1)[0]}
        del known["design"]
        spreads[key] = Spread(**known)
    found = Found(
        **{name: _read(content.parts[name], columns) for name in _PARTS},
        model=content.model,
        evaluations=dict(content.evaluations),
        spreads=spreads,
    )
    result = Result(requirements, DesignSpace.from_requirements(requirements), found)
    if not _is_sound(result):
        msg = "numbers that no search finds"
        raise ValueError(msg)
    return result


def _is_sound(result: Result) -> bool:
    """Return whether all this can have been found for these requirements."""
    asked, found = result.requirements, result.found
    if not {asked.run.scout, asked.run.prove} <= {*MODELS, None}:
        return False
    if not all(_are_sound(getattr(found, name), asked) for name in _PARTS):
        return False
    loose = {name for name, value in asked.tolerance.items() if value > 0.0}
    named = [set(spread.influences) for spread in result.spreads().values()]
    return len(named) in {0, len(result.shown()[1])} and all(
        loose <= names <= set(VARIABLES) and names for names in named
    )


def _are_sound(judged: Judged, requirements: Requirements) -> bool:
    angles = judged.designs[:, 0]
    lengths = judged.designs[:, 1:]
    least, most = (share * C0 / requirements.band.middle_hz for share in LENGTHS)
    numbers = np.hstack([judged.objectives, judged.margins, judged.violations])
    return bool(
        ((angles > 0.0) & (angles < 3.2)).all()
        and ((lengths > least) & (lengths < most)).all()
        and np.isfinite(numbers).all()
    )


def _written(judged: Judged) -> dict[str, Any]:
    columns = {f.name: getattr(judged, f.name).shape[1] for f in fields(judged)}
    matrix = np.hstack([getattr(judged, name) for name in columns])
    return {"rows": len(judged), "columns": columns, "numbers": encode(matrix)}


def _read(part: _Part, columns: dict[str, int]) -> Judged:
    total = sum(columns.values())
    matrix = decode(part.numbers, part.rows) if part.rows else np.empty((0, total))
    if list(part.columns.items()) != list(columns.items()) or matrix.shape[1] != total:
        msg = "numbers of other requirements"
        raise ValueError(msg)
    pieces = np.split(matrix, np.cumsum(list(columns.values()))[:-1], axis=1)
    # Keys are the bytes of rows, which must lie in one piece.
    return Judged(
        **{name: np.ascontiguousarray(p) for name, p in zip(columns, pieces, strict=True)}
    )


def _damaged(path: Path) -> SpecError:
    given, allowed = "a damaged file, or one of another version", "what apexfront search wrote"
    return SpecError([Fault(str(path), "", given, allowed)])
