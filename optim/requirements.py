"""What the antenna must do, as read from a requirements file; SI and radians inside.

Limits stay in the unit of their key, because margins are reported in it. What the file leaves out
is derived here from the band where it is a single number; ranges left out are derived by
`optim.space`.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Final, Literal

import numpy as np

from models import MODELS, Build, Terms
from models.conventions import C0, FloatArray
from optim.checks import spec_faults
from optim.faults import Fault, Source, SpecError, read_toml
from optim.schema import BandTable, BuildTable, RequireTable, SizeTable, SpecFile, parse
from optim.units import FILE_KEYS, from_file
from optim.values import title_of

__all__ = [
    "Band",
    "Fault",
    "Goal",
    "Limit",
    "Requirements",
    "RunSettings",
    "SpecError",
    "default_model",
    "read_requirements",
    "understood",
]

Sense = Literal["min", "max"]

BAND_STEP: Final = 0.06
"""Largest derived step between neighbouring band points over the lowest frequency."""

FOLDED_RATIO: Final = 4.0
"""Terminal impedance of a folded dipole of two equal wires over that of the plain one."""

DEFAULT_RESISTANCE_OHM: Final = 10.0
"""A feed of lower resistance cannot be matched by a workshop; holds unless the file says else."""

DEFAULT_WIND_SPEED: Final = 40.0
"""m/s; only ranks designs where wind load is a goal and no cap names a speed."""

ROD_DIAMETERS_MM: Final = np.array(
    [0.1, 0.2, 0.3, 0.5, 1, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10, 12, 16, 20, 25, 32, 40, 50, 80, 120]
)
"""Rods and tubes as sold by the metre (common practice)."""

LENGTH_STEPS_MM: Final = np.array([0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10])


@dataclass(frozen=True)
class Band:
    """Frequencies at which everything is checked: `points` from `low_hz` to `high_hz`, both in."""

    low_hz: float
    high_hz: float
    points: int

    def frequencies(self) -> FloatArray:
        """Return the band points, Hz, (points,)."""
        return np.linspace(self.low_hz, self.high_hz, self.points)

    def refined(self) -> Band:
        """Return the band on a grid twice as fine."""
        return Band(self.low_hz, self.high_hz, 2 * self.points - 1)

    def split(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return the band points to look at first, the others, and those between them, Hz.

        Both edges and the middle come first; a design that fails there needs no more. Together
        they are a grid twice as fine.
        """
        points = self.refined().frequencies()
        asked = np.arange(points.size) % 2 == 0
        first = np.zeros(points.size, dtype=bool)
        first[[0, 2 * (self.points // 2), -1]] = True
        return points[first], points[asked & ~first], points[~asked]

    @property
    def middle_hz(self) -> float:
        """Middle of the band, Hz."""
        return (self.low_hz + self.high_hz) / 2.0


@dataclass(frozen=True)
class Limit:
    """One bound: `figure` (of `models.Figures`, or a size) against `value` in the key's unit."""

    key: str
    figure: str
    sense: Sense
    value: float
    label: str

    @property
    def scale(self) -> float:
        """Step of a margin that weighs as much as 1 dB does, in the key's unit."""
        if self.key.endswith("_deg"):
            return 3.0
        if self.key == "vswr":
            return 0.2
        if self.key.endswith(("_mm", "_m2", "_kg", "_n", "_ohm")):
            return 0.05 * abs(self.value) or 1.0
        return 1.0

    def margins(self, values: FloatArray) -> FloatArray:
        """Return how far `values` are inside, in the key's unit; below 0 is outside."""
        return values - self.value if self.sense == "min" else self.value - values

    def at(self, margin: float) -> float:
        """Return the value whose margin is `margin`."""
        return self.value + margin if self.sense == "min" else self.value - margin


@dataclass(frozen=True)
class Goal:
    """One objective: its name in the file, and whether small ("min") or large ("max") is good."""

    name: str
    sense: Sense


@dataclass(frozen=True)
class RunSettings:
    """Settings of the search; `prove` is None where the file says "none"."""

    population: int
    generations: int
    seed: int
    scout: str
    prove: str | None


@dataclass(frozen=True)
class Requirements:
    """A requirements file, understood.

    Parameters
    ----------
    title : str
    band : Band
    limits : tuple of Limit
        Every requirement, every size cap, and the least feed resistance.
    terms : Terms
        Rear sector, reference impedance, feed and envelopes.
    build : Build
    wind_speed : float
        m/s, for wind load.
    dipole_diameter, length_step : float
        m.
    angle_step : float
        Radians.
    ranges : dict
        Variable to (low, high), m or radians; None where it is to be derived; low = high is fixed.
    tolerance : dict
        Variable to ± deviation of the workshop, m or radians; only those given.
    min_yield : float, optional
        Share of the antennas built that must meet the limits, 0 to 1.
    goals : tuple of Goal
    run : RunSettings
    derived : frozenset of str
        Dotted keys left out whose single value was derived here.
    path, text, sha256
        The file and its content.
    """

    title: str
    band: Band
    limits: tuple[Limit, ...]
    terms: Terms
    build: Build
    wind_speed: float
    dipole_diameter: float
    length_step: float
    angle_step: float
    ranges: dict[str, tuple[float, float] | None]
    tolerance: dict[str, float]
    min_yield: float | None
    goals: tuple[Goal, ...]
    run: RunSettings
    derived: frozenset[str]
    path: Path
    text: str
    sha256: str

    @property
    def needs_match(self) -> bool:
        """Whether a figure is asked for that only a model with an honest match can give."""
        asked = {limit.key for limit in self.limits} | {goal.name for goal in self.goals}
        return bool(asked & {"vswr", "realized_gain_dbi", "realized_gain"})


def read_requirements(path: Path) -> Requirements:
    """Return the requirements file at `path`, understood.

    Raises
    ------
    SpecError
        Holding every fault of the file.
    """
    return understood(read_toml(path), path)


def understood(source: Source, path: Path) -> Requirements:
    """Return the requirements that `source`, read from `path`, holds; `source` is used up.

    Raises
    ------
    SpecError
        Holding every fault of the file.
    """
    spec, faults = parse(SpecFile, source)
    raise_faults(source, faults, spec_faults(spec))
    band = band_of(spec.band)
    build, reference = spec.build, spec.build.reference_ohm
    require = spec.require
    if require.vswr is not None:
        reference = require.vswr.reference_ohm or reference
    rear = None if require.front_to_back_db is None else require.front_to_back_db.rear_sector_deg
    wavelength_mm = 1e3 * C0 / band.middle_hz
    diameter = build.dipole_diameter_mm or nearest(ROD_DIAMETERS_MM, wavelength_mm / 100.0)
    step = build.length_step_mm or nearest(LENGTH_STEPS_MM, wavelength_mm / 300.0)
    wind = None if spec.size.wind_load_n is None else spec.size.wind_load_n.wind_speed_m_s
    return Requirements(
        title=spec.title or title_of(path),
        band=band,
        limits=tuple(_limits(spec)),
        terms=Terms(
            impedance_ratio=impedance_ratio(build),
            reference_ohm=reference or Terms.reference_ohm,
            rear_sector=float(np.radians(30.0 if rear is None else rear)),
            mask_h=_envelope(require.mask_h),
            mask_e=_envelope(require.mask_e),
        ),
        build=build_of(build),
        wind_speed=wind or DEFAULT_WIND_SPEED,
        dipole_diameter=from_file("dipole_diameter", diameter),
        length_step=from_file("length_step", step),
        angle_step=from_file("apex_angle", build.angle_step_deg or 1.0),
        ranges={name: _range(name, getattr(spec.search, key)) for name, key in FILE_KEYS.items()},
        tolerance={
            name: from_file(name, getattr(spec.tolerance, key))
            for name, key in FILE_KEYS.items()
            if getattr(spec.tolerance, key) is not None
        },
        min_yield=spec.tolerance.min_yield,
        goals=_goals(spec),
        run=_run(spec),
        derived=frozenset(
            f"{table}.{key}"
            for table, key in (
                ("band", "points"),
                ("build", "dipole_diameter_mm"),
                ("build", "length_step_mm"),
                ("build", "angle_step_deg"),
            )
            if getattr(getattr(spec, table), key) is None
        ),
        path=path,
        text=source.text,
        sha256=source.sha256,
    )


def default_model(*preferred: str) -> str:
    """Return the first of `preferred` that exists, else the last of the ladder."""
    return next((name for name in preferred if name in MODELS), list(MODELS)[-1])


def raise_faults(
    source: Source, faults: dict[str, Fault], complaints: Iterable[tuple[str, str, str]]
) -> None:
    """Raise every fault of a file at once, if there is one.

    A complaint about a key is dropped where a fault at, above or below that key explains it.
    """
    found = dict(faults)
    for key, given, allowed in complaints:
        if not any(_touch(key, known) for known in faults):
            found.setdefault(f"{key} {allowed}", Fault(source.name, key, given, allowed))
    if found:
        raise SpecError(found.values())


def _touch(one: str, other: str) -> bool:
    short, long = sorted((one, other), key=len)
    return long == short or long.startswith((f"{short}.", f"{short}["))


def band_of(table: BandTable) -> Band:
    """Return the band of a checked table, its points derived where left out."""
    low, high = 1e6 * (table.low_mhz or 0.0), 1e6 * (table.high_mhz or 0.0)
    if table.points is not None:
        return Band(low, high, table.points)
    steps = int(np.ceil((high - low) / (BAND_STEP * low) - 1e-9))
    return Band(low, high, 1 if low == high else max(3, steps + 1 + steps % 2))


def build_of(table: BuildTable) -> Build:
    """Return the material of a checked table, usual values where left out."""
    thickness = table.sheet_thickness_mm
    return Build(
        sheet_thickness=Build.sheet_thickness if thickness is None else thickness / 1000.0,
        sheet_density=table.sheet_density_kg_m3 or Build.sheet_density,
        conductivity=table.conductivity_s_m or Build.conductivity,
    )


def impedance_ratio(table: BuildTable) -> float:
    """Return the terminal impedance over that of a plain dipole."""
    return FOLDED_RATIO if table.feed == "folded" else 1.0


def nearest(choices: FloatArray, value: float) -> float:
    """Return the one of `choices` nearest to `value` by ratio."""
    return float(choices[np.abs(np.log(choices / value)).argmin()])


def _limits(spec: SpecFile) -> Iterator[Limit]:
    require = spec.require
    for key in RequireTable.model_fields:
        wanted = getattr(require, key)
        if key in {"mask_h", "mask_e"}:
            if wanted is not None:
                yield Limit(key, f"{key}_db", "max", 0.0, key)
            continue
        low, high = getattr(wanted, "min", None), getattr(wanted, "max", None)
        if key == "resistance_ohm" and wanted is None:
            low = DEFAULT_RESISTANCE_OHM
        if low is not None:
            yield Limit(key, key, "min", low, f"{key}.min")
        if high is not None:
            yield Limit(key, key, "max", high, f"{key}.max")
    for key in SizeTable.model_fields:
        cap = getattr(spec.size, key)
        if cap is not None:
            yield Limit(key, key.rpartition("_")[0], "max", cap.max, f"{key}.max")


def _goals(spec: SpecFile) -> tuple[Goal, ...]:
    if not spec.goals.model_fields_set:
        return (Goal("frontal_area", "min"), Goal("gain", "max"))
    small = tuple(Goal(name, "min") for name in spec.goals.minimise or [])
    return small + tuple(Goal(name, "max") for name in spec.goals.maximise or [])


def _run(spec: SpecFile) -> RunSettings:
    run = spec.run
    prove = run.prove or default_model("moment", "modal", "ray")
    return RunSettings(
        population=run.population or 100,
        generations=run.generations or 60,
        seed=1 if run.seed is None else run.seed,
        scout=run.scout or default_model("ray", "moment"),
        prove=None if prove == "none" else prove,
    )


def _range(name: str, given: tuple[float, float] | None) -> tuple[float, float] | None:
    return None if given is None else (from_file(name, given[0]), from_file(name, given[1]))


def _envelope(
    mask: tuple[tuple[float, float], ...] | None,
) -> tuple[tuple[float, float], ...] | None:
    return mask and tuple((float(np.radians(angle)), level) for angle, level in mask)
