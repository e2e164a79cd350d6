"""Between files and the inside: degrees and millimetres in files, radians and metres inside.

Only this module converts dimensions, both ways with the same arithmetic, so that a dimension that
is a short number in a file comes back from it as exactly the number that was judged.
"""

from __future__ import annotations

from typing import Final

import numpy as np

__all__ = ["FILE_KEYS", "VARIABLES", "from_file", "to_file"]

VARIABLES: Final = ("apex_angle", "spacing", "plate_width", "plate_length", "dipole_length")
"""What a search may vary, in the order of the columns of a design space."""

FILE_KEYS: Final = {
    name: f"{name}_deg" if name == "apex_angle" else f"{name}_mm" for name in VARIABLES
}
"""The variables' keys in `[search]` and `[tolerance]`."""


def from_file(variable: str, value: float) -> float:
    """Return a dimension in radians (angles) or metres (the rest), given in degrees or mm."""
    return float(np.radians(value)) if variable.endswith("angle") else value / 1000.0


def to_file(variable: str, value: float) -> float:
    """Return a dimension in degrees or mm, as the shortest number that reads back the same."""
    exact = float(np.degrees(value)) if variable.endswith("angle") else value * 1000.0
    for digits in range(1, 17):
        short = float(f"{exact:.{digits}g}")
        if from_file(variable, short) == value:
            return short
    return exact
