"""Study files: one requirements file, what to vary in it, and how often to repeat each search.

`[grid]` varies keys of the requirements file one against the other, every value with every other;
each `[[case]]` changes several keys together, as both ends of a band; `repeats` searches again
with the next seeds. Runs are numbered with the last varied key changing fastest. Names of keys are
checked here, values by the reader of requirements: a value that is wrong in one run fails that run,
what is wrong in every run is wrong with the study.
"""

from __future__ import annotations

import copy
import hashlib
import itertools
import math
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any, Final, NoReturn, get_args

from pydantic import BeforeValidator, Field
from pydantic_core import PydanticCustomError

from optim.faults import Fault, Source, SpecError, dotted, read_toml, shown
from optim.requirements import raise_faults, understood
from optim.schema import SpecFile, Table, Title, parse
from optim.toml_text import document, value_text
from optim.values import count, near_miss, title_of

__all__ = ["CASE", "SEED", "Factor", "Study", "StudyError", "StudyRun", "read_study"]

CASE: Final = "case"
"""Name of the factor whose levels are the cases."""

SEED: Final = "run.seed"
MOST_RUNS: Final = 10_000

Complaint = tuple[str, str, str]
Changes = dict[str, Any]


def _tables(*, many: bool) -> BeforeValidator:
    kind = list if many else dict
    allowed = "tables, each [[case]]" if many else "a table of keys of the requirements file"

    def check(value: object) -> object:
        rows = value if isinstance(value, list) else [{}]
        if not isinstance(value, kind) or not all(isinstance(row, dict) for row in rows):
            _refuse(allowed)
        return value

    return BeforeValidator(check)


def _file_name(value: object) -> str:
    if not isinstance(value, str) or not value or not value.isprintable():
        _refuse("the name of a requirements file, relative to the study file")
    return value


def _refuse(allowed: str) -> NoReturn:
    kind: Final = "refused"
    raise PydanticCustomError(kind, "{allowed}", {"allowed": allowed})


class StudyFile(Table):
    """A study file."""

    title: Title | None = None
    spec: Annotated[str, BeforeValidator(_file_name)] | None = None
    repeats: Annotated[int, count(1, 1000)] | None = None
    set: Annotated[Changes, _tables(many=False)] = Field(default_factory=dict)
    grid: Annotated[Changes, _tables(many=False)] = Field(default_factory=dict)
    case: Annotated[list[Changes], _tables(many=True)] = Field(default_factory=list)


class StudyError(Exception):
    """A study cannot go on; the message says why and what to do."""


@dataclass(frozen=True)
class Factor:
    """What a study varies: a dotted key (or "case") and its levels, in the file's order."""

    name: str
    levels: tuple[Any, ...]

    @property
    def words(self) -> tuple[str, ...]:
        """Return the levels as text."""
        return tuple(word(level) for level in self.levels)

    @property
    def numeric(self) -> bool:
        """Whether every level is a number."""
        return all(
            isinstance(level, int | float) and not isinstance(level, bool) for level in self.levels
        )


@dataclass(frozen=True)
class StudyRun:
    """One search of a study.

    Parameters
    ----------
    number : int
        From 1.
    levels : tuple of int
        Which level of each factor.
    repeat : int
        From 0.
    changes : dict
        Dotted key to value, over the requirements file.
    """

    number: int
    levels: tuple[int, ...]
    repeat: int
    changes: Changes


