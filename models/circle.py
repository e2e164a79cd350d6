"""Mode matching on the circle ρ = w through the rims: the field of a line source before two plates.

Three regions meet on the circle: the corner (cos μφ · J_μ), what lies behind the plates
(cos ν(φ−π) · J_ν) and the outside (cos lφ · H_l), μ = (2m+1)π/α and ν = (2n+1)π/(2π−α). The unknown
is the field on the circle in the basis of `models.aperture`; Galerkin's condition is that H is
continuous across it. Fields are those of a line source of field H_0^{(2)}, e^{+jωt}; lengths times
k; x = −jγ is the evanescent part of a spectrum. Valid for 0 < α ≤ π.

Source: Harrington, *Time-Harmonic Electromagnetic Fields* (1961), §5 (wave functions, addition
theorem); Mittra & Lee, *Analytical Techniques in the Theory of Guided Waves* (1971).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np
from scipy.special import hankel2, hankel2e, jv, jve

from models.aperture import moments, static_energy
from models.conventions import ComplexArray, FloatArray

__all__ = ["Circle", "circle_for"]

Argument = FloatArray | ComplexArray

TINY: Final = 1e-250
"""Below this, Bessel functions are replaced by their limits for small arguments."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Circle:
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
        ratio = _bessel_ratio(self.front_orders, k_spacing, k_width)
        return self._far(self._excite_inside(ratio, k_width), k_width)

    def outside(self, k_spacing: FloatArray, k_width: FloatArray) -> ComplexArray:
        """Return `harmonics` for a feed outside the circle."""
        ratio = _hankel_ratio(self.orders.size, k_spacing, k_width)
        source = jv(self.orders, k_spacing[:, None]) - ratio * jv(self.orders, k_width[:, None])
        far = self._far(self._excite_outside(ratio, k_width), k_width)
        return np.asarray(self.weight * 1j**self.orders * source + far)

    def reflected_inside(self, k_spacing: Argument, k_width: Argument) -> ComplexArray:
        """Return the field at a feed inside less that in the infinite corner, (n,)."""
        ratio = _bessel_ratio(self.front_orders, k_spacing, k_width)
        field = self._excite_inside(ratio, k_width)[:, : self.front.shape[1]] @ self.front.T
        infinite = _product(self.front_orders, k_spacing, k_width, ratio)
        return np.asarray(4.0 / self.apex_angle * ((field - np.pi * infinite) * ratio).sum(axis=1))

    def reflected_outside(self, k_spacing: Argument, k_width: Argument) -> ComplexArray:
        """Return the field at a feed outside less that of the feed alone, (n,)."""
        ratio = _hankel_ratio(self.orders.size, k_spacing, k_width)
        field = self._excite_outside(ratio, k_width) @ self.around.T / np.pi
        limit = (k_width / k_spacing)[:, None] ** self.orders
        cylinder = _product(self.orders, k_width, k_spacing, limit)
        return np.asarray((self.weight * (field - cylinder) * ratio).sum(axis=1))

    def _excite_inside(self, ratio: Argument, k_width: Argument) -> ComplexArray:
        # Green's function of the sector, zero on its arc: the Wronskian leaves J(kS)/J(kw).
        load = np.zeros((k_width.size, self.energy.shape[0]), dtype=np.complex128)
        load[:, : self.front.shape[1]] = 4j / self.apex_angle * ratio @ self.front
        return self._solve(load, k_width)

    def _excite_outside(self, ratio: Argument, k_width: Argument) -> ComplexArray:
        # Addition theorem, less the field on a full conducting cylinder: H(kS)/H(kw) remains.
        return self._solve(1j / np.pi * (self.weight * ratio) @ self.around, k_width)

    def _solve(self, load: ComplexArray, k_width: Argument) -> ComplexArray:
        """Return the field on the circle, coefficients of the basis, (n, 2·n_basis)."""
        # x·∂ ln/∂x of each radial function, less its static value (the order).
        front = 2.0 / self.apex_angle * _bessel_excess(self.front_orders, k_width)
        back = 2.0 / (2.0 * np.pi - self.apex_angle) * _bessel_excess(self.back_orders, k_width)
        steps = _hankel_steps(self.orders.size, k_width)
        outer = self.weight / (2.0 * np.pi) * (k_width[:, None] * steps - 2.0 * self.orders)
        matrix = self.energy + self.around.T @ (outer[..., None] * self.around)
        half = self.front.shape[1]
        matrix[:, :half, :half] += self.front.T @ (front[..., None] * self.front)
        matrix[:, half:, half:] += self.back.T @ (back[..., None] * self.back)
        return np.asarray(np.linalg.solve(matrix, load[..., None])[..., 0])

    def _far(self, field: ComplexArray, k_width: FloatArray) -> ComplexArray:
        """Return the harmonics of the field on the circle, carried to infinity."""
        steps = 1.0 / _hankel_steps(self.orders.size, k_width)
        inverse = _running_product(1.0 / hankel2(0, k_width)[:, None], steps)
        return np.asarray(self.weight / np.pi * 1j**self.orders * inverse * (field @ self.around.T))


