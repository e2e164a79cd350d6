"""Small requirements files on the image model, which answers in microseconds, for search tests."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from optim.evaluate import Evaluator
from optim.journal import Header, Journal
from optim.margins import Judge
from optim.referee import Referee, columns
from optim.requirements import Requirements, read_requirements
from optim.space import DesignSpace

EASY = """
title = "Easy"
[band]
low_mhz = 420
high_mhz = 440
points = 3
[require]
gain_dbi = { min = 11 }
beamwidth_h_deg = { max = 60 }
[search]
apex_angle_deg = [60, 90]
spacing_mm = [200, 500]
plate_width_mm = [300, 900]
dipole_length_mm = [290, 350]
[build]
angle_step_deg = 30
length_step_mm = 5
[goals]
minimise = ["frontal_area", "beamwidth_h"]
maximise = ["gain"]
[run]
population = 20
generations = 8
scout = "image"
prove = "none"
"""

# The beam of a 90° corner narrows as the spacing grows, and its gain falls: no spacing has both.
IMPOSSIBLE = (
    EASY.replace("max = 60", "max = 40")
    .replace("min = 11", "min = 12.2")
    .replace("apex_angle_deg = [60, 90]", "apex_angle_deg = 90")
)

SMALL = """
title = "Small"
[band]
low_mhz = 420
high_mhz = 440
points = 3
[require]
resistance_ohm = { min = 45 }
[size]
depth_mm = { max = 230 }
[search]
apex_angle_deg = 90
plate_width_mm = 300
plate_length_mm = 400
dipole_length_mm = 330
[build]
length_step_mm = 5
[run]
population = 20
generations = 8
scout = "image"
prove = "none"
"""


def write(folder: Path, text: str = EASY) -> Path:
    """Write a requirements file and return its path."""
    path = folder / "spec.toml"
    path.write_text(text, encoding="utf-8")
    return path


def read(folder: Path, text: str = EASY) -> Requirements:
    """Return a requirements file, understood."""
    return read_requirements(write(folder, text))


@contextmanager
def judging(folder: Path) -> Iterator[Referee]:
    """Give a referee for the easy requirements, with its journal in `folder`."""
    requirements = read(folder)
    rules = Judge(requirements)
    header = Header(
        seed=1,
        spec_sha256="",
        scout="image",
        prove="none",
        versions={},
        columns={"scout": columns(rules)},
    )
    with Journal(folder / "journal.jsonl", header, resume=True) as journal:
        yield Referee(
            "scout",
            DesignSpace.from_requirements(requirements),
            rules,
            Evaluator(requirements, "image"),
            requirements.band.frequencies(),
            journal,
        )
