"""The dipole as a round rod: currents, self impedance (Ω), near fields (V/m) and far field.

Piecewise-sinusoidal currents on a tube, mirrored in z: sin k(z − z_{m−1})/sin k(z_m − z_{m−1}) up
to a place z_m and down again. Steps between places are short at the gap and at the end, where the
charge piles up. Current and test line are both averaged over the tube's round (exact kernel), so a
step may be shorter than the radius; integrals along z are exact (E1). Plates see the tube's axis;
for them the modes are combined to few `shapes`, and all that follows is per shape.

`rod` makes of the tube a solid rod with flat ends whose voltage lies over a gap one diameter long.
A gap half as long has 5e-3·ka S more susceptance and the same conductance. Valid from a
length/diameter of 15 and up to 0.6 λ, within 1.5 % of |Z|.

Source: Richmond & Geary, IEEE Trans. AP-23 (1975); Balanis, *Antenna Theory*, 4th ed., §8.4-8.5.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache, cached_property
from typing import Final

import numpy as np
from scipy.special import sici

from models.conventions import ETA0, ComplexArray, FloatArray
from models.moment_kernel import cosine_and_sine

__all__ = ["CAP", "GAP", "PLACES", "Wire", "driven_shapes", "gap_share", "rod", "sinusoidal_shape"]

PLACES: Final = (0.0, 0.0413, 0.1156, 0.314, 0.7589, 0.9611, 0.9978, 1.0)
"""Where modes peak, from the gap to the end, over half the length.

Chosen by trial for the least difference from 40 modes, at 0.40 to 0.58 λ and length/diameter 15 to
500: at most 1.2 %, half of that in the mean.
"""

CAP: Final = 0.105
"""How much farther a flat end reaches than an open one, in radii.

From finite elements: 0.104 to 0.108 at length/diameter 15 and 25, 0.46 to 0.52 λ.
"""

GAP: Final = 2.79
"""Length of the tube's gap, in radii, that has the susceptance of a solid rod's 2 radii.

A tube has an inside, a rod has none: ∫ sinc²(κg/2)·(K₁/K₀ + I₁/I₀)(κa)/κ dκ of the one is that
without I of the other (static).
"""

_RING: Final = 5
"""Points of the mean over the tube's round."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Wire:
    """A batch of dipoles.

    Parameters
    ----------
    k, length, radius : (n,)
        Wavenumber, rad/m; full length and radius, m.
    places : tuple of float
        Rising from 0 to 1, over half the length. A mode peaks at each but the last: (0, 1) is a
        single sinusoid over the whole dipole.
    """

    k: FloatArray
    length: FloatArray
    radius: FloatArray
    places: tuple[float, ...] = PLACES

    @cached_property
    def heights(self) -> FloatArray:
        """Return z of the places, m, (n, modes + 1)."""
        return np.asarray(self.length[:, None] / 2.0 * np.array(self.places))

    def impedance(self) -> ComplexArray:
        """Return the impedance matrix of the modes in free space, Ω, (n, modes, modes)."""
        spans, apart, mirrored = _spans(self.places)
        ring, weights = _ring()
        distance = self.radius[:, None, None] * ring
        span = (self.length[:, None] / 2.0 * spans)[..., None]
        reach = np.sqrt(span**2 + distance**2) + span
        # R + t, and R − t without its loss of digits
        sine, cosine = sici(self.k[:, None, None] * np.stack([reach, distance**2 / reach]))
        ahead, back = (-cosine + 1j * (sine - np.pi / 2.0)) @ weights  # E1(jk(R ± t))
        place = self.k[:, None] * self.heights
        turn = np.exp(1j * place)[:, :, None]
        above, rows = apart >= 0, np.abs(apart)
        forth = np.where(above, ahead[:, rows], back[:, rows])
        against = np.where(above, back[:, rows], ahead[:, rows])
        # ∫ e^{±jkz} e^{-jkR}/R dz of a source and its mirror image, (n, source, step).
        with_z = np.diff(against * turn + back[:, mirrored] / turn)
        against_z = -np.diff(forth / turn + ahead[:, mirrored] * turn)
        low, high = turn[:, None, :-1, 0], turn[:, None, 1:, 0]
        sines = np.sin(np.diff(place))[:, None]
        rising = (with_z / low - against_z * low) / (2j * sines)
        falling = (against_z * high - with_z / high) / (2j * sines)
        falling[..., 1:] += rising[..., :-1]
        falling[:, 0] /= 2.0  # the centre is its own mirror image
        return np.asarray(1j * ETA0 / (2.0 * np.pi) * (self.kinks.swapaxes(1, 2) @ falling))

    @cached_property
    def kinks(self) -> FloatArray:
        """Return how much each mode's slope grows at each place, over k, (n, modes + 1, modes)."""
        step = np.diff(self.k[:, None] * self.heights)
        inverse, cotangent = 1.0 / np.sin(step), 1.0 / np.tan(step)
        kinks = np.zeros((step.shape[0], step.shape[1] + 1, step.shape[1]))
        m = np.arange(step.shape[1])
        kinks[:, m, m] = -cotangent
        kinks[:, m[1:], m[1:]] -= cotangent[:, :-1]
        kinks[:, m + 1, m] = inverse
        kinks[:, m[:-1], m[1:]] = inverse[:, :-1]
        kinks[:, 0] *= 2.0
        return kinks

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
        upper = self.heights
        nodes = np.concatenate([-upper[:, :0:-1], upper], axis=1)
        height = (z[:, :, None] - nodes[:, None, :])[:, None]
        radius = np.sqrt((distance**2)[:, :, None, None] + height**2)
        phase = self.k[:, None, None, None] * radius
        size = height / radius if radial else 1.0 / radius
        wave: ComplexArray = np.empty(radius.shape, dtype=np.complex128)
        cosine, sine = cosine_and_sine(phase)
        np.multiply(cosine, size, out=wave.real)
        np.multiply(sine, -size, out=wave.imag)
        # A spherical wave from every place where the current bends.
        sources = self.kinks @ shapes
        sources = np.concatenate([sources[:, :0:-1], sources], axis=1)
        sources *= (1j if radial else -1j) * ETA0 / (4.0 * np.pi)
        size, n_s, n_z, count = wave.shape
        field = (wave.reshape(size, -1, count) @ sources).reshape(size, n_s, n_z, -1)
        if radial:
            field /= distance[:, :, None, None]
        return np.asarray(field)

    def far_field(self, shapes: ComplexArray, cosine: FloatArray) -> ComplexArray:
        """Return f of every shape in directions cosθ (n_angle), (n, n_angle, n_shape)."""
        sources = self.kinks @ shapes
        sources[:, 0] /= 2.0
        lobe = np.cos((self.k[:, None] * self.heights)[:, None] * cosine[:, None]) @ sources
        sine = np.sqrt(np.maximum(1.0 - cosine**2, 0.0))[:, None]
        return np.asarray(np.where(sine < 1e-9, 0.0, lobe / np.maximum(sine, 1e-9)))

    def current_square(self) -> FloatArray:
        """Return ∫ I_m I_n dz over the whole dipole, m, (n, modes, modes)."""
        step = np.diff(self.k[:, None] * self.heights)
        sine = np.sin(step)
        own = (step - sine * np.cos(step)) / sine**2 / self.k[:, None]
        neighbour = (sine - step * np.cos(step)) / sine**2 / self.k[:, None]
        m = np.arange(step.shape[1])
        total = np.zeros((step.shape[0], m.size, m.size))
        total[:, m, m] = own
        total[:, m[1:], m[1:]] += own[:, :-1]
        total[:, m[:-1], m[1:]] = total[:, m[1:], m[:-1]] = neighbour[:, :-1]
        return total

    def currents_within(self, reach: FloatArray) -> FloatArray:
        """Return ∫ I_m dz over |z| < `reach` (n,), m, (n, modes)."""
        place = self.k[:, None] * self.heights
        low, high = place[:, :-1], place[:, 1:]
        stop = np.clip((self.k * reach)[:, None], low, high)
        scale = 2.0 / (self.k[:, None] * np.sin(high - low))
        total = scale * (np.cos(high - stop) - np.cos(high - low))
        total[:, 1:] += (scale * (1.0 - np.cos(stop - low)))[:, :-1]
        return np.asarray(total)


