"""`modal`: the exact field of endless plates of finite width, any apex angle up to 180°.

For a dipole along z, k·sinθ takes the place of k in direction θ: exact, because the plates are
uniform in z, so that only TM_z is excited. Fields are relative to the feed alone, e^{+jωt}; it may
stand inside or outside the circle ρ = w. The dipole's current is sinusoidal. Plates conduct
perfectly (efficiency 1). Cost grows with the cube of the width.

`line_source` and `line_source_directivity` are the problem in two dimensions, to compare with what
is published on it.

Source: Harrington, *Time-Harmonic Electromagnetic Fields* (1961), §5; the solution is that of
`models.circle`.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from models.circle import circle_for
from models.conventions import ETA0, ComplexArray, FloatArray, decibels, wavenumber
from models.dipole import far_field, mutual_impedance, terminal
from models.geometry import Reflectors
from models.pattern import CUT_ANGLES, Pattern
from models.wedge_impedance import added_impedance

__all__ = ["harmonics", "input_impedance", "line_source", "line_source_directivity", "radiate"]


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
    e_field, resistance, reactance = h_field.copy(), np.zeros(shape), np.zeros(shape)
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
        reactance[row, column] = input_impedance(
            wavenumber=float(k[column]),
            apex_angle=float(alpha),
            spacing=float(reflectors.spacing[row]),
            width=float(reflectors.plate_width[row]),
            length=float(length),
            radius=float(reflectors.dipole_diameter[row]) / 2.0,
        ).imag
        # U = η|I f F|²/8π², P = ½R I²
        resistance[row, column] = ETA0 / np.pi * np.sum(weight * sine * lobe**2 * _power(amplitude))
    gap = terminal(resistance + 1j * reactance, k, reflectors.dipole_length[:, None])
    return Pattern(
        angles=angles,
        h_field=h_field,
        e_field=e_field,
        power=np.pi / ETA0 * resistance,
        resistance=gap.real,
        reactance=gap.imag,
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
    circle = circle_for(float(apex_angle), float(np.max(k_spacing)), float(np.max(k_width)))
    carry = circle.inside if k_spacing[0] <= k_width[0] else circle.outside
    return carry(k_spacing, k_width)


def input_impedance(
    *,
    wavenumber: float,
    apex_angle: float,
    spacing: float,
    width: float,
    length: float,
    radius: float,
) -> complex:
    """Return the impedance of a sinusoidal dipole at its current maximum, Ω.

    The dipole's line current is a spectrum of line sources, cos(k_z z), propagating (k_z < k) and
    evanescent; each finds its own field reflected. Known parts are taken out: the infinite corner
    (feed inside the circle) or the dipole alone (outside). Within 0.1 Ω; 1 Ω in the reactance when
    the feed stands within 0.05 λ of the rims' circle.

    Parameters
    ----------
    wavenumber : float
        rad/m.
    apex_angle : float
        Radians.
    spacing, width, length, radius : float
        S, w, dipole length and radius of its wire, m.
    """
    k, half = wavenumber, length / 2.0
    nodes, weights = np.polynomial.legendre.leggauss(24)
    t, weights = (nodes + 1.0) / 2.0, weights / 2.0
    sine = np.sqrt(1.0 - t**2)
    # Decay e^{-2γ|w−S|} of what the rims reflect bounds the evanescent part.
    reach = 14.0 / max(abs(width - spacing), 0.1 * np.pi / k)
    gamma = reach * t**2
    along = np.concatenate([k * t, np.sqrt(k**2 + gamma**2)])
    across = np.concatenate([k * sine, -1j * gamma])
    step = np.concatenate([k * weights, gamma * 2.0 * reach * t * weights / along[t.size :]])
    circle = circle_for(apex_angle, k * spacing, k * width)
    inside = spacing <= width
    reflect = circle.reflected_inside if inside else circle.reflected_outside
    lobe = (np.cos(along * half) - np.cos(k * half)) ** 2 / across**2
    added = ETA0 * k / np.pi * np.sum(step * lobe * reflect(across * spacing, across * width))
    base = mutual_impedance(k, length, radius)
    if inside:
        base = base + added_impedance(apex_angle, k * spacing, k * length)
    return complex(base + added)


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
