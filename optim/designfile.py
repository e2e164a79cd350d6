"""Design files: one corner reflector with its band and build; degrees and mm in the file.

`search` writes them, `analyse` reads them. What is written reads back as the same numbers.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from models import Build, Reflectors, Terms
from optim.checks import design_faults
from optim.faults import read_toml
from optim.requirements import (
    FOLDED_RATIO,
    Band,
    band_of,
    build_of,
    impedance_ratio,
    raise_faults,
)
from optim.schema import DesignFile, parse
from optim.toml_text import quoted
from optim.units import from_file, to_file
from optim.values import title_of

__all__ = ["Design", "read_design", "write_design"]

_REFLECTOR_KEYS = {
    "apex_angle": "apex_angle_deg",
    "spacing": "spacing_mm",
    "plate_width": "plate_width_mm",
    "plate_length": "plate_length_mm",
}
_DIPOLE_KEYS = {"dipole_length": "length_mm", "dipole_diameter": "diameter_mm"}


@dataclass(frozen=True, eq=False)
class Design:
    """One design.

    Parameters
    ----------
    title : str
    reflectors : Reflectors
        One row.
    band : Band
    build : Build
    terms : Terms
        Feed and reference impedance are those of the file; rear sector and envelopes are not in it.
    """

    title: str
    reflectors: Reflectors
    band: Band
    build: Build = field(default_factory=Build)
    terms: Terms = field(default_factory=Terms)


def read_design(path: Path) -> Design:
    """Return the design in the file at `path`.

    Raises
    ------
    SpecError
        Holding every fault of the file.
    """
    source = read_toml(path)
    file, faults = parse(DesignFile, source)
    raise_faults(source, faults, design_faults(file))
    dimensions = {
        name: from_file(name, getattr(table, key))
        for table, keys in ((file.reflector, _REFLECTOR_KEYS), (file.dipole, _DIPOLE_KEYS))
        for name, key in keys.items()
    }
    return Design(
        title=file.title or title_of(path),
        reflectors=Reflectors(**dimensions),
        band=band_of(file.band),
        build=build_of(file.build),
        terms=Terms(
            impedance_ratio=impedance_ratio(file.build),
            reference_ohm=file.build.reference_ohm or Terms.reference_ohm,
        ),
    )


def write_design(path: Path, design: Design) -> None:
    """Write `design` to `path`, in place of what is there.

    Raises
    ------
    OSError
        Where `path` cannot be written.
    """
    path.write_text(design_text(design), encoding="utf-8", newline="\n")


def design_text(design: Design) -> str:
    """Return the design file of `design`."""
    row = {name: float(column[0]) for name, column in vars(design.reflectors).items()}
    band, build, terms = design.band, design.build, design.terms
    feed = "folded" if terms.impedance_ratio == FOLDED_RATIO else "plain"
    tables: dict[str, dict[str, float | str]] = {
        "reflector": {key: to_file(name, row[name]) for name, key in _REFLECTOR_KEYS.items()},
        "dipole": {key: to_file(name, row[name]) for name, key in _DIPOLE_KEYS.items()},
        "band": {
            "low_mhz": _mhz(band.low_hz),
            "high_mhz": _mhz(band.high_hz),
            "points": band.points,
        },
        "build": {
            "sheet_thickness_mm": to_file("sheet_thickness", build.sheet_thickness),
            "sheet_density_kg_m3": build.sheet_density,
            "conductivity_s_m": build.conductivity,
            "feed": feed,
            "reference_ohm": terms.reference_ohm,
        },
    }
    lines = [f"title = {quoted(design.title)}"]
    for table, values in tables.items():
        lines += ["", f"[{table}]"]
        lines += [f"{key} = {_value(value)}" for key, value in values.items()]
    return "\n".join(lines) + "\n"


def _mhz(frequency: float) -> float:
    """Return Hz as MHz, the shortest number that reads back the same."""
    for digits in range(1, 17):
        short = float(f"{frequency / 1e6:.{digits}g}")
        if 1e6 * short == frequency:
            return short
    return frequency / 1e6


def _value(value: float | str) -> str:
    if isinstance(value, str):
        return quoted(value)
    # TOML wants a digit on both sides of the point and takes 1e7 for a number with a fraction.
    return repr(int(value)) if value == int(value) and abs(value) < 1e15 else repr(float(value))
