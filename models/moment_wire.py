"""The dipole as a thin wire: currents, self impedance (Ω), near fields (V/m) and far field.

Piecewise-sinusoidal modes sin(k(Δ−|z−z_m|))/sin kΔ on equal steps Δ, mirrored in z: mode 0 sits on
the centre gap, mode m on both ±mΔ. The wire's radius is the distance between current and test line
(reduced kernel), so Δ must stay a few radii long. Integrals are exact (E1). In front of plates the
modes are combined to few `shapes`, and all that follows is per shape.

Source: Richmond & Geary, IEEE Trans. AP-23 (1975); Balanis, *Antenna Theory*, 4th ed., §8.4-8.5.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import sici

from models.conventions import ETA0, ComplexArray, FloatArray
from models.dipole import far_field
from models.moment_kernel import cosine_and_sine

__all__ = ["Wire", "driven_shapes", "sinusoidal_shape"]


@dataclass(frozen=True, kw_only=True, eq=False)
class Wire:
    """A batch of dipoles, `modes` currents on each.

    Parameters
    ----------
    modes : int
        Modes on half the dipole; 1 is a single sinusoid over the whole dipole.
    k, length, radius : (n,)
        Wavenumber, rad/m; full length and radius, m.
    """

    modes: int
    k: FloatArray
    length: FloatArray
    radius: FloatArray

    @property
    def step(self) -> FloatArray:
        """Return Δ, m, (n,)."""
        return self.length / (2.0 * self.modes)

    def impedance(self) -> ComplexArray:
        """Return the impedance matrix of the modes in free space, Ω, (n, modes, modes)."""
        offsets = np.arange(-2 * self.modes - 1, 2 * self.modes + 2)
        span = offsets * self.step[:, None]
        radius = self.radius[:, None]
        reach = np.sqrt(span**2 + radius**2) + np.abs(span)
        # R + t; for t < 0 the plain sum cancels, a²/(R − t) is the same number.
        sine, cosine = sici(self.k[:, None] * np.where(span >= 0.0, reach, radius**2 / reach))
        exponential = -cosine + 1j * (sine - np.pi / 2.0)  # E1(jk(R + t))
        electric = (self.k * self.step)[:, None]

        def value(index: np.ndarray) -> ComplexArray:
            return np.asarray(exponential[:, index - offsets[0]])

        def half(x: np.ndarray) -> ComplexArray:
            turn = np.exp(1j * electric * (1 - x))
            ahead, back = value(-x) - value(1 - x), value(x) - value(x - 1)
            return np.asarray((turn * ahead + back / turn) / 2j)

        x = np.arange(2 * self.modes + 1)
        against = half(x) + half(-x)  # ∫ sin(k(Δ−|z|))·e^{-jkR}/R dz, source x steps away
        lower = np.concatenate([against[:, 1:2], against[:, :-2]], axis=1)
        mutual = lower + against[:, 1:] - 2.0 * np.cos(electric) * against[:, :-1]
        mutual = 1j * ETA0 / (4.0 * np.pi) / np.sin(electric) ** 2 * mutual
        m = np.arange(self.modes)
        matrix = mutual[:, np.abs(m[:, None] - m)] + mutual[:, m[:, None] + m]
        return np.asarray(matrix * _pairs(self.modes))

    def near_field(
        self, shapes: ComplexArray, distance: FloatArray, z: FloatArray, *, radial: bool
    ) -> ComplexArray:
        """Return E_z (or E_ρ if `radial`) of every shape, V/m, (n, n_distance, n_z, n_shape).

        Parameters
        ----------
        shapes : (n, modes, n_shape)
            Currents of the modes, A.
        distance : (n, n_distance)
            From the wire's axis, m, above 0.
        z : (n, n_z)
            Height, m.
        radial : bool
            Which component.
        """
        nodes = np.arange(-self.modes, self.modes + 1) * self.step[:, None]
        height = (z[:, :, None] - nodes[:, None, :])[:, None]
        radius = np.sqrt((distance**2)[:, :, None, None] + height**2)
        phase = self.k[:, None, None, None] * radius
        size = height / radius if radial else 1.0 / radius
        wave: ComplexArray = np.empty(radius.shape, dtype=np.complex128)
        cosine, sine = cosine_and_sine(phase)
        np.multiply(cosine, size, out=wave.real)
        np.multiply(sine, -size, out=wave.imag)
        # Three spherical waves a mode, at its ends and its centre.
        full = np.concatenate([shapes[:, :0:-1], shapes], axis=1)
        electric = (self.k * self.step)[:, None, None]
        sources = np.zeros((shapes.shape[0], nodes.shape[1], shapes.shape[2]), dtype=np.complex128)
        sources[:, 1:-1] = -2.0 * np.cos(electric) * full
        sources[:, 2:] += full
        sources[:, :-2] += full
        sources *= (1j if radial else -1j) * ETA0 / (4.0 * np.pi) / np.sin(electric)
        size, n_s, n_z, count = wave.shape
        field = (wave.reshape(size, -1, count) @ sources).reshape(size, n_s, n_z, -1)
        if radial:
            field /= distance[:, :, None, None]
        return np.asarray(field)

    def far_field(self, shapes: ComplexArray, cosine: FloatArray) -> ComplexArray:
        """Return f of every shape in directions cosθ (n_angle), (n, n_angle, n_shape)."""
        k, step = self.k[:, None], self.step[:, None]
        lobe = far_field(k, 2.0 * step, np.sqrt(np.maximum(1.0 - cosine**2, 0.0)), cosine)
        m = np.arange(self.modes)
        turn = np.cos((k * step * cosine)[..., None] * m) * np.where(m == 0, 1.0, 2.0)
        turn *= (lobe / np.sin(k * step))[..., None]
        return np.asarray(turn @ shapes)

    def current_square(self) -> FloatArray:
        """Return ∫ I_m I_n dz over the whole dipole, m, (n, modes, modes)."""
        x = (self.k * self.step)[:, None, None]
        sine = np.sin(x)
        own = (x - sine * np.cos(x)) / sine**2
        neighbour = (sine - x * np.cos(x)) / (2.0 * sine**2)
        m = np.arange(self.modes)
        apart, far = np.abs(m[:, None] - m), m[:, None] + m
        total = own * ((apart == 0) + 0.0 + (far == 0))
        total = total + neighbour * ((apart == 1) + 0.0 + (far == 1))
        return np.asarray(total * _pairs(self.modes) / self.k[:, None, None])


def _pairs(modes: int) -> FloatArray:
    """Return half the number of places where two mirrored modes meet, (modes, modes)."""
    places = np.where(np.arange(modes) == 0, 1.0, 2.0)
    return np.outer(places, places) / 2.0


def driven_shapes(wire: Wire, impedance: ComplexArray) -> ComplexArray:
    """Return the current driven at the gap and the current a uniform field induces, A at 1 V.

    Plates some way off add to the dipole's own field one that hardly varies along it, so these two
    are all a dipole in front of plates carries. Shape (n, modes, 2).
    """
    k, step = wire.k, wire.step
    excitation = np.zeros((k.size, wire.modes, 2))
    excitation[:, 0, 0] = 1.0
    # ∫ over a mode is 2 tan(kΔ/2)/k; a mode off the centre has two places.
    excitation[:, :, 1] = (2.0 / k * np.tan(k * step / 2.0) / wire.length)[:, None]
    excitation[:, 1:, 1] *= 2.0
    return np.asarray(np.linalg.solve(impedance, excitation + 0j))


def sinusoidal_shape(wire: Wire) -> ComplexArray:
    """Return the current sin(k(h−|z|)), 1 A at its maximum, (n, modes, 1)."""
    z = np.arange(wire.modes) * wire.step[:, None]
    return np.asarray(np.sin(wire.k[:, None] * (wire.length[:, None] / 2.0 - z))[..., None] + 0j)
