"""The dipole as a thin wire: currents, self impedance (Ω), near fields (V/m) and far field.

Piecewise-sinusoidal modes sin(k(Δ−|z−z_m|))/sin kΔ on equal steps Δ, mirrored in z: mode 0 sits
on the centre gap, mode m on both ±mΔ. The wire's radius is the distance between current and test line
(reduced kernel), so a step should be longer than the radius is wide. Exact E1 integrals.

Source: Richmond & Geary, IEEE Trans. AP-23 (1975); Balanis, *Antenna Theory*, 4th ed., §8.4-8.5.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import sici

from models.conventions import ETA0, ComplexArray, FloatArray
from models.dipole import far_field

__all__ = ["Wire"]


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
        reach = np.sqrt(span**2 + self.radius[:, None] ** 2)
        # R + t; for t < 0 the plain sum cancels, a²/(R − t) is the same number.
        total = np.where(span >= 0.0, reach + span, 0.0)
        total = np.where(span < 0.0, self.radius[:, None] ** 2 / (reach + np.abs(span)), total)
        sine, cosine = sici(self.k[:, None] * total)
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
        return np.asarray(matrix * np.outer(_pair(m), _pair(m)) / 2.0)

    def near_field(self, distance: FloatArray, z: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return E_z and E_ρ of every mode at 1 A, V/m, each (n, n_distance, n_z, modes).

        Parameters
        ----------
        distance : (n, n_distance)
            From the wire's axis, m, above 0.
        z : (n, n_z)
            Height, m.
        """
        nodes = np.arange(-self.modes, self.modes + 1) * self.step[:, None]
        k = self.k[:, None, None, None]
        rho = distance[:, :, None, None]
        height = (z[:, :, None] - nodes[:, None, :])[:, None]
        radius = np.sqrt(rho**2 + height**2)
        phase = k * radius
        wave = np.empty(radius.shape, dtype=np.complex128)
        wave.real, wave.imag = np.cos(phase) / radius, -np.sin(phase) / radius
        electric = (self.k * self.step)[:, None, None, None]
        scale = 1j * ETA0 / (4.0 * np.pi) / np.sin(electric)
        twice = 2.0 * np.cos(electric)

        def mirrored(x: ComplexArray) -> ComplexArray:
            mode = x[..., 2:] + x[..., :-2] - twice * x[..., 1:-1]
            centre = self.modes - 1
            both = mode[..., centre:] + mode[..., centre::-1]
            both[..., 0] *= 0.5
            return both

        return -scale * mirrored(wave), scale / rho * mirrored(wave * height)

    def far_field(self, cosine: FloatArray) -> FloatArray:
        """Return f of every mode at 1 A in directions cosθ (n_angle), (n, n_angle, modes)."""
        k, step = self.k[:, None], self.step[:, None]
        sine = np.sqrt(np.maximum(1.0 - cosine**2, 0.0))
        lobe = far_field(k, 2.0 * step, sine, cosine) / np.sin(k * step)
        m = np.arange(self.modes)
        turn = (k * step * cosine)[..., None] * m
        return np.asarray(lobe[..., None] * np.cos(turn) * _pair(m))

    def current_square(self) -> FloatArray:
        """Return ∫ I_m I_n dz over the whole dipole, m, (n, modes, modes)."""
        x = (self.k * self.step)[:, None, None]
        sine = np.sin(x)
        own = (x - sine * np.cos(x)) / sine**2  # ∫ sin²(k(Δ−|z|)) dz·k / sin² kΔ
        next_ = (sine - x * np.cos(x)) / (2.0 * sine**2)
        m = np.arange(self.modes)
        apart, far = np.abs(m[:, None] - m), m[:, None] + m
        total = np.where(apart == 0, own, 0.0) + np.where(apart == 1, next_, 0.0)
        total = total + np.where(far == 0, own, 0.0) + np.where(far == 1, next_, 0.0)
        return np.asarray(total * np.outer(_pair(m), _pair(m)) / 2.0 / self.k[:, None, None])


def _pair(m: np.ndarray) -> FloatArray:
    """Return how many wires' places a mode takes: 1 on the gap, 2 elsewhere."""
    return np.where(m == 0, 1.0, 2.0)
