"""The input impedance over the band as a one-port network file, Touchstone 1.1 (.s1p).

S₁₁ = (Z − R)/(Z + R) as magnitude and degrees against MHz, R the reference impedance, Z at the
terminals of the feed (four times the plain dipole's where it is folded).

Source: the open specification of the format, version 1.1 (2002); from memory.
"""

from __future__ import annotations

import numpy as np

from models.conventions import FloatArray
from models.figures import Figures

__all__ = ["one_port"]


def one_port(
    figures: Figures, frequencies_hz: FloatArray, *, reference_ohm: float, about: str
) -> str | None:
    """Return the file of the first design of `figures`, or None without an impedance.

    Parameters
    ----------
    figures : Figures
        (n, n_freq).
    frequencies_hz : (n_freq,)
        Hz, ascending.
    reference_ohm : float
    about : str
        One line of comment; what is not printable ASCII becomes a question mark.
    """
    impedance = figures.resistance_ohm[0] + 1j * figures.reactance_ohm[0]
    if not np.isfinite(impedance).all():
        return None
    wave = (impedance - reference_ohm) / (impedance + reference_ohm)
    comment = "".join(c if c.isascii() and c.isprintable() else "?" for c in about)
    lines = [f"! {comment}", f"# MHz S MA R {reference_ohm:g}"]
    lines += [
        f"{frequency / 1e6:.6f} {abs(s):.8f} {np.degrees(np.angle(s)):.6f}"
        for frequency, s in zip(frequencies_hz.tolist(), wave.tolist(), strict=True)
    ]
    return "\n".join(lines) + "\n"
