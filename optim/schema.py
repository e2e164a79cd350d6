"""The tables and keys of the TOML files, each key with what it allows; units are the suffixes.

Every key is optional here: what must be there, and what must agree with what, is judged afterwards
on whatever survived (`parse` drops the values it refuses), so that one error names all faults.
Ranges are wide on purpose: they keep out slips of the pen, not bold designs.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Annotated, Any, Final, TypeVar, get_args

from pydantic import BaseModel, BeforeValidator, ConfigDict, ValidationError
from pydantic_core import ErrorDetails

from models import MODELS
from optim.faults import Fault, Source, SpecError, dotted, shown
from optim.values import choice, count, mask, near_miss, number, span, title

__all__ = [
    "BandTable",
    "BuildTable",
    "DesignFile",
    "SpecFile",
    "Table",
    "Title",
    "parse",
]

GOALS_SMALL: Final = (
    "frontal_area",
    "volume",
    "longest_side",
    "sheet_area",
    "mass",
    "wind_load",
    "vswr",
)
"""Goals that only make sense as small as can be."""
GOALS_LARGE: Final = ("gain", "realized_gain", "front_to_back", "yield")
"""Goals that only make sense as large as can be."""
GOALS_EITHER: Final = ("beamwidth_h", "beamwidth_e")
"""Goals that make sense both ways."""


KINDS: Final = {
    "require": "a requirements file",
    "reflector": "a design file",
    "spec": "a study file",
}
"""Kinds of files by the key that tells them apart."""


class Table(BaseModel):
    """A TOML table: no other keys, no conversions."""

    model_config = ConfigDict(extra="forbid", strict=True)


Level = Annotated[float, number(-200.0, 200.0)]
Beamwidth = Annotated[float, number(0.1, 360.0)]
Ohm = Annotated[float, number(1.0, 10_000.0)]
Angles = Annotated[tuple[float, float], span(10.0, 180.0)]
Lengths = Annotated[tuple[float, float], span(0.01, 1e6)]
Length = Annotated[float, number(0.01, 1e6)]
Mask = Annotated[tuple[tuple[float, float], ...], BeforeValidator(mask)]
Title = Annotated[str, BeforeValidator(title)]


class BandTable(Table):
    """`[band]`."""

    low_mhz: Annotated[float, number(1.0, 300_000.0)] | None = None
    high_mhz: Annotated[float, number(1.0, 300_000.0)] | None = None
    points: Annotated[int, count(1, 201)] | None = None


class AtLeast(Table):
    """`{ min = … }` for a level in dB."""

    min: Level | None = None


class FrontToBack(AtLeast):
    """`{ min = …, rear_sector_deg = … }`."""

    rear_sector_deg: Annotated[float, number(0.0, 90.0)] | None = None


class Between(Table):
    """`{ min = …, max = … }` for a beamwidth."""

    min: Beamwidth | None = None
    max: Beamwidth | None = None


class SideLobe(Table):
    """`{ max = … }`: dB relative to boresight, so not above 0."""

    max: Annotated[float, number(-200.0, 0.0, " (dB relative to boresight)")] | None = None


class Match(Table):
    """`{ max = …, reference_ohm = … }`."""

    max: Annotated[float, number(1.0, 1000.0)] | None = None
    reference_ohm: Ohm | None = None


class Resistance(Table):
    """`{ min = … }`."""

    min: Annotated[float, number(0.0, 10_000.0)] | None = None


class RequireTable(Table):
    """`[require]`."""

    gain_dbi: AtLeast | None = None
    realized_gain_dbi: AtLeast | None = None
    beamwidth_h_deg: Between | None = None
    beamwidth_e_deg: Between | None = None
    front_to_back_db: FrontToBack | None = None
    sidelobe_db: SideLobe | None = None
    vswr: Match | None = None
    resistance_ohm: Resistance | None = None
    mask_h: Mask | None = None
    mask_e: Mask | None = None


class Cap(Table):
    """`{ max = … }` for a size."""

    max: Annotated[float, number(1e-6, 1e6)] | None = None


class WindCap(Cap):
    """`{ max = …, wind_speed_m_s = … }`."""

    wind_speed_m_s: Annotated[float, number(1.0, 120.0)] | None = None


class SizeTable(Table):
    """`[size]`."""

    width_mm: Cap | None = None
    height_mm: Cap | None = None
    depth_mm: Cap | None = None
    frontal_area_m2: Cap | None = None
    mass_kg: Cap | None = None
    wind_load_n: WindCap | None = None


class SearchTable(Table):
    """`[search]`."""

    apex_angle_deg: Angles | None = None
    spacing_mm: Lengths | None = None
    plate_width_mm: Lengths | None = None
    plate_length_mm: Lengths | None = None
    dipole_length_mm: Lengths | None = None


class BuildTable(Table):
    """`[build]`, of requirements and of designs."""

    sheet_thickness_mm: Annotated[float, number(0.01, 100.0)] | None = None
    sheet_density_kg_m3: Annotated[float, number(1.0, 25_000.0)] | None = None
    conductivity_s_m: Annotated[float, number(1e3, 1e9)] | None = None
    dipole_diameter_mm: Length | None = None
    length_step_mm: Annotated[float, number(0.001, 1000.0)] | None = None
    angle_step_deg: Annotated[float, number(0.001, 30.0)] | None = None
    feed: Annotated[str, choice("plain", "folded")] | None = None
    reference_ohm: Ohm | None = None


class ToleranceTable(Table):
    """`[tolerance]`."""

    apex_angle_deg: Annotated[float, number(0.0, 30.0)] | None = None
    spacing_mm: Annotated[float, number(0.0, 1e4)] | None = None
    plate_width_mm: Annotated[float, number(0.0, 1e4)] | None = None
    plate_length_mm: Annotated[float, number(0.0, 1e4)] | None = None
    dipole_length_mm: Annotated[float, number(0.0, 1e4)] | None = None
    min_yield: Annotated[float, number(0.0, 1.0, " (share of the antennas built)")] | None = None


class GoalsTable(Table):
    """`[goals]`."""

    minimise: list[Annotated[str, choice(*GOALS_SMALL, *GOALS_EITHER)]] | None = None
    maximise: list[Annotated[str, choice(*GOALS_LARGE, *GOALS_EITHER)]] | None = None


class RunTable(Table):
    """`[run]`."""

    population: Annotated[int, count(4, 10_000)] | None = None
    generations: Annotated[int, count(1, 10_000)] | None = None
    seed: Annotated[int, count(0, 2**32 - 1)] | None = None
    scout: Annotated[str, choice(*MODELS)] | None = None
    prove: Annotated[str, choice(*MODELS, "none")] | None = None


class SpecFile(Table):
    """A requirements file."""

    title: Title | None = None
    band: BandTable = BandTable()
    require: RequireTable = RequireTable()
    size: SizeTable = SizeTable()
    search: SearchTable = SearchTable()
    build: BuildTable = BuildTable()
    tolerance: ToleranceTable = ToleranceTable()
    goals: GoalsTable = GoalsTable()
    run: RunTable = RunTable()


class ReflectorTable(Table):
    """`[reflector]`."""

    apex_angle_deg: Annotated[float, number(1.0, 180.0)] | None = None
    spacing_mm: Length | None = None
    plate_width_mm: Length | None = None
    plate_length_mm: Length | None = None


class DipoleTable(Table):
    """`[dipole]`."""

    length_mm: Length | None = None
    diameter_mm: Length | None = None


class DesignFile(Table):
    """A design file."""

    title: Title | None = None
    reflector: ReflectorTable = ReflectorTable()
    dipole: DipoleTable = DipoleTable()
    band: BandTable = BandTable()
    build: BuildTable = BuildTable()


FileT = TypeVar("FileT", bound=Table)


def parse(schema: type[FileT], source: Source) -> tuple[FileT, dict[str, Fault]]:
    """Return what is right in `source` and the faults of the rest by dotted key.

    `source.content` is used up: the values that are refused are taken out of it.

    Raises
    ------
    SpecError
        For a file of another kind.
    """
    own = next(mark for mark in KINDS if mark in schema.model_fields)
    if own not in source.content:
        other = next((mark for mark in KINDS if mark in source.content), None)
        if other is not None:
            raise SpecError([Fault(source.name, "", KINDS[other], KINDS[own])])
    try:
        return schema.model_validate(source.content), {}
    except ValidationError as error:
        details = error.errors(include_url=False)
    faults: dict[str, Fault] = {}
    for detail in details:
        key = dotted(detail["loc"])
        given = shown(detail["input"])
        faults[key] = Fault(source.name, key, given, _allowed(schema, detail))
    for detail in details:
        _take_out(source.content, detail["loc"])
    return schema.model_validate(source.content), faults


def _allowed(schema: type[Table], detail: ErrorDetails) -> str:
    kind, place = detail["type"], detail["loc"]
    if kind == "refused":
        return str(detail["ctx"]["allowed"])
    if kind == "extra_forbidden":
        names = list(_table_at(schema, place[:-1]).model_fields)
        hint = near_miss(place[-1], names)
        return "; ".join(["no such key", *hint, "one of " + ", ".join(names)])
    if kind == "list_type":
        return "a list of names"
    names = list(_table_at(schema, place).model_fields)
    return f"a table with {', '.join(names)}, as in {{ {names[0]} = … }}"


def _table_at(schema: type[Table], place: Iterable[int | str]) -> type[Table]:
    table = schema
    for part in place:
        annotation: Any = table.model_fields[str(part)].annotation
        options = (annotation, *get_args(annotation))
        table = next(o for o in options if isinstance(o, type) and issubclass(o, Table))
    return table


def _take_out(content: dict[str, Any], place: tuple[int | str, ...]) -> None:
    """Drop the value at `place`, or the whole list it stands in; it may be gone already."""
    for part in place[:-1]:
        inner = content.get(str(part))
        if not isinstance(inner, dict):
            content.pop(str(part), None)
            return
        content = inner
    content.pop(str(place[-1]), None)
