"""`moment`: the corner and its dipole by a 3-D integral equation, at the speed of a search.

Far fields on both cuts, input impedance (Ω) and efficiency of plates of any size with a thin-wire
dipole, for any apex angle up to the flat sheet. Each pair of design and frequency is solved on
three coarse grids whose cell counts stand in exact proportion, and far field and impedance are
extrapolated to a vanishing cell. Where the grids disagree, or the power radiated is not the power
put in, the pair is solved again on finer grids; what stays in doubt is said in `doubt_db`.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980), plates; Richmond & Geary, IEEE Trans. AP-23
(1975), dipole; Richardson 1911, extrapolation.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from models.build import Build
from models.conventions import ETA0, ComplexArray, FloatArray, decibels, wavenumber
from models.geometry import Reflectors
from models.moment_field import Sky, View, plates_far_field
from models.moment_kernel import near_reach
from models.moment_plates import Grid, grid_cells
from models.moment_wire import Wire, driven_shapes, gap_share, rod, sinusoidal_shape
from models.pattern import CUT_ANGLES, Pattern

__all__ = ["DENSITIES", "ENOUGH_DB", "Answer", "Case", "Feed", "answers", "doubt", "radiate"]

Feed = Literal["solved", "sinusoidal"]
"""The dipole's current: solved with the plates, or imposed."""

PROPORTION: Final = (2, 3, 4)
"""Cell counts of the three grids, in multiples of a design's base count."""

DENSITIES: Final = (1.8, 3.0, 4.5)
"""Base cells a wavelength, at least: the first attempt and the finer ones."""

ENOUGH_DB: Final = 0.05
"""Doubt below which no finer grids are tried."""

VOUCHED_DB: Final = 0.3
"""Doubt above which, after the finest grids, the model does not vouch for its answer."""

BATCH_NUMBERS: Final = 200_000
"""Complex numbers in the matrices of one batch: what a processor's cache holds."""

_NUMBERS: Final = ("power", "resistance", "reactance", "efficiency", "doubt_db")


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
    def pairs(cls, reflectors: Reflectors, k: FloatArray) -> Case:
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

    def counts(self, density: float) -> np.ndarray:
        """Return what pairs of one batch share, (n, 4) integers.

        Base counts along s and z, the near class, and the highest harmonic of the far field.
        """
        waves = self.k / (2.0 * np.pi)

        def cells(size: FloatArray, least: int) -> FloatArray:
            return np.maximum(np.ceil(density * size * waves - 1e-9), least)

        base_s, base_z = cells(self.plate_width, 2), cells(self.plate_length, 2)
        dipole = np.hypot(cells(self.spacing, 1), cells(self.dipole_length, 1) / 2.0)
        reach = np.maximum(np.hypot(base_s, base_z / 2.0), dipole)
        order = np.ceil(2.0 * np.pi * reach / density)
        columns = [base_s, base_z, near_reach(self.apex_angle), order]
        return np.stack(columns, axis=1).astype(int)


@dataclass(frozen=True, kw_only=True, eq=False)
class Response:
    """The plates' answer to each of the wire's shapes at 1 A: fields and impedance, Ω."""

    theta: ComplexArray
    phi: ComplexArray
    impedance: ComplexArray
    square: ComplexArray


