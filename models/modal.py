"""`modal`: the exact field of endless plates of finite width, any apex angle up to 180°.

The circle ρ = w parts the plane into the corner (cos μφ · J_μ), what lies behind the plates
(cos ν(φ−π) · J_ν) and the outside (cos lφ · H_l). The unknown is the field on the circle, in the
basis of `models.aperture`; Galerkin's condition is that H is continuous across it. Fields are
relative to the feed alone, e^{+jωt}; the feed may stand inside or outside the circle. For a dipole
along z, k·sinθ takes the place of k in direction θ: exact, because the plates are uniform in z.
Plates conduct perfectly (efficiency 1); reactance is not given. Cost grows with the cube of w.

Source: Harrington, *Time-Harmonic Electromagnetic Fields* (1961), §5 (wave functions, addition
theorem); Mittra & Lee, *Analytical Techniques in the Theory of Guided Waves* (1971).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import hankel2, jv

from models.aperture import moments, static_energy
from models.conventions import ETA0, ComplexArray, FloatArray, decibels, wavenumber
from models.dipole import far_field, terminal
from models.geometry import Reflectors
from models.pattern import CUT_ANGLES, Pattern

__all__ = ["harmonics", "line_source", "line_source_directivity", "radiate"]


def line_source(
    *, apex_angle: ArrayLike, k_spacing: ArrayLike, k_width: ArrayLike, phi: ArrayLike
) -> ComplexArray:
    """Return the far field of a line source before the plates, relative to the line source alone.

    Parameters
    ----------
    apex_angle, k_spacing, k_width : array_like
        α (radians), kS and kw; broadcast to (...).
    phi : (n_angle,)
        Directions off boresight, radians.

    Returns
    -------
    (..., n_angle)
    """
    amplitude = _harmonics(apex_angle, k_spacing, k_width)
    orders = np.arange(amplitude.shape[-1])
    return np.asarray(amplitude @ np.cos(orders[:, None] * np.asarray(phi)))


def line_source_directivity(
    *, apex_angle: ArrayLike, k_spacing: ArrayLike, k_width: ArrayLike
) -> FloatArray:
    """Return the two-dimensional directivity on boresight, dB; parameters as in `line_source`."""
    amplitude = _harmonics(apex_angle, k_spacing, k_width)
    return decibels(np.abs(amplitude.sum(axis=-1)) ** 2 / _power(amplitude))


def radiate(reflectors: Reflectors, frequencies_hz: FloatArray) -> Pattern:
    """Return the pattern of every design (n) at every frequency (n_freq)."""
    k = wavenumber(frequencies_hz)
    angles, shape = CUT_ANGLES, (len(reflectors), k.size)
    h_field = np.zeros((*shape, angles.size), dtype=np.complex128)
    e_field, resistance = h_field.copy(), np.zeros(shape)
    front = angles < np.pi / 2.0 - 1e-9
    sine, cosine = np.cos(angles[front]), np.sin(angles[front])  # θ is measured from the dipole
    weight = np.full(sine.size, angles[1] - angles[0])  # trapezoid; the ends are 0 and halved
    weight[0] /= 2.0
    around = np.arange(angles.size)
    for row, column in np.ndindex(shape):
        alpha, length = reflectors.apex_angle[row], reflectors.dipole_length[row]
        scale = k[column] * sine
        amplitude = harmonics(
            alpha, scale * reflectors.spacing[row], scale * reflectors.plate_width[row]
        )
        orders = np.arange(amplitude.shape[-1])
        lobe = far_field(k[column], length, sine, cosine)
        h_field[row, column] = lobe[0] * (amplitude[0] @ np.cos(np.outer(orders, angles)))
        e_field[row, column, front] = lobe * amplitude.sum(axis=-1)
        e_field[row, column, around[::-1][front]] = lobe * (amplitude @ (-1.0) ** orders)
        # U = η|I f F|²/8π², P = ½R I²
        resistance[row, column] = ETA0 / np.pi * np.sum(weight * sine * lobe**2 * _power(amplitude))
    gap = terminal(resistance.astype(np.complex128), k, reflectors.dipole_length[:, None])
    return Pattern(
        angles=angles,
        h_field=h_field,
        e_field=e_field,
        power=np.pi / ETA0 * resistance,
        resistance=gap.real,
        reactance=np.full(shape, np.nan),
        efficiency=np.ones(shape),
        doubt_db=np.full(shape, np.nan),
    )


def harmonics(
    apex_angle: FloatArray | float, k_spacing: FloatArray, k_width: FloatArray
) -> ComplexArray:
    """Return f_l of the far field F(φ) = Σ f_l cos lφ, relative to the line source alone.

    Parameters
    ----------
    apex_angle : float
        Radians.
    k_spacing, k_width : (n,)
        kS and kw (times sinθ), above 0, of one antenna: kS/kw is the same throughout.

    Returns
    -------
    (n, n_order)
    """
    phase = np.max(k_width) * (np.pi - apex_angle / 2.0)
    count = 4 * int(np.ceil((8.0 + 0.6 * phase) / 4.0))
    top = 20 * int(np.ceil((40.0 + 1.5 * max(np.max(k_width), np.max(k_spacing))) / 20.0))
    circle = _circle(float(apex_angle), count, top)
    return (
        circle.inside(k_spacing, k_width)
        if k_spacing[0] <= k_width[0]
        else circle.outside(k_spacing, k_width)
    )


def _harmonics(apex_angle: ArrayLike, k_spacing: ArrayLike, k_width: ArrayLike) -> ComplexArray:
    """Return `harmonics` of unlike antennas, (..., n_order), filled up with zeros."""
    alpha, ks, kw = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (apex_angle, k_spacing, k_width))
    )
    rows = [
        harmonics(a, s, w)
        for a, s, w in zip(alpha.ravel(), ks.reshape(-1, 1), kw.reshape(-1, 1), strict=True)
    ]
    longest = max(row.size for row in rows)
    padded = [np.pad(row[0], (0, longest - row.size)) for row in rows]
    return np.asarray(padded).reshape(*alpha.shape, longest)


def _power(amplitude: ComplexArray) -> FloatArray:
    """Return ∫|F|² dφ/2π: power over that of the feed alone."""
    square = amplitude.real**2 + amplitude.imag**2
    return np.asarray(0.5 * (square[..., 0] + square.sum(axis=-1)))


@dataclass(frozen=True, kw_only=True, eq=False)
class _Circle:
    """What does not depend on k: orders, and the basis' moments over half the circle.

    `front`, `back` are (n_order, n_basis) of the modes of each sector on its own arc; `around` is
    (n_order, 2·n_basis) of cos lφ on both; `weight` is Neumann's number, 1 for l = 0, else 2.
    """

    apex_angle: float
    orders: FloatArray
    weight: FloatArray
    front_orders: FloatArray
    back_orders: FloatArray
    front: FloatArray
    back: FloatArray
    around: FloatArray
    energy: FloatArray

    def inside(self, k_spacing: FloatArray, k_width: FloatArray) -> ComplexArray:
        """Return `harmonics` for a feed inside the circle."""
        # Green's function of the sector, zero on its arc: the Wronskian leaves J(kS)/J(kw).
        ratio = _bessel_ratio(self.front_orders, k_spacing, k_width)
        load = np.zeros((k_width.size, self.energy.shape[0]), dtype=np.complex128)
        load[:, : self.front.shape[1]] = 4j / self.apex_angle * ratio @ self.front
        return self._far(load, k_width)

    def outside(self, k_spacing: FloatArray, k_width: FloatArray) -> ComplexArray:
        """Return `harmonics` for a feed outside the circle."""
        # Addition theorem, less the field on a full conducting cylinder: H(kS)/H(kw) remains.
        first, steps = _hankel(self.orders.size, k_width)
        first_feed, steps_feed = _hankel(self.orders.size, k_spacing)
        ratio = _running_product(first_feed / first, steps_feed / steps)
        load = 1j / np.pi * (self.weight * ratio) @ self.around
        cylinder = jv(self.orders, k_spacing[:, None]) - ratio * jv(self.orders, k_width[:, None])
        source = self.weight * 1j**self.orders * cylinder
        return np.asarray(source + self._far(load, k_width))

    def _far(self, load: ComplexArray, k_width: FloatArray) -> ComplexArray:
        """Return the harmonics of the field that `load` (n, 2·n_basis) raises on the circle."""
        first, steps = _hankel(self.orders.size, k_width)
        # x·∂ ln/∂x of each radial function, less its static value (the order).
        front = 2.0 / self.apex_angle * _bessel_excess(self.front_orders, k_width)
        back = 2.0 / (2.0 * np.pi - self.apex_angle) * _bessel_excess(self.back_orders, k_width)
        outer = self.weight / (2.0 * np.pi) * (k_width[:, None] * steps - 2.0 * self.orders)
        matrix = self.energy + self.around.T @ (outer[..., None] * self.around)
        half = self.front.shape[1]
        matrix[:, :half, :half] += self.front.T @ (front[..., None] * self.front)
        matrix[:, half:, half:] += self.back.T @ (back[..., None] * self.back)
        field = np.linalg.solve(matrix, load[..., None])[..., 0] @ self.around.T
        inverse = _running_product(1.0 / first, 1.0 / steps)
        return np.asarray(self.weight / np.pi * 1j**self.orders * inverse * field)


@lru_cache(maxsize=64)
def _circle(apex_angle: float, count: int, top: int) -> _Circle:
    """Return the circle with `count` functions an arc and all orders up to `top`."""
    half, rest = apex_angle / 2.0, np.pi - apex_angle / 2.0
    front_orders = np.arange(np.pi, top * apex_angle, 2.0 * np.pi) / apex_angle
    back_orders = np.arange(np.pi, top * 2.0 * rest, 2.0 * np.pi) / (2.0 * rest)
    orders = np.arange(top + 1.0)
    behind = (-1.0) ** orders[:, None] * rest * moments(orders * rest, count)
    return _Circle(
        apex_angle=apex_angle,
        orders=orders,
        weight=np.where(orders == 0.0, 1.0, 2.0),
        front_orders=front_orders,
        back_orders=back_orders,
        front=half * moments(front_orders * half, count),
        back=rest * moments(back_orders * rest, count),
        around=np.concatenate([half * moments(orders * half, count), behind], axis=1),
        energy=static_energy(np.array([apex_angle]), count)[0],
    )


def _bessel_excess(orders: FloatArray, x: FloatArray) -> FloatArray:
    """Return xJ'(x)/J(x) − μ = −x·J_{μ+1}/J_μ, (n, n_order), by its continued fraction."""
    square = x[:, None] ** 2
    excess = np.zeros((x.size, orders.size))
    for step in range(int(np.max(x)) + 25, 0, -1):
        excess = -square / (2.0 * (orders + step) + excess)
    return excess


def _bessel_ratio(orders: FloatArray, x: FloatArray, x_wide: FloatArray) -> FloatArray:
    """Return J_μ(x)/J_μ(x_wide), (n, n_order), with the leading power where J underflows."""
    x, x_wide = x[:, None], x_wide[:, None]
    below, above = jv(orders, x), jv(orders, x_wide)
    small = np.abs(above) < 1e-250
    power = (x / x_wide) ** orders
    return np.where(small, power, below / np.where(small, 1.0, above))


def _hankel(count: int, x: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return H_0(x) as (n, 1) and the steps H_{l+1}/H_l, l = 0 … count − 1, (n, count)."""
    first = hankel2(0, x)
    steps = np.empty((x.size, count), dtype=np.complex128)
    steps[:, 0] = hankel2(1, x) / first
    for order in range(1, count):
        steps[:, order] = 2.0 * order / x - 1.0 / steps[:, order - 1]
    return first[:, None], steps


def _running_product(first: ComplexArray, steps: ComplexArray) -> ComplexArray:
    """Return first, first·steps[0], … : as many as there are steps; tiny ones underflow to 0."""
    return np.asarray(np.cumprod(np.concatenate([first, steps[:, :-1]], axis=1), axis=1))
