"""What must be there and what must agree in a file, once every value by itself is right.

Works on whatever survived the schema; each check yields (dotted key, what was given, what is
allowed). Bounds in wavelengths are taken at the middle of the band.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

from models.conventions import C0
from optim.faults import shown
from optim.schema import BandTable, BuildTable, DesignFile, SpecFile, Table
from optim.units import FILE_KEYS

__all__ = ["design_faults", "middle_wavelength_mm", "spec_faults"]

Complaint = tuple[str, str, str]

BAND_RATIO: Final = 4.0
"""Highest over lowest frequency allowed; no single dipole covers more."""

IN_WAVELENGTHS: Final = {
    "spacing": (0.02, 3.0),
    "plate_width": (0.05, 8.0),
    "plate_length": (0.05, 8.0),
    "dipole_length": (0.1, 0.95),
    "dipole_diameter": (1e-5, 0.1),
    "length_step": (0.0, 0.25),
    "tolerance": (0.0, 0.25),
}
"""Lengths allowed, wavelengths. A dipole of a whole wavelength has no current at its gap."""


def middle_wavelength_mm(band: BandTable) -> float | None:
    """Return the wavelength (mm) at the middle of the band, None if the band is not known."""
    if band.low_mhz is None or band.high_mhz is None:
        return None
    return C0 / ((band.low_mhz + band.high_mhz) / 2.0) / 1000.0


def spec_faults(spec: SpecFile) -> Iterator[Complaint]:
    """Yield what is missing or at odds in a requirements file."""
    yield from _band(spec.band)
    yield from _require(spec)
    yield from _size(spec)
    yield from _goals(spec)
    wavelength = middle_wavelength_mm(spec.band)
    if wavelength is not None:
        for variable, key in FILE_KEYS.items():
            if variable == "apex_angle":
                continue
            yield from _length(f"search.{key}", variable, getattr(spec.search, key), wavelength)
            tolerance = getattr(spec.tolerance, key)
            yield from _length(f"tolerance.{key}", "tolerance", tolerance, wavelength)
        yield from _build(spec.build, wavelength)


def design_faults(design: DesignFile) -> Iterator[Complaint]:
    """Yield what is missing or at odds in a design file."""
    yield from _band(design.band)
    yield from _missing("reflector", design.reflector, tuple(type(design.reflector).model_fields))
    yield from _missing("dipole", design.dipole, ("length_mm", "diameter_mm"))
    wavelength = middle_wavelength_mm(design.band)
    if wavelength is not None:
        for key in ("spacing_mm", "plate_width_mm", "plate_length_mm"):
            value = getattr(design.reflector, key)
            yield from _length(f"reflector.{key}", key.removesuffix("_mm"), value, wavelength)
        for key in ("length_mm", "diameter_mm"):
            variable = "dipole_" + key.removesuffix("_mm")
            yield from _length(f"dipole.{key}", variable, getattr(design.dipole, key), wavelength)
        yield from _build(design.build, wavelength)
    yield from _clearance(design)
    thick, other = design.dipole.diameter_mm, design.build.dipole_diameter_mm
    if thick is not None and other is not None and thick != other:
        yield (
            "build.dipole_diameter_mm",
            shown(other),
            f"left out, or dipole.diameter_mm, {thick:g}",
        )


def _clearance(design: DesignFile) -> Iterator[Complaint]:
    """Find a dipole that touches the plates."""
    angle, spacing = design.reflector.apex_angle_deg, design.reflector.spacing_mm
    diameter = design.dipole.diameter_mm
    if angle is None or spacing is None or diameter is None:
        return
    least = diameter / 2.0 / math.sin(math.radians(angle / 2.0))
    if spacing <= least:
        allowed = f"a number above {least:.4g}, where the dipole clears the plates"
        yield "reflector.spacing_mm", shown(spacing), allowed


def _missing(name: str, table: Table, keys: tuple[str, ...]) -> Iterator[Complaint]:
    for key in keys:
        if getattr(table, key) is None:
            yield f"{name}.{key}", "nothing", "a number; this key must be there"


def _band(band: BandTable) -> Iterator[Complaint]:
    yield from _missing("band", band, ("low_mhz", "high_mhz"))
    low, high, points = band.low_mhz, band.high_mhz, band.points
    if low is None or high is None:
        return
    if low > high:
        yield "band.high_mhz", shown(high), f"a number not below band.low_mhz, {low:g}"
    elif high > BAND_RATIO * low:
        yield "band.high_mhz", shown(high), f"at most {BAND_RATIO:g} times band.low_mhz, {low:g}"
    if points is not None and low == high and points != 1:
        yield "band.points", shown(points), "1, or left out, as low_mhz is high_mhz"
    if points == 1 and low < high:
        yield "band.points", "1", "2 or more, as the band has two ends"


def _require(spec: SpecFile) -> Iterator[Complaint]:
    if not spec.require.model_fields_set:
        keys = ", ".join(type(spec.require).model_fields)
        yield "require", "nothing", f"at least one requirement: {keys}"
    for key in type(spec.require).model_fields:
        table = getattr(spec.require, key)
        if not isinstance(table, Table):
            continue
        limits = [name for name in ("min", "max") if name in type(table).model_fields]
        if all(getattr(table, name) is None for name in limits):
            wanted = " or ".join(limits)
            yield f"require.{key}.{limits[0]}", "nothing", f"a number for {wanted}"
    for key in ("beamwidth_h_deg", "beamwidth_e_deg"):
        beam = getattr(spec.require, key)
        if beam is not None and None not in (beam.min, beam.max) and beam.min > beam.max:
            allowed = f"a number not above require.{key}.max, {beam.max:g}"
            yield f"require.{key}.min", shown(beam.min), allowed
    match, reference = spec.require.vswr, spec.build.reference_ohm
    agreed = None if match is None else match.reference_ohm
    if agreed is not None and reference is not None and reference != agreed:
        allowed = f"left out, or require.vswr.reference_ohm, {agreed:g}"
        yield "build.reference_ohm", shown(reference), allowed


def _size(spec: SpecFile) -> Iterator[Complaint]:
    for key in type(spec.size).model_fields:
        cap = getattr(spec.size, key)
        if cap is not None:
            yield from _missing(f"size.{key}", cap, tuple(type(cap).model_fields))


def _goals(spec: SpecFile) -> Iterator[Complaint]:
    small, large = spec.goals.minimise, spec.goals.maximise
    if spec.goals.model_fields_set and not small and not large:
        yield "goals", "no goal", "at least one name in minimise or maximise, or no [goals] at all"
    seen: set[str] = set()
    for key, names in (("minimise", small or []), ("maximise", large or [])):
        for place, name in enumerate(names):
            if name in seen:
                yield f"goals.{key}[{place}]", shown(name), "each goal once"
            seen.add(name)
    wanted = {"goals.maximise": "yield" in seen, "tolerance.min_yield": spec.tolerance.min_yield}
    if any(wanted.values()) and not any(getattr(spec.tolerance, k) for k in FILE_KEYS.values()):
        key = next(key for key, asked in wanted.items() if asked)
        allowed = f"with a ± above 0 in [tolerance]: {', '.join(FILE_KEYS.values())}"
        yield key, "a yield without a tolerance", allowed


def _build(build: BuildTable, wavelength: float) -> Iterator[Complaint]:
    for variable in ("dipole_diameter", "length_step"):
        key = f"{variable}_mm"
        yield from _length(f"build.{key}", variable, getattr(build, key), wavelength)


def _length(
    key: str, variable: str, value: float | tuple[float, float] | None, wavelength: float
) -> Iterator[Complaint]:
    if value is None:
        return
    low, high = (bound * wavelength for bound in IN_WAVELENGTHS[variable])
    ends = value if isinstance(value, tuple) else (value, value)
    if ends[0] < low or ends[1] > high:
        given = shown(list(value) if isinstance(value, tuple) else value)
        share = "{:g} to {:g} wavelengths".format(*IN_WAVELENGTHS[variable])
        yield key, given, f"{low:.4g} to {high:.4g} mm ({share} at mid band)"