def radiate(
    reflectors: Reflectors,
    frequencies_hz: FloatArray,
    build: Build,
    *,
    feed: Feed = "solved",
) -> Pattern:
    """Return the pattern of every design (n) at every frequency (n_freq).

    Parameters
    ----------
    reflectors : Reflectors
        n designs.
    frequencies_hz : (n_freq,)
        Hz.
    build : Build
        Its conductivity sets the loss of plates and dipole.
    feed : {"solved", "sinusoidal"}
        Whether the dipole's current is solved, or imposed as sin(k(h−|z|)).
    """
    k = wavenumber(frequencies_hz)
    case = Case.pairs(reflectors, k)
    shape = (len(reflectors), k.size)
    pattern = Pattern(
        angles=CUT_ANGLES,
        h_field=np.empty((case.k.size, CUT_ANGLES.size), dtype=np.complex128),
        e_field=np.empty((case.k.size, CUT_ANGLES.size), dtype=np.complex128),
        **{name: np.full(case.k.size, np.inf) for name in _NUMBERS},
    )
    names = ("h_field", "e_field", *_NUMBERS)
    open_rows = np.arange(case.k.size)
    for density in DENSITIES:
        counts = case.rows(open_rows).counts(density)
        keys, group = np.unique(counts, axis=0, return_inverse=True)
        for index, key in enumerate(keys):
            members = open_rows[group.reshape(-1) == index]
            unknowns = int(key[0] * key[1]) * PROPORTION[-1] ** 2
            size = max(1, BATCH_NUMBERS // unknowns**2)
            for start in range(0, members.size, size):
                rows = members[start : start + size]
                part = _solve(case.rows(rows), key.tolist(), build, feed)
                for name in names:
                    getattr(pattern, name)[rows] = getattr(part, name)
        open_rows = open_rows[pattern.doubt_db[open_rows] > ENOUGH_DB]
    pattern.doubt_db[~(pattern.doubt_db <= VOUCHED_DB)] = np.inf
    return Pattern(
        angles=CUT_ANGLES,
        **{name: (v := getattr(pattern, name)).reshape(*shape, *v.shape[1:]) for name in names},
    )


def _solve(case: Case, key: list[int], build: Build, feed: Feed) -> Pattern:
    """Return the pattern of pairs on grids of equal counts, without the frequency axis."""
    sky = Sky.of(key[3])
    answer, rough = answers(case, key, feed, sky)
    resistance = answer.impedance.real
    # √(ωμ/2σ) times the currents' squares: the loss is small enough not to change the currents.
    skin = np.sqrt(case.k * ETA0 / (2.0 * build.conductivity))
    loss = skin * answer.square
    h_field, e_field = sky.cuts(answer.theta)
    return Pattern(
        angles=CUT_ANGLES,
        h_field=h_field,
        e_field=e_field,
        power=np.pi / ETA0 * resistance,
        resistance=resistance + loss,
        reactance=answer.impedance.imag,
        efficiency=resistance / (resistance + loss),
        doubt_db=doubt(sky, answer, rough),
    )


def answers(case: Case, key: list[int], feed: Feed, sky: Sky) -> tuple[Answer, Answer]:
    """Return fields towards `sky` and impedance of pairs, from all grids and from the finer two.

    Parameters
    ----------
    case : Case
        n pairs.
    key : list of int
        Their counts, as `Case.counts` gives them.
    feed : {"solved", "sinusoidal"}
    sky : Sky
    """
    base_s, base_z, reach, _ = key
    wire, shapes, gap, own = _dipole(case, feed)
    alone = _alone(case, wire, shapes, own, sky)
    view = View.of(sky, case.apex_angle)
    grids = [
        _respond(case, wire, shapes, view, (f * base_s, f * base_z), reach) for f in PROPORTION
    ]
    return (
        _drive(gap, alone, _limit(grids, (0, 2, 4))),
        _drive(gap, alone, _limit(grids[1:], (0, 2))),
    )


def _dipole(case: Case, feed: Feed) -> tuple[Wire, ComplexArray, ComplexArray, ComplexArray]:
    """Return the wire, its shapes, their currents at the gap and their impedances alone."""
    if feed == "solved":
        wire = rod(k=case.k, length=case.dipole_length, radius=case.dipole_radius)
        modes = wire.impedance()
        shapes = driven_shapes(wire, modes)
        gap = (gap_share(wire)[:, None] @ shapes)[:, 0]
    else:
        wire = Wire(k=case.k, length=case.dipole_length, radius=case.dipole_radius)
        modes, shapes = wire.impedance(), sinusoidal_shape(wire)
        gap = shapes[:, 0]
    return wire, shapes, gap, np.asarray(shapes.swapaxes(1, 2) @ modes @ shapes)


def _alone(case: Case, wire: Wire, shapes: ComplexArray, own: ComplexArray, sky: Sky) -> Response:
    """Return fields, impedance and squared current of the dipole in free space."""
    theta, phi = sky.theta, sky.phi
    path = (case.k * case.spacing)[:, None] * (np.sin(theta) * np.cos(phi))
    rod = shapes.conj().swapaxes(1, 2) @ wire.current_square() @ shapes
    return Response(
        theta=wire.far_field(shapes, np.cos(theta)).swapaxes(1, 2) * np.exp(1j * path)[:, None],
        phi=np.zeros(1, dtype=np.complex128),
        impedance=own,
        square=rod / (2.0 * np.pi * case.dipole_radius[:, None, None]),
    )


def _respond(
    case: Case,
    wire: Wire,
    shapes: ComplexArray,
    view: View,
    counts: tuple[int, int],
    reach: int,
) -> Response:
    """Return what the plates do on a grid of `counts` cells."""
    cells = grid_cells(
        *counts,
        k=case.k,
        apex_angle=case.apex_angle,
        plate_width=case.plate_width,
        plate_length=case.plate_length,
    )
    grid = Grid(cells=cells)
    voltages = grid.voltages(wire, shapes, case.spacing)
    scale = (4.0 * np.pi / ETA0 * case.k / 1j)[:, None, None]
    currents = np.linalg.solve(grid.matrix(reach), scale * voltages).astype(
        np.complex128, copy=False
    )
    theta, phi = plates_far_field(grid, currents, view)
    return Response(
        theta=theta,
        phi=phi,
        # The unknowns are a quarter of the antenna; the dipole feels the field against its own.
        impedance=-4.0 * (voltages.swapaxes(1, 2) @ currents),
        square=grid.current_square(currents),
    )


def _limit(grids: list[Response], powers: tuple[int, ...]) -> Response:
    """Return fields and impedance for a vanishing cell, from a series in these powers of it.

    The loss stays that of the finest grid.
    """
    cell = 1.0 / np.array(PROPORTION[-len(grids) :], dtype=np.float64)
    rows = cell ** np.array(powers, dtype=np.float64)[:, None]
    weights = np.linalg.solve(rows, np.eye(cell.size)[0])

    def limit(name: str) -> ComplexArray:
        parts = [w * getattr(grid, name) for w, grid in zip(weights, grids, strict=True)]
        return np.asarray(sum(parts[1:], start=parts[0]))

    return Response(
        theta=limit("theta"),
        phi=limit("phi"),
        impedance=limit("impedance"),
        square=grids[-1].square,
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class Answer:
    """Dipole and plates together, for 1 A at the gap: fields, impedance, Ω, squared current, A²."""

    theta: ComplexArray
    phi: ComplexArray
    impedance: ComplexArray
    square: FloatArray


def _drive(gap: ComplexArray, alone: Response, plates: Response) -> Answer:
    """Return dipole and plates with the wire's shapes in the shares that 1 A at the gap asks."""
    total = alone.impedance + plates.impedance
    shares = np.linalg.solve(total, gap[..., None])
    impedance = 1.0 / (gap[:, None] @ shares)
    shares = shares * impedance
    square = shares.conj().swapaxes(1, 2) @ (alone.square + plates.square) @ shares
    return Answer(
        theta=np.matmul(shares.swapaxes(1, 2), alone.theta + plates.theta)[:, 0],
        phi=np.matmul(shares.swapaxes(1, 2), plates.phi)[:, 0],
        impedance=np.asarray(impedance[:, 0, 0], dtype=np.complex128),
        square=square[:, 0, 0].real,
    )


def doubt(sky: Sky, answer: Answer, rough: Answer) -> FloatArray:
    """Return how far grids, and radiated and accepted power, disagree, dB."""
    with np.errstate(divide="ignore", invalid="ignore"):
        level = [sky.boresight(a.theta) / np.sqrt(a.impedance.real) for a in (answer, rough)]
        grids = decibels((1.0 + np.abs(level[0] - level[1]) / np.abs(level[0])) ** 2)
        accepted = np.pi / ETA0 * answer.impedance.real
        balance = np.abs(decibels(sky.mean_square(answer.theta, answer.phi) / accepted))
    # Where a resistance is not positive the levels are NaN, and there is nothing to vouch for.
    return np.nan_to_num(np.maximum(grids, balance), nan=np.inf, posinf=np.inf)
