"""`moment`: the corner and its dipole by a 3-D integral equation, at the speed of a search.

Far fields on both cuts, input impedance (Ω) and efficiency of plates of any size with a thin-wire
dipole, for any apex angle up to the flat sheet. Each pair of design and frequency is solved on
three coarse grids whose cell counts stand in exact proportion, and far field and impedance are
extrapolated to a vanishing cell. Where the grids disagree, or the power radiated is not the power
put in, one finer grid after another joins and the three finest count; what stays in doubt is said
in `doubt_db`.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980), plates; Richmond & Geary, IEEE Trans. AP-23
(1975), dipole; Richardson 1911, extrapolation.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np

from models.build import Build
from models.conventions import ETA0, ComplexArray, FloatArray, decibels, wavenumber
from models.edges import WaveArray
from models.geometry import Reflectors
from models.moment_case import LADDER, Case, Rows
from models.moment_field import Sky, View, plates_far_field
from models.moment_plates import Grid, grid_cells
from models.moment_wire import Wire, driven_shapes, gap_share, rod, sinusoidal_shape
from models.pattern import CUT_ANGLES, Pattern

__all__ = ["ENOUGH_DB", "VOUCHED_DB", "Feed", "Settled", "radiate", "settle"]

Feed = Literal["solved", "sinusoidal"]
"""The dipole's current: solved with the plates, or imposed."""

MOST_CELLS: Final = 2500
"""Cells beyond which no finer grid is tried."""

ENOUGH_DB: Final = 0.05
"""Doubt below which no finer grid is tried."""

VOUCHED_DB: Final = 0.3
"""Doubt above which, after the finest grid, the model does not vouch for its answer."""

POWERS: Final = (0, 2, 4)
"""Of the cell in the series for fields and impedance."""

BATCH_NUMBERS: Final = 1_000_000
"""Complex numbers in the matrices and waves of one batch: what a processor's cache holds."""

GROUP_NUMBERS: Final = 100_000
"""Complex numbers in the far fields of pairs settled together."""

_NOWHERE: Final = np.empty(0)


@dataclass(frozen=True, kw_only=True, eq=False)
class Response(Rows):
    """The plates' answer to each of the wire's shapes at 1 A: fields and impedance, Ω."""

    theta: ComplexArray | WaveArray
    phi: ComplexArray | WaveArray
    impedance: ComplexArray
    square: ComplexArray | WaveArray


@dataclass(frozen=True, kw_only=True, eq=False)
class Settled(Rows):
    """What is known of n pairs once their grids agree, for 1 A at the gap.

    Fields on the cuts (n, n_angle) and towards other directions (n, n_dir), impedance and loss
    resistance, Ω, and doubt, dB, (n,).
    """

    h_field: ComplexArray
    e_field: ComplexArray
    theta: ComplexArray
    phi: ComplexArray
    impedance: ComplexArray
    loss: FloatArray
    doubt_db: FloatArray

    @property
    def power(self) -> FloatArray:
        """Return what `models.pattern` calls power, (n,)."""
        return np.asarray(np.pi / ETA0 * self.impedance.real)

    @property
    def efficiency(self) -> FloatArray:
        """Return radiated over accepted power, (n,)."""
        return np.asarray(self.impedance.real / (self.impedance.real + self.loss))


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
    found = settle(Case.pairs(reflectors, k), build, feed)
    values = {
        "h_field": found.h_field,
        "e_field": found.e_field,
        "power": found.power,
        "resistance": found.impedance.real + found.loss,
        "reactance": found.impedance.imag,
        "efficiency": found.efficiency,
        "doubt_db": np.where(found.doubt_db <= VOUCHED_DB, found.doubt_db, np.inf),
    }
    shape = (len(reflectors), k.size)
    return Pattern(
        angles=CUT_ANGLES,
        **{name: value.reshape(*shape, *value.shape[1:]) for name, value in values.items()},
    )


