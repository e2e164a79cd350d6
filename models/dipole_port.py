"""The dipole as a two-port: its terminals, and a field that is uniform along it. Units of k: k = 1.

What plates add to a dipole's own field hardly varies along it. So the solved current is known by
three numbers: impedance Z₁₁ of the dipole alone (Ω), effective length ℓ = ∫I dz for 1 A, and the
admittance Y′ of that field's ∫E dz to ∫I dz with open terminals (lengths in 1/k). If the field is
−c·∫I dz, the terminals see

    Z = Z₁₁ + cℓ²/(1 + cY′).

The three are smooth; a Chebyshev table over length and slimness, built on first use, gives them
within 0.1 % (`LENGTHS`, `SLIMNESS`); beyond it they are solved. Current: `models.moment_wire`.

Source: reciprocity; Balanis, *Antenna Theory*, 4th ed., §2.15 (effective length), §8.6.
"""

from __future__ import annotations

from functools import cache
from typing import Final

import numpy as np
from numpy.polynomial.chebyshev import chebvander

from models.conventions import ComplexArray, FloatArray
from models.moment_wire import gap_share, rod

__all__ = ["LENGTHS", "SLIMNESS", "at_terminals", "two_port"]

LENGTHS: Final = (0.2 * 2.0 * np.pi, 0.7 * 2.0 * np.pi)
"""kl of the table."""

SLIMNESS: Final = (5e-5, 1.0 / 30.0)
"""Radius over length of the table."""

_COUNTS: Final = (14, 20)


def at_terminals(
    added: ComplexArray, k_length: FloatArray, k_radius: FloatArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return the impedance at the terminals, Ω, and the sinusoid of the same ∫I dz, for 1 A there.

    Parameters
    ----------
    added : (n,)
        What plates add to the impedance of the sinusoidal current sin(k(h−|z|)), at its maximum, Ω.
    k_length, k_radius : (n,)
        kl and k times the radius.

    Returns
    -------
    impedance, maximum : (n,)
        Ω, and the sinusoid's maximum in A.
    """
    own, length, admittance = two_port(k_length, k_radius)
    sinusoid = 2.0 * (1.0 - np.cos(k_length / 2.0))
    field = added / sinusoid**2
    maximum = length / (1.0 + field * admittance)
    return np.asarray(own + field * length * maximum), np.asarray(maximum / sinusoid)


def two_port(k_length: FloatArray, k_radius: FloatArray) -> ComplexArray:
    """Return Z₁₁, ℓ and Y′ of dipoles of kl and k times radius (n,), (3, n)."""
    slimness = k_radius / k_length
    (short, long), (thin, thick) = LENGTHS, SLIMNESS
    across = 2.0 * (k_length - short) / (long - short) - 1.0
    along = 2.0 * np.log(slimness / thin) / np.log(thick / thin) - 1.0
    vanders = [chebvander(x, n - 1) for x, n in zip((across, along), _COUNTS, strict=True)]
    numbers = np.einsum("ni,kni->kn", vanders[0], vanders[1] @ _table().swapaxes(1, 2))
    outside = np.flatnonzero(np.maximum(np.abs(across), np.abs(along)) > 1.0 + 1e-9)
    if outside.size:
        numbers[:, outside] = _solved(k_length[outside], k_radius[outside])
    return np.asarray(numbers)


def _solved(k_length: FloatArray, k_radius: FloatArray) -> ComplexArray:
    """Return what `two_port` returns, by the integral equation."""
    wire = rod(k=np.ones_like(k_length), length=k_length, radius=k_radius)
    ports = np.stack([gap_share(wire), wire.currents_within(wire.length / 2.0)], axis=2)
    currents = np.linalg.solve(wire.impedance(), ports + 0j)
    admittance = ports.swapaxes(1, 2) @ currents
    own = 1.0 / admittance[:, 0, 0]
    length = admittance[:, 0, 1] * own
    return np.stack([own, length, admittance[:, 1, 1] - admittance[:, 0, 1] * length])


@cache
def _table() -> ComplexArray:
    """Return Chebyshev's coefficients over length and the logarithm of slimness, (3, *_COUNTS)."""
    places, inverses = [], []
    for count in _COUNTS:
        points = np.cos(np.pi * (np.arange(count) + 0.5) / count)
        places.append((points + 1.0) / 2.0)
        inverses.append(np.linalg.inv(chebvander(points, count - 1)))
    length = LENGTHS[0] + (LENGTHS[1] - LENGTHS[0]) * places[0]
    slimness = SLIMNESS[0] * (SLIMNESS[1] / SLIMNESS[0]) ** places[1]
    k_length = np.repeat(length, _COUNTS[1])
    values = _solved(k_length, k_length * np.tile(slimness, _COUNTS[0]))
    return np.asarray(inverses[0] @ values.reshape(3, *_COUNTS) @ inverses[1].T)