@dataclass(frozen=True)
class Study:
    """A study file, understood.

    Parameters
    ----------
    title : str
    path, spec : Path
        The study file and its requirements file.
    sha256, spec_sha256 : str
        Of their bytes.
    factors : tuple of Factor
    repeats : int
    runs : tuple of StudyRun
    base : dict
        Content of the requirements file.
    """

    title: str
    path: Path
    spec: Path
    sha256: str
    spec_sha256: str
    factors: tuple[Factor, ...]
    repeats: int
    runs: tuple[StudyRun, ...]
    base: Changes

    def text(self, run: StudyRun) -> str:
        """Return the requirements file of one run."""
        content = copy.deepcopy(self.base)
        for key, value in run.changes.items():
            _put(content, key, value)
        if self.repeats > 1:
            seed = _seed(content)
            _put(content, SEED, seed + run.repeat if isinstance(seed, int) else seed)
        return document(content)

    def words(self, run: StudyRun) -> dict[str, str]:
        """Return the levels of one run as text by the name of the factor."""
        found = {
            factor.name: factor.words[level]
            for factor, level in zip(self.factors, run.levels, strict=True)
        }
        return found | ({"repeat": str(run.repeat + 1)} if self.repeats > 1 else {})


def word(level: object) -> str:
    """Return a level as a table shows it."""
    return level if isinstance(level, str) else value_text(level)


def read_study(path: Path) -> Study:
    """Return the study file at `path`, understood.

    Raises
    ------
    SpecError
        Holding every fault of the file, or what is wrong in every run.
    """
    source = read_toml(path)
    file, faults = parse(StudyFile, source)
    fixed, grid, cases = dict(_leaves(file.set)), dict(_leaves(file.grid)), _cases(file.case)
    raise_faults(source, faults, _complaints(file, fixed, grid, cases))
    spec = path.parent / (file.spec or "")
    base = read_toml(spec)
    factors = [Factor(key, tuple(levels)) for key, levels in grid.items()]
    if cases:
        factors.insert(0, Factor(CASE, tuple(cases)))
    repeats = file.repeats or 1
    study = Study(
        title=file.title or title_of(path),
        path=path,
        spec=spec,
        sha256=source.sha256,
        spec_sha256=base.sha256,
        factors=tuple(factors),
        repeats=repeats,
        runs=tuple(_runs(factors, cases, fixed, repeats)),
        base=dict(base.content),
    )
    _refuse_what_is_always_wrong(study)
    return study


def _runs(
    factors: list[Factor], cases: Mapping[str, Changes], fixed: Changes, repeats: int
) -> Iterator[StudyRun]:
    places = itertools.product(*(range(len(factor.levels)) for factor in factors), range(repeats))
    for number, (*levels, repeat) in enumerate(places, start=1):
        changes = dict(fixed)
        for factor, level in zip(factors, levels, strict=True):
            value = factor.levels[level]
            changes |= cases[value] if factor.name == CASE else {factor.name: value}
        yield StudyRun(number, tuple(levels), repeat, changes)


def _refuse_what_is_always_wrong(study: Study) -> None:
    """Raise the faults that all runs share."""
    shared: dict[Fault, None] | None = None
    for run in study.runs:
        text = study.text(run)
        digest = hashlib.sha256(text.encode()).hexdigest()
        source = Source(str(study.spec), text, digest, tomllib.loads(text))
        try:
            understood(source, study.spec)
        except SpecError as error:
            found = dict.fromkeys(error.faults)
            shared = found if shared is None else {f: None for f in shared if f in found}
        else:
            return
    if shared:
        raise SpecError(shared)


def _complaints(
    file: StudyFile, fixed: Changes, grid: dict[str, Any], cases: dict[str, Changes]
) -> Iterator[Complaint]:
    if file.spec is None:
        yield "spec", "nothing", "the name of a requirements file; this key must be there"
    places = {f"set.{key}": key for key in fixed} | {f"grid.{key}": key for key in grid}
    for row, changes in enumerate(file.case):
        places |= {f"case[{row}].{key}": key for key, _ in _leaves(changes) if key != "name"}
    for place, key in places.items():
        allowed = _unknown(key)
        if allowed is not None:
            yield place, "an unknown key", allowed
    yield from _grid_complaints(grid)
    yield from _case_complaints(file.case, cases)
    yield from _clashes(places, varied_seed=(file.repeats or 1) > 1)
    count = math.prod(len(v) for v in grid.values() if isinstance(v, list)) * (len(cases) or 1)
    count *= file.repeats or 1
    if not grid and not cases and (file.repeats or 1) == 1:
        yield "grid", "nothing to vary", "a key in [grid], a [[case]], or repeats above 1"
    if count > MOST_RUNS:
        yield "grid", f"{count} runs", f"at most {MOST_RUNS} runs"