def settle(
    case: Case,
    build: Build,
    feed: Feed = "solved",
    theta: FloatArray = _NOWHERE,
    phi: FloatArray = _NOWHERE,
) -> Settled:
    """Return fields on the cuts and towards θ and φ, impedance, loss and doubt of n pairs.

    Parameters
    ----------
    case : Case
        n pairs.
    build : Build
        Its conductivity sets the loss.
    feed : {"solved", "sinusoidal"}
    theta, phi : (n_dir,)
        Directions besides the cuts, radians.
    """
    keys, group = np.unique(case.keys(), axis=0, return_inverse=True)
    places, parts = [], []
    for index, key in enumerate(keys.tolist()):
        members = np.flatnonzero(group.reshape(-1) == index)
        sky = Sky.of(key[-1]).also(theta, phi)
        size = max(1, GROUP_NUMBERS // sky.theta.size)
        for start in range(0, members.size, size):
            places.append(members[start : start + size])
            parts.append(_settled(case.rows(places[-1]), key, build, feed, sky))
    return Settled.join(parts).rows(np.argsort(np.concatenate(places)))


def _settled(case: Case, key: list[int], build: Build, feed: Feed, sky: Sky) -> Settled:
    """Return what is known of pairs with the same key."""
    answer, doubt = _answer(Front.of(case, feed, sky), key, [])
    h_field, e_field = sky.cuts(answer.theta)
    around = sky.weights.size
    return Settled(
        h_field=h_field,
        e_field=e_field,
        theta=answer.theta[:, 2 * sky.count + around :],
        phi=answer.phi[:, around:],
        impedance=answer.impedance,
        # √(ωμ/2σ) times the currents' squares: too small a loss to change the currents.
        loss=np.sqrt(case.k * ETA0 / (2.0 * build.conductivity)) * answer.square,
        doubt_db=doubt,
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class Front:
    """What is in front of the plates: dipole, its shapes, their currents at the gap; the sky."""

    case: Case
    wire: Wire
    shapes: ComplexArray
    gap: ComplexArray
    alone: Response
    view: View

    @classmethod
    def of(cls, case: Case, feed: Feed, sky: Sky) -> Front:
        """Return what is in front of the plates of `case`."""
        if feed == "solved":
            wire = rod(k=case.k, length=case.dipole_length, radius=case.dipole_radius)
            modes = wire.impedance()
            shapes = driven_shapes(wire, modes)
            gap = (gap_share(wire)[:, None] @ shapes)[:, 0]
        else:
            wire = Wire(k=case.k, length=case.dipole_length, radius=case.dipole_radius)
            modes, shapes = wire.impedance(), sinusoidal_shape(wire)
            gap = shapes[:, 0]
        path = (case.k * case.spacing)[:, None] * (np.sin(sky.theta) * np.cos(sky.phi))
        far = wire.far_field(shapes, np.cos(sky.theta)).swapaxes(1, 2)
        square = shapes.conj().swapaxes(1, 2) @ wire.current_square() @ shapes
        alone = Response(
            theta=far * np.exp(1j * path)[:, None],
            phi=np.zeros((case.k.size, 1, 1), dtype=np.complex128),
            impedance=np.asarray(shapes.swapaxes(1, 2) @ modes @ shapes),
            square=square / (2.0 * np.pi * case.dipole_radius[:, None, None]),
        )
        view = View.of(sky, case.apex_angle)
        return cls(case=case, wire=wire, shapes=shapes, gap=gap, alone=alone, view=view)

    def rows(self, index: np.ndarray | slice) -> Front:
        """Return the rows at `index`."""
        wire = self.wire
        return Front(
            case=self.case.rows(index),
            wire=replace(
                wire, k=wire.k[index], length=wire.length[index], radius=wire.radius[index]
            ),
            shapes=self.shapes[index],
            gap=self.gap[index],
            alone=self.alone.rows(index),
            view=self.view.rows(index),
        )


def _answer(front: Front, key: list[int], coarser: list[Response]) -> tuple[Answer, FloatArray]:
    """Return what a key's grid and the two before it give, or finer ones, and the doubt, dB."""
    base_s, base_z, last, reach, order = key
    steps = LADDER[last - 2 : last + 1]
    grids = coarser + [
        _respond(front, (f * base_s, f * base_z), reach) for f in steps[len(coarser) :]
    ]
    answer = _drive(front, _limit(grids, steps))
    doubt = _doubt(front.view.sky, answer, _drive(front, _limit(grids[1:], steps[1:])))
    open_rows = np.flatnonzero(doubt > ENOUGH_DB)
    finer = [step for step in LADDER[last + 1 :] if step**2 * base_s * base_z <= MOST_CELLS]
    if open_rows.size and finer:
        better, doubt[open_rows] = _answer(
            front.rows(open_rows),
            [base_s, base_z, last + 1, reach, order],
            [grid.rows(open_rows) for grid in grids[1:]],
        )
        answer.put(open_rows, better)
    return answer, doubt


def _respond(front: Front, counts: tuple[int, int], reach: int) -> Response:
    """Return what the plates do on a grid of `counts` cells."""
    unknowns, directions = counts[0] * counts[1], front.view.sky.theta.size
    size = max(1, BATCH_NUMBERS // (unknowns**2 + 4 * counts[0] * directions))
    starts = range(0, front.gap.shape[0], size)
    return Response.join([_batch(front.rows(slice(i, i + size)), counts, reach) for i in starts])


def _batch(front: Front, counts: tuple[int, int], reach: int) -> Response:
    """Return what the plates of one batch do on a grid of `counts` cells."""
    case = front.case
    cells = grid_cells(
        *counts,
        k=case.k,
        apex_angle=case.apex_angle,
        plate_width=case.plate_width,
        plate_length=case.plate_length,
    )
    grid = Grid(cells=cells)
    voltages = grid.voltages(front.wire, front.shapes, case.spacing)
    currents = grid.currents(reach, voltages)
    theta, phi = plates_far_field(grid, currents, front.view)
    return Response(
        theta=theta,
        phi=phi,
        # The unknowns are a quarter of the antenna; the dipole feels the field against its own.
        impedance=-4.0 * (voltages.swapaxes(1, 2) @ currents),
        square=grid.current_square(currents),
    )


def _limit(grids: list[Response], steps: tuple[int, ...]) -> Response:
    """Return fields and impedance for a vanishing cell from grids of these proportions.

    The loss stays that of the finest grid.
    """
    cell = 1.0 / np.array(steps)
    rows = cell ** np.array(POWERS[: cell.size])[:, None]
    weights = np.linalg.solve(rows, np.eye(cell.size)[0]).tolist()

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
class Answer(Rows):
    """Dipole and plates together, for 1 A at the gap: fields, impedance, Ω, squared current, A²."""

    theta: ComplexArray
    phi: ComplexArray
    impedance: ComplexArray
    square: FloatArray


def _drive(front: Front, plates: Response) -> Answer:
    """Return dipole and plates with the wire's shapes in the shares that 1 A at the gap asks."""
    gap, alone = front.gap, front.alone
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


def _doubt(sky: Sky, answer: Answer, rough: Answer) -> FloatArray:
    """Return how far grids, in field and impedance, and power in and out disagree, dB."""
    with np.errstate(divide="ignore", invalid="ignore"):
        level = [sky.boresight(a.theta) / np.sqrt(a.impedance.real) for a in (answer, rough)]
        grids = decibels((1.0 + np.abs(level[0] - level[1]) / np.abs(level[0])) ** 2)
        # Fields may agree by chance; a search finds where, and there impedances do not.
        ohms = decibels(1.0 + np.abs(rough.impedance / answer.impedance - 1.0))
        accepted = np.pi / ETA0 * answer.impedance.real
        balance = np.abs(decibels(sky.mean_square(answer.theta, answer.phi) / accepted))
    # Where a resistance is not positive the levels are NaN, and there is nothing to vouch for.
    worst = np.maximum(np.maximum(grids, ohms), balance)
    return np.nan_to_num(worst, nan=np.inf, posinf=np.inf)
