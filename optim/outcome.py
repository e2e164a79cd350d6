"""A finished run on disk: what was asked and what was found, bit for bit, to report it again.

requirements.toml is the text of the file that was asked for; found.json holds the settings of
the run and every design found with the numbers it was judged by (64-bit floats as in the journal).
Designs are rows of the five variables, SI and radians.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import asdict, fields, replace
from pathlib import Path
from typing import Any, Final

import numpy as np

from models import MODELS
from optim.archive import Judged
from optim.faults import Fault, SpecError, printable
from optim.journal import decode, encode
from optim.requirements import Requirements, RunSettings, read_requirements
from optim.result import Result
from optim.search import Found
from optim.space import DesignSpace
from optim.tolerance import Influence, Spread

__all__ = ["FILE", "REQUIREMENTS", "read_outcome", "write_outcome"]

FILE: Final = "found.json"
REQUIREMENTS: Final = "requirements.toml"
FORMAT: Final = 1

_PARTS: Final = ("front", "nearest", "relaxed")


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
        For a folder without a finished run, and for files that are damaged.
    """
    path = folder / FILE
    try:
        content = json.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError:
        given, allowed = "a folder without it", "the folder of a finished search"
        raise SpecError([Fault(str(path), "", given, allowed)]) from None
    except ValueError as error:
        raise _damaged(path) from error
    requirements = read_requirements(folder / REQUIREMENTS)
    try:
        run = RunSettings(**content["run"])
        known = content["format"] == FORMAT and content["model"] in MODELS
        versions = dict(content["versions"])
        result = _result(content, replace(requirements, run=run)) if known else None
    except (AttributeError, KeyError, TypeError, ValueError) as error:
        raise _damaged(path) from error
    if result is None:
        raise _damaged(path)
    return result, versions


def _result(content: dict[str, Any], requirements: Requirements) -> Result:
    """Return what the checked file holds."""
    requirements = replace(
        requirements,
        title=str(content["title"]),
        path=Path(str(content["file"])),
        sha256=str(content["spec_sha256"]),
    )
    spreads = {}
    for entry in content["spreads"]:
        key = decode(entry.pop("design"), 1)[0].tobytes()
        influences = {name: Influence(**one) for name, one in entry.pop("influences").items()}
        reach = decode(entry.pop("reach"), 1)[0]
        spreads[key] = Spread(**entry, influences=influences, reach=reach)
    found = Found(
        **{name: _read(content["parts"][name]) for name in _PARTS},
        model=content["model"],
        evaluations=content["evaluations"],
        spreads=spreads,
    )
    return Result(requirements, DesignSpace.from_requirements(requirements), found)


def _written(judged: Judged) -> dict[str, Any]:
    columns = {f.name: getattr(judged, f.name).shape[1] for f in fields(judged)}
    matrix = np.hstack([getattr(judged, name) for name in columns])
    return {"rows": len(judged), "columns": columns, "numbers": encode(matrix)}


def _read(part: dict[str, Any]) -> Judged:
    columns, total = part["columns"], sum(part["columns"].values())
    matrix = decode(part["numbers"], part["rows"]) if part["rows"] else np.empty((0, total))
    pieces = np.split(matrix, np.cumsum(list(columns.values()))[:-1], axis=1)
    # Keys are the bytes of rows, which must lie in one piece.
    return Judged(
        **{name: np.ascontiguousarray(p) for name, p in zip(columns, pieces, strict=True)}
    )


def _damaged(path: Path) -> SpecError:
    given, allowed = "a damaged file, or one of another version", "what apexfront search wrote"
    return SpecError([Fault(str(path), "", given, allowed)])
