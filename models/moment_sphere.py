"""`moment` over the whole sphere: f_θ and f_φ of both plates and dipole in any directions.

Frame and scale are those of `models.pattern`. The grids are those that `models.moment` settles on,
so the sphere agrees with the cuts.
"""

from __future__ import annotations

import numpy as np

from models.build import Build
from models.conventions import FloatArray, wavenumber
from models.geometry import Reflectors
from models.moment import settle
from models.moment_case import Case
from models.pattern import Sphere

__all__ = ["sphere"]


def sphere(
    reflectors: Reflectors,
    frequencies_hz: FloatArray,
    build: Build,
    theta: FloatArray,
    phi: FloatArray,
) -> Sphere:
    """Return the fields of every design (n) at every frequency (n_freq) at all θ and φ.

    Parameters
    ----------
    reflectors : Reflectors
        n designs.
    frequencies_hz : (n_freq,)
        Hz.
    build : Build
        Its conductivity sets the loss of plates and dipole.
    theta, phi : (n_theta,), (n_phi,)
        Radians.
    """
    k = wavenumber(frequencies_hz)
    towards = np.repeat(theta, phi.size), np.tile(phi, theta.size)
    found = settle(Case.pairs(reflectors, k), build, "solved", *towards)
    pairs = (len(reflectors), k.size)
    return Sphere(
        theta=theta,
        phi=phi,
        theta_field=found.theta.reshape(*pairs, theta.size, phi.size),
        phi_field=found.phi.reshape(*pairs, theta.size, phi.size),
        power=found.power.reshape(pairs),
        efficiency=found.efficiency.reshape(pairs),
    )