def circle_for(apex_angle: float, k_spacing: float, k_width: float) -> Circle:
    """Return a circle fine enough for the largest kS and kw.

    Sizes go in steps, so that antennas of one angle and the frequencies of a band share a circle.
    """
    phase = k_width * (np.pi - apex_angle / 2.0)
    count = 4 * int(np.ceil((8.0 + 0.6 * phase) / 4.0))
    top = 20 * int(np.ceil((40.0 + 1.5 * max(k_width, k_spacing)) / 20.0))
    return _circle(apex_angle, count, top)


@lru_cache(maxsize=64)
def _circle(apex_angle: float, count: int, top: int) -> Circle:
    """Return the circle with `count` functions an arc and all orders up to `top`."""
    half, rest = apex_angle / 2.0, np.pi - apex_angle / 2.0
    front_orders = np.arange(np.pi, top * apex_angle, 2.0 * np.pi) / apex_angle
    back_orders = np.arange(np.pi, top * 2.0 * rest, 2.0 * np.pi) / (2.0 * rest)
    orders = np.arange(top + 1.0)
    behind = (-1.0) ** orders[:, None] * rest * moments(orders * rest, count)
    return Circle(
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


def _bessel_excess(orders: FloatArray, x: Argument) -> Argument:
    """Return xJ'(x)/J(x) − μ = −x·J_{μ+1}/J_μ, (n, n_order), by its continued fraction."""
    square: Argument = np.square(x[:, None])
    excess: Argument = np.zeros((x.size, orders.size))
    for step in range(int(np.max(np.abs(x))) + 25, 0, -1):
        excess = -square / (2.0 * (orders + step) + excess)
    return excess


def _bessel_ratio(orders: FloatArray, x: Argument, x_wide: Argument) -> Argument:
    """Return J_μ(x)/J_μ(x_wide), by the leading power where J underflows."""
    x, x_wide = x[:, None], x_wide[:, None]
    below, above = jve(orders, x), jve(orders, x_wide)
    growth = np.exp(np.abs(x.imag) - np.abs(x_wide.imag))
    small = np.abs(above) < TINY
    return np.asarray(np.where(small, (x / x_wide) ** orders, growth * below / (above + small)))


def _product(orders: FloatArray, x: Argument, x_wide: Argument, limit: Argument) -> ComplexArray:
    """Return J_μ(x)·H_μ(x_wide), by (j/πμ)·`limit` where J underflows."""
    x, x_wide = x[:, None], x_wide[:, None]
    below = jve(orders, x)
    small = np.abs(below) < TINY
    with np.errstate(over="ignore", invalid="ignore"):
        full = below * hankel2e(orders, x_wide) * np.exp(np.abs(x.imag) - 1j * x_wide)
    return np.asarray(np.where(small, 1j / np.pi / np.maximum(orders, 1.0) * limit, full))


def _hankel_steps(count: int, x: Argument) -> ComplexArray:
    """Return H_{l+1}/H_l, l = 0 … count − 1: upwards, where the recurrence is stable."""
    steps = np.empty((x.size, count), dtype=np.complex128)
    steps[:, 0] = hankel2e(1, x) / hankel2e(0, x)
    for order in range(1, count):
        steps[:, order] = 2.0 * order / x - 1.0 / steps[:, order - 1]
    return steps


def _hankel_ratio(count: int, x: Argument, x_narrow: Argument) -> ComplexArray:
    """Return H_l(x)/H_l(x_narrow), l = 0 … count − 1."""
    first = hankel2e(0, x) / hankel2e(0, x_narrow) * np.exp(1j * (x_narrow - x))
    return _running_product(
        first[:, None], _hankel_steps(count, x) / _hankel_steps(count, x_narrow)
    )


def _running_product(first: ComplexArray, steps: ComplexArray) -> ComplexArray:
    """Return first, first·steps[0], … : as many as there are steps; tiny ones underflow to 0."""
    return np.asarray(np.cumprod(np.concatenate([first, steps[:, :-1]], axis=1), axis=1))
