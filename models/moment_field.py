"""Far field of currents on both plates in any set of directions.

f = E_θ·r·e^{jkr} over jη/(2π) V, and the same for E_φ; per ampere of the currents given. Phase
reference: the middle of the apex line.

Source: Balanis, *Antenna Theory*, 4th ed., §12.2 (radiation integrals); cosine interpolation of an
even band-limited function.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from models.conventions import ComplexArray, FloatArray
from models.edges import SingleArray, WaveArray, turn
from models.moment_plates import Grid
from models.pattern import CUT_ANGLES, cosine_interpolation, middles

__all__ = ["Sky", "plates_far_field"]


@dataclass(frozen=True, kw_only=True, eq=False)
class Sky:
    """Directions in which fields are sampled: H-cut, E-cut, then a quarter of the sphere.

    Parameters
    ----------
    count : int
        Samples on each cut, in the middles of equal parts of 0 to π.
    theta, phi : (n_dir,)
        Angle from the z axis and from boresight, radians.
    weights : (n_around,)
        Of the sphere's samples; they sum to 1.
    interpolation : (count, n_angle)
        From a cut's samples to `CUT_ANGLES`.
    """

    count: int
    theta: FloatArray
    phi: FloatArray
    weights: FloatArray
    interpolation: FloatArray

    @classmethod
    @lru_cache(maxsize=64)
    def of(cls, order: int) -> Sky:
        """Return samples for fields with harmonics up to about `order`."""
        count = order + 6
        cut = middles(count)
        # Gauss-Legendre over cosθ, upper half; equal parts of φ.
        nodes, weights = np.polynomial.legendre.leggauss(order + order % 2)
        upper = nodes > 0.0
        theta, phi = np.arccos(nodes[upper]), middles(order)
        flat, slope = np.full(count, np.pi / 2.0), np.abs(np.pi / 2.0 - cut)
        behind = np.where(_forward(cut) < 0.0, np.pi, 0.0)
        return cls(
            count=count,
            theta=np.concatenate([flat, slope, np.repeat(theta, phi.size)]),
            phi=np.concatenate([cut, behind, np.tile(phi, theta.size)]),
            weights=np.repeat(weights[upper] / phi.size, phi.size),
            interpolation=cosine_interpolation(count, CUT_ANGLES).T,
        )

    def cuts(self, theta: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        """Return f_θ on the H- and E-plane cuts at `CUT_ANGLES` from samples (n, n_dir)."""
        h_cut, e_cut = theta[:, : self.count], theta[:, self.count : 2 * self.count]
        # Along the cut's own tangent the field is smooth through θ = 0; E_θ changes sign there.
        tangent = e_cut * _forward(middles(self.count))
        e_field = np.matmul(tangent, self.interpolation) * _forward(CUT_ANGLES)
        return np.matmul(h_cut, self.interpolation), e_field

    def boresight(self, theta: ComplexArray) -> ComplexArray:
        """Return f_θ on boresight, (n,)."""
        return np.asarray(theta[:, : self.count] @ self.interpolation[:, 0])

    def also(self, theta: FloatArray, phi: FloatArray) -> Sky:
        """Return this sky with more directions θ, φ (n_more,), radians, behind its own."""
        return replace(self, theta=np.append(self.theta, theta), phi=np.append(self.phi, phi))

    def mean_square(self, theta: ComplexArray, phi: ComplexArray) -> FloatArray:
        """Return the mean of |f|² over the sphere, (n,)."""
        around = self.weights.size
        first = 2 * self.count
        square = np.abs(theta[:, first : first + around]) ** 2 + np.abs(phi[:, :around]) ** 2
        return np.asarray(square @ self.weights)


def _forward(angles: FloatArray) -> FloatArray:
    """Return 1 ahead of the antenna (up to and with 90° off boresight), −1 behind."""
    return np.where(angles - np.pi / 2.0 > 1e-9, -1.0, 1.0)


@dataclass(frozen=True, kw_only=True, eq=False)
class View:
    """The sky as both plates see it, for designs of several apex angles.

    Parameters
    ----------
    sky : Sky
        The directions.
    along, across : (2, n, n_dir)
        Of each plate: cosine between its slope and the direction's φ, and the slope's part along φ.
    """

    sky: Sky
    along: FloatArray
    across: FloatArray

    @classmethod
    def of(cls, sky: Sky, apex_angle: FloatArray) -> View:
        """Return the view for `apex_angle`, radians, (n,)."""
        half = apex_angle[:, None] / 2.0
        even = np.cos(half) * np.cos(sky.phi), np.cos(half) * np.sin(sky.phi)
        odd = np.sin(half) * np.sin(sky.phi), np.sin(half) * np.cos(sky.phi)
        return cls(
            sky=sky,
            along=np.stack([even[0] + odd[0], even[0] - odd[0]]),
            across=np.stack([odd[1] - even[1], -odd[1] - even[1]]),
        )

    def rows(self, index: np.ndarray | slice) -> View:
        """Return the view for the apex angles at `index`."""
        return View(sky=self.sky, along=self.along[:, index], across=self.across[:, index])


def plates_far_field(grid: Grid, currents: WaveArray, view: View) -> tuple[WaveArray, WaveArray]:
    """Return f_θ (n, m, n_dir) of both plates, and f_φ off the cuts (on them it is 0).

    Parameters
    ----------
    grid : Grid
        The grid of the currents.
    currents : (n, N, m)
        Unknowns of the grid, A.
    view : View
        Where to.
    """
    cells, sky = grid.cells, view.sky
    j_z, j_s = grid.split(currents)
    sine, cosine = np.sin(sky.theta), np.cos(sky.theta)
    k_along = cells.k[:, None] * sine * view.along
    at_cells, at_edges = _waves(k_along, cells.centres()), _waves(k_along, cells.edges())
    edges, middles = (
        ((cells.k[:, None] * z)[..., None] * cosine).astype(np.float32) for z in grid.heights()
    )
    moment_z, moment_s = ((cells.k * size)[:, None, None] for size in (cells.size_z, cells.size_s))
    even = np.cos(edges) * (moment_z * sine).astype(np.float32)
    odd = np.sin(middles) * moment_s.astype(np.float32)
    f_theta = _sum(at_cells[0] + at_cells[1], even, j_z)
    # Nothing of J_s, which is odd in z, is seen on the H-plane.
    tilted, off = slice(sky.count, None), slice(2 * sky.count, None)
    toward = _both(at_edges, cosine * view.along, tilted)
    f_theta[..., tilted] -= 1j * _sum(toward, odd[..., tilted], j_s)
    aside = _sum(_both(at_edges, view.across, off), odd[..., off], j_s)
    return f_theta, -1j * aside


def _both(waves: WaveArray, part: FloatArray, which: slice) -> WaveArray:
    """Return the sum over the plates of waves (2, n, n_s, n_dir) times part (2, n, n_dir)."""
    parts = part.astype(np.float32)[:, :, None, which]
    one, two = (waves[i, ..., which] * parts[i] for i in (0, 1))
    one += two
    return np.asarray(one)


def _waves(k_along: FloatArray, s: FloatArray) -> WaveArray:
    """Return e^{jks·(direction along the plate)} at s (n, n_s), (2, n, n_s, n_dir)."""
    return turn(-(k_along.astype(np.float32)[:, :, None] * s.astype(np.float32)[..., None]))


def _sum(along_s: WaveArray, along_z: SingleArray, currents: WaveArray) -> WaveArray:
    """Return Σ of currents (n, n_s, rows, m) times (n, n_s, n_dir) times (n, rows, n_dir)."""
    size, n_s, rows, m = currents.shape
    flat = currents.transpose(0, 3, 2, 1).reshape(size, m * rows, n_s)
    over_s: WaveArray = (flat @ along_s).reshape(size, m, rows, -1)
    over_s *= along_z[:, None]
    return np.asarray(over_s.sum(axis=2))