def rod(k: FloatArray, length: FloatArray, radius: FloatArray) -> Wire:
    """Return the tubes that act like solid rods with flat ends; parameters as of `Wire`."""
    return Wire(k=k, length=length + 2.0 * CAP * radius, radius=radius)


def gap_share(wire: Wire) -> FloatArray:
    """Return each mode's mean over the gap: its share of the terminal current, (n, modes)."""
    gap = GAP * wire.radius
    return np.asarray(wire.currents_within(gap / 2.0) / gap[:, None])


@cache
def _spans(places: tuple[float, ...]) -> tuple[FloatArray, np.ndarray, np.ndarray]:
    """Return all distances of places from places and their mirror images, and where they are.

    The indices are (source, height); a negative one marks a height below its source.
    """
    at = np.array(places)
    apart, mirrored = at - at[:, None], at + at[:, None]
    spans, index = np.unique(np.concatenate([np.abs(apart), mirrored]), return_inverse=True)
    index = index.reshape(2, at.size, at.size)
    # Index 0 is the distance 0, the same both ways.
    return spans, np.where(apart >= 0.0, index[0], -index[0]), index[1]


@cache
def _ring() -> tuple[FloatArray, FloatArray]:
    """Return distances between points of a circle over its radius, and weights of their mean."""
    nodes, weights = np.polynomial.legendre.leggauss(_RING)
    t = (nodes + 1.0) / 2.0
    # The cube crowds points where E1 has its logarithm.
    return 2.0 * np.sin(np.pi / 2.0 * t**3), 1.5 * t**2 * weights


def driven_shapes(wire: Wire, impedance: ComplexArray) -> ComplexArray:
    """Return the current driven at the gap and the current a uniform field induces, A at 1 V.

    Plates some way off add to the dipole's own field one that hardly varies along it, so these two
    are all a dipole in front of plates carries. Shape (n, modes, 2).
    """
    uniform = wire.currents_within(wire.length / 2.0) / wire.length[:, None]
    excitation = np.stack([gap_share(wire), uniform], axis=2)
    return np.asarray(np.linalg.solve(impedance, excitation + 0j))


def sinusoidal_shape(wire: Wire) -> ComplexArray:
    """Return the current sin(k(h−|z|)), 1 A at its maximum, (n, modes, 1)."""
    below_end = wire.length[:, None] / 2.0 - wire.heights[:, :-1]
    return np.asarray(np.sin(wire.k[:, None] * below_end)[..., None] + 0j)