def _grid_complaints(grid: dict[str, Any]) -> Iterator[Complaint]:
    for key, levels in grid.items():
        if not isinstance(levels, list) or not levels:
            yield f"grid.{key}", shown(levels), "a list of at least one value"
            continue
        words = [word(level) for level in levels]
        for place in range(len(words)):
            if words[place] in words[:place]:
                yield f"grid.{key}[{place}]", words[place], "each value once"


def _case_complaints(rows: list[Changes], cases: dict[str, Changes]) -> Iterator[Complaint]:
    names = [_case_name(row) for row in rows]
    for place, row in enumerate(rows):
        given = row.get("name")
        if given is not None and not (isinstance(given, str) and given.isprintable() and given):
            yield f"case[{place}].name", shown(given), "text on one line"
        elif names[place] in names[:place]:
            yield f"case[{place}].name", shown(names[place]), "each name once"
        if not cases.get(names[place]):
            yield f"case[{place}]", "no key", "at least one key of the requirements file"


def _clashes(places: dict[str, str], *, varied_seed: bool) -> Iterator[Complaint]:
    """Find keys that two places change, one of them at, above or below the other."""
    rows = list(places.items())
    for (place, key), (before, other) in itertools.combinations(rows, 2):
        both = place.startswith("case[") and before.startswith("case[")
        same_case = both and place.partition("]")[0] == before.partition("]")[0]
        if (not both or same_case) and _nested(key, other):
            yield before, "a key changed twice", f"each key in one place; {place} changes it"
    for place, key in rows:
        if varied_seed and key == SEED and not place.startswith("set."):
            yield place, "seeds", "left out, as repeats goes through the seeds"


def _nested(one: str, other: str) -> bool:
    short, long = sorted((one, other), key=len)
    return long == short or long.startswith(f"{short}.")


def _unknown(key: str) -> str | None:
    """Return what is allowed instead of a key that a requirements file cannot have."""
    table: type[Table] | None = SpecFile
    for part in key.split("."):
        names = [] if table is None else list(table.model_fields)
        if table is None or part not in names:
            hint = near_miss(part, names)
            return "; ".join([*hint, "one of " + ", ".join(names)]) if names else "no key below it"
        annotation = table.model_fields[part].annotation
        options = (annotation, *get_args(annotation))
        table = next((o for o in options if isinstance(o, type) and issubclass(o, Table)), None)
    return None


def _leaves(table: Mapping[str, Any], above: str = "") -> Iterator[tuple[str, Any]]:
    """Yield dotted key and value of everything in `table` that is no table."""
    for key, value in table.items():
        # A key in quotes may hold the dots itself.
        place = f"{above}{key if '.' in key else dotted([key])}"
        if isinstance(value, dict) and value:
            yield from _leaves(value, f"{place}.")
        else:
            yield place, value


def _cases(rows: list[Changes]) -> dict[str, Changes]:
    return {
        _case_name(row): {key: value for key, value in _leaves(row) if key != "name"}
        for row in rows
    }


def _case_name(row: Changes) -> str:
    given = row.get("name")
    if isinstance(given, str):
        return given
    return ", ".join(f"{key} = {word(value)}" for key, value in _leaves(row))


def _put(content: Changes, key: str, value: object) -> None:
    *tables, last = key.split(".")
    for name in tables:
        inner = content.get(name)
        content[name] = content = inner if isinstance(inner, dict) else {}
    content[last] = value


def _seed(content: Changes) -> object:
    run = content.get("run")
    return run.get("seed", 1) if isinstance(run, dict) else 1
