"""`moment` over the whole sphere: f_θ and f_φ of both plates and dipole in any directions.

Frame and scale are those of `models.pattern`. Each pair of design and frequency is solved on the
grids that `models.moment` settles on, so the sphere agrees with the cuts.
"""

from __future__ import annotations

import numpy as np

from models.build import Build
from models.conventions import ComplexArray, FloatArray, wavenumber
from models.geometry import Reflectors
from models.moment import DENSITIES, ENOUGH_DB, Case, answers, doubt, radiate
from models.moment_field import Sky
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
    pattern = radiate(reflectors, frequencies_hz, build)
    case = Case.pairs(reflectors, wavenumber(frequencies_hz))
    towards = Sky(
        count=0,
        theta=np.repeat(theta, phi.size),
        phi=np.tile(phi, theta.size),
        weights=np.empty(0),
        interpolation=np.empty((0, 0)),
    )
    pairs = [_towards(case.rows(np.array([row])), towards) for row in range(case.k.size)]
    shape = (*pattern.power.shape, theta.size, phi.size)
    return Sphere(
        theta=theta,
        phi=phi,
        theta_field=np.reshape([f_theta for f_theta, _ in pairs], shape),
        phi_field=np.reshape([f_phi for _, f_phi in pairs], shape),
        power=pattern.power,
        efficiency=pattern.efficiency,
    )


def _towards(case: Case, towards: Sky) -> tuple[ComplexArray, ComplexArray]:
    """Return f_θ and f_φ of one pair, (n_dir,) each."""
    for density in DENSITIES:
        key = case.counts(density)[0].tolist()
        sky = Sky.of(key[-1])
        if doubt(sky, *answers(case, key, "solved", sky))[0] <= ENOUGH_DB:
            break
    answer, _ = answers(case, key, "solved", towards)
    return answer.theta[0], answer.phi[0]
