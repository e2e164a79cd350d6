"""The ladder of models under one signature: `evaluate` gives figures, `radiate` the pattern."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from models import images, modal, moment, moment_sphere, ray
from models.build import Build
from models.conventions import FloatArray
from models.figures import Figures, Terms, figures_of_merit
from models.geometry import Reflectors
from models.pattern import Pattern, Sphere

__all__ = ["MODELS", "evaluate", "radiate", "sphere"]

Radiator = Callable[[Reflectors, FloatArray, Build], Pattern]
Surrounder = Callable[[Reflectors, FloatArray, Build, FloatArray, FloatArray], Sphere]


@dataclass(frozen=True, kw_only=True)
class Model:
    """A rung: its `radiate`, what it is in one line, whether it gives an honest match.

    `sphere` is None where the model gives the principal cuts only.
    """

    radiate: Radiator
    summary: str
    gives_match: bool
    sphere: Surrounder | None = None


MODELS: Final[dict[str, Model]] = {
    "image": Model(
        radiate=lambda reflectors, frequencies, _build: images.radiate(reflectors, frequencies),
        summary="image sources, infinite plates, apex angle 180°/n",
        gives_match=False,
    ),
    "ray": Model(
        radiate=ray.radiate,
        summary="images, apex, rims and plate ends by rays, solved terminals",
        gives_match=True,
    ),
    "modal": Model(
        radiate=lambda reflectors, frequencies, _build: modal.radiate(reflectors, frequencies),
        summary="mode matching, plates endless along the dipole, sinusoidal current",
        gives_match=False,
    ),
    "moment": Model(
        radiate=moment.radiate,
        summary="3-D integral equation on both plates and the dipole",
        gives_match=True,
        sphere=moment_sphere.sphere,
    ),
}


def radiate(
    reflectors: Reflectors,
    frequencies_hz: ArrayLike,
    *,
    model: str = "moment",
    build: Build | None = None,
) -> Pattern:
    """Return the pattern of every design at every frequency.

    Parameters
    ----------
    reflectors : Reflectors
        n designs.
    frequencies_hz : array_like, (n_freq,) or scalar
        Hz, above 0.
    model : str
        A name of `MODELS`.
    build : Build, optional
        Material, for conductor loss.

    Raises
    ------
    ValueError
        For an unknown model, or a frequency that is not finite and above 0.
    """
    _refuse_unknown(model, list(MODELS))
    frequencies = _checked(frequencies_hz)
    return MODELS[model].radiate(reflectors, frequencies, build or Build())


def evaluate(
    reflectors: Reflectors,
    frequencies_hz: ArrayLike,
    *,
    model: str = "moment",
    build: Build | None = None,
    terms: Terms | None = None,
) -> Figures:
    """Return the figures of merit of every design at every frequency, each (n, n_freq).

    Parameters and errors are those of `radiate`, and `terms`: what the figures are asked against.
    A model that does not solve the dipole gives the impedance of a sinusoidal current, but no VSWR
    and no realized gain.
    """
    figures = figures_of_merit(radiate(reflectors, frequencies_hz, model=model, build=build), terms)
    if MODELS[model].gives_match:
        return figures
    missing = np.full(figures.vswr.shape, np.nan)
    return replace(figures, vswr=missing, realized_gain_dbi=missing)


def sphere(
    reflectors: Reflectors,
    frequencies_hz: ArrayLike,
    *,
    theta: ArrayLike,
    phi: ArrayLike,
    model: str = "moment",
    build: Build | None = None,
) -> Sphere:
    """Return the field of every design at every frequency over the sphere, both polarisations.

    Parameters and errors are those of `radiate`, and

    theta, phi : array_like, (n_theta,) and (n_phi,)
        Directions: all pairs of an angle from the z axis and one from boresight towards +y,
        radians.
    model : str
        One that gives more than the cuts.
    """
    around = {name: m.sphere for name, m in MODELS.items() if m.sphere is not None}
    _refuse_unknown(model, list(around))
    frequencies = _checked(frequencies_hz)
    directions = (np.atleast_1d(np.asarray(x, dtype=np.float64)) for x in (theta, phi))
    return around[model](reflectors, frequencies, build or Build(), *directions)


def _refuse_unknown(model: str, allowed: list[str]) -> None:
    if model not in allowed:
        msg = f"model: {model!r} given, allowed: {', '.join(allowed)}"
        raise ValueError(msg)


def _checked(frequencies_hz: ArrayLike) -> FloatArray:
    """Return the frequencies as an array (n_freq,), or refuse them."""
    frequencies = np.atleast_1d(np.asarray(frequencies_hz, dtype=np.float64))
    if frequencies.ndim != 1 or not np.all(np.isfinite(frequencies) & (frequencies > 0.0)):
        msg = f"frequencies_hz: {frequencies_hz!r} given, allowed: finite, above 0, one dimension"
        raise ValueError(msg)
    return frequencies
