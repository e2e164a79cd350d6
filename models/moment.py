"""`moment`: the corner and its dipole by a 3-D integral equation, at the speed of a search.

Far fields on both cuts, input impedance (Ω) and efficiency of plates of any size with a thin-wire
dipole, for any apex angle up to the flat sheet. Each pair of design and frequency is solved on
coarse grids whose cell counts stand in exact proportion; far field and impedance are extrapolated
to a vanishing cell. Disagreement of the grids is the model's doubt.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980), plates; Richmond & Geary, IEEE Trans. AP-23
(1975), dipole; Richardson 1911, extrapolation.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from models.build import Build
from models.conventions import ETA0, ComplexArray, FloatArray, wavenumber
from models.geometry import Reflectors
from models.moment_kernel import near_reach
from models.moment_plates import Grid, grid_cells
from models.moment_wire import Wire
from models.pattern import CUT_ANGLES, Pattern

__all__ = ["radiate"]

PROPORTION: Final = (2, 3, 4)
"""Cell counts of the grids, in multiples of a design's base count."""

DENSITY: Final = 3.0
"""Base cells a wavelength."""

MODES: Final = 5
"""Currents on half the dipole."""

BATCH_NUMBERS: Final = 2_000_000
"""Complex numbers in the matrices of one batch: bounds the memory."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Case:
    """Pairs of one design and one frequency, each (n,); SI, radians."""

    k: FloatArray
    apex_angle: FloatArray
    spacing: FloatArray
    plate_width: FloatArray
    plate_length: FloatArray
    dipole_length: FloatArray
    dipole_radius: FloatArray

    @classmethod
    def of(cls, reflectors: Reflectors, k: FloatArray) -> Case:
        """Return all pairs of designs and wavenumbers, designs first."""
        n = k.size
        return cls(
            k=np.tile(k, len(reflectors)),
            apex_angle=np.repeat(reflectors.apex_angle, n),
            spacing=np.repeat(reflectors.spacing, n),
            plate_width=np.repeat(reflectors.plate_width, n),
            plate_length=np.repeat(reflectors.plate_length, n),
            dipole_length=np.repeat(reflectors.dipole_length, n),
            dipole_radius=np.repeat(reflectors.dipole_diameter / 2.0, n),
        )

    def rows(self, index: np.ndarray) -> Case:
        """Return the pairs at `index`."""
        return Case(**{name: value[index] for name, value in vars(self).items()})


@dataclass(frozen=True, kw_only=True, eq=False)
class Response:
    """The plates' answer to the wire's modes at 1 A: fields (n, n_angle, m), impedance (n, m, m)."""

    h_field: ComplexArray
    e_field: ComplexArray
    impedance: ComplexArray
    loss: FloatArray


def radiate(reflectors: Reflectors, frequencies_hz: FloatArray, build: Build) -> Pattern:
    """Return the pattern of every design (n) at every frequency (n_freq).

    Parameters
    ----------
    reflectors : Reflectors
        n designs.
    frequencies_hz : (n_freq,)
        Hz.
    build : Build
        Its conductivity sets the loss of plates and dipole.
    """
    k = wavenumber(frequencies_hz)
    case = Case.of(reflectors, k)
    shape, angles = (len(reflectors), k.size), CUT_ANGLES
    h_field = np.empty((case.k.size, angles.size), dtype=np.complex128)
    e_field = np.empty_like(h_field)
    numbers = {
        name: np.empty(case.k.size)
        for name in ("power", "resistance", "reactance", "efficiency", "doubt_db")
    }
    keys, group = np.unique(_grid_key(case), axis=0, return_inverse=True)
    for index, (base_s, base_z, reach) in enumerate(keys):
        members = np.flatnonzero(group.reshape(-1) == index)
        unknowns = base_s * base_z * max(PROPORTION) ** 2
        size = max(1, BATCH_NUMBERS // int(unknowns) ** 2)
        for start in range(0, members.size, size):
            rows = members[start : start + size]
            part = _solve(case.rows(rows), (int(base_s), int(base_z)), int(reach), build)
            h_field[rows], e_field[rows] = part.h_field, part.e_field
            for name, value in numbers.items():
                value[rows] = getattr(part, name)
    return Pattern(
        angles=angles,
        h_field=h_field.reshape(*shape, -1),
        e_field=e_field.reshape(*shape, -1),
        **{name: value.reshape(shape) for name, value in numbers.items()},
    )


def _grid_key(case: Case) -> np.ndarray:
    """Return base counts along s and z and the near class, (n, 3) integers."""
    waves = case.k / (2.0 * np.pi)
    base_s = np.maximum(np.ceil(DENSITY * case.plate_width * waves - 1e-9), 1)
    base_z = np.maximum(np.ceil(DENSITY * case.plate_length * waves - 1e-9), 2)
    return np.stack([base_s, base_z, near_reach(case.apex_angle)], axis=1).astype(int)


def _solve(case: Case, base: tuple[int, int], reach: int, build: Build) -> Pattern:
    """Return the pattern of pairs on grids of equal counts, without the frequency axis."""
    wire = Wire(modes=MODES, k=case.k, length=case.dipole_length, radius=case.dipole_radius)
    responses = [_respond(case, wire, (f * base[0], f * base[1]), reach) for f in PROPORTION]
    whole = _extrapolate(responses, _weights(PROPORTION, (0, 1, 2)))
    check = _extrapolate(responses[1:], _weights(PROPORTION[1:], (0, 2)))
    angles = CUT_ANGLES
    currents, resistance, reactance = _drive(wire, whole.impedance)
    h_field, e_field = _total(case, wire, whole, currents, angles)
    power = np.pi / ETA0 * resistance
    currents_2, resistance_2, _ = _drive(wire, check.impedance)
    boresight_2 = _total(case, wire, check, currents_2, angles)[0][:, 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        change = np.abs(boresight_2) ** 2 / np.abs(h_field[:, 0]) ** 2 * resistance / resistance_2
        doubt = np.abs(10.0 * np.log10(change))
    skin = np.sqrt(case.k * ETA0 / (2.0 * build.conductivity))  # √(ωμ/2σ)
    wire_loss = wire.current_square() / (2.0 * np.pi * case.dipole_radius[:, None, None])
    loss = np.einsum("bm,bmn,bn->b", currents.conj(), whole.loss + wire_loss, currents).real * skin
    return Pattern(
        angles=angles,
        h_field=h_field,
        e_field=e_field,
        power=power,
        resistance=resistance + loss,
        reactance=reactance,
        efficiency=resistance / (resistance + loss),
        doubt_db=doubt,
    )


def _respond(case: Case, wire: Wire, counts: tuple[int, int], reach: int) -> Response:
    """Return what the plates do on a grid of `counts` cells."""
    cells = grid_cells(
        *counts,
        k=case.k,
        apex_angle=case.apex_angle,
        plate_width=case.plate_width,
        plate_length=case.plate_length,
    )
    grid = Grid(cells=cells)
    voltages = grid.voltages(wire, case.spacing)
    currents: ComplexArray = np.linalg.solve(grid.matrix(reach), voltages)
    h_field, e_field = grid.cuts(currents, CUT_ANGLES)
    return Response(
        h_field=h_field,
        e_field=e_field,
        # The voltages hold a quarter of the antenna; the dipole feels the field against its own.
        impedance=-4.0 * voltages.swapaxes(1, 2) @ currents,
        loss=grid.current_square(currents),
    )


def _weights(counts: tuple[int, ...], powers: tuple[float, ...]) -> FloatArray:
    """Return what each grid weighs in the limit of a series in these powers of the cell."""
    cell = 1.0 / np.asarray(counts, dtype=np.float64)
    rows = cell[None, :] ** np.asarray(powers, dtype=np.float64)[:, None]
    return np.asarray(np.linalg.solve(rows, np.eye(cell.size)[:, 0]))


def _extrapolate(responses: list[Response], weights: FloatArray) -> Response:
    """Return the weighted sum of fields and impedance; the loss of the finest grid."""

    def limit(name: str) -> ComplexArray:
        parts = (w * getattr(r, name) for w, r in zip(weights, responses, strict=True))
        return np.asarray(sum(parts))

    return Response(
        h_field=limit("h_field"),
        e_field=limit("e_field"),
        impedance=limit("impedance"),
        loss=responses[-1].loss,
    )


def _drive(wire: Wire, coupled: ComplexArray) -> tuple[ComplexArray, FloatArray, FloatArray]:
    """Return mode currents for 1 A at the gap, and the input impedance there, Ω."""
    gap = np.zeros((wire.k.size, wire.modes, 1))
    gap[:, 0] = 1.0
    currents: ComplexArray = np.linalg.solve(wire.impedance() + coupled, gap)[..., 0]
    impedance: ComplexArray = 1.0 / currents[:, 0]
    return np.asarray(currents * impedance[:, None]), impedance.real, impedance.imag


def _total(
    case: Case, wire: Wire, response: Response, currents: ComplexArray, angles: FloatArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return f of plates and dipole together on both cuts, (n, n_angle) each."""
    ahead = np.exp(1j * (case.k * case.spacing)[:, None] * np.cos(angles))[..., None]
    h_field = response.h_field + wire.far_field(np.zeros(1)) * ahead
    e_field = response.e_field + wire.far_field(np.sin(angles)) * ahead
    weights = currents[..., None]
    return (h_field @ weights)[..., 0], (e_field @ weights)[..., 0]
