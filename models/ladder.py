"""The ladder of models under one signature: `evaluate` gives figures, `radiate` the pattern."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from models import images, modal, moment, ray
from models.build import Build
from models.conventions import FloatArray
from models.figures import Figures, Terms, figures_of_merit
from models.geometry import Reflectors
from models.pattern import Pattern

__all__ = ["MODELS", "evaluate", "radiate"]

Radiator = Callable[[Reflectors, FloatArray, Build], Pattern]


@dataclass(frozen=True, kw_only=True)
class Model:
    """A rung: its `radiate`, what it is in one line, and whether it gives an honest match."""

    radiate: Radiator
    summary: str
    gives_match: bool


MODELS: Final[dict[str, Model]] = {
    "image": Model(
        radiate=lambda reflectors, frequencies, _build: images.radiate(reflectors, frequencies),
        summary="image sources, infinite plates, apex angle 180°/n",
        gives_match=False,
    ),
    "ray": Model(
        radiate=ray.radiate,
        summary="images, apex, rims and plate ends by rays, sinusoidal current",
        gives_match=False,
    ),
    "modal": Model(
        radiate=lambda reflectors, frequencies, _build: modal.radiate(reflectors, frequencies),
        summary="exact mode matching, plates endless along the dipole, sinusoidal current",
        gives_match=False,
    ),
    "moment": Model(
        radiate=moment.radiate,
        summary="3-D integral equation on both plates and the dipole",
        gives_match=True,
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
    if model not in MODELS:
        msg = f"model: {model!r} given, allowed: {', '.join(MODELS)}"
        raise ValueError(msg)
    frequencies = np.atleast_1d(np.asarray(frequencies_hz, dtype=np.float64))
    if frequencies.ndim != 1 or not np.all(np.isfinite(frequencies) & (frequencies > 0.0)):
        msg = f"frequencies_hz: {frequencies_hz!r} given, allowed: finite, above 0, one dimension"
        raise ValueError(msg)
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
    """
    return figures_of_merit(radiate(reflectors, frequencies_hz, model=model, build=build), terms)
