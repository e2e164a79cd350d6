"""How much of the true front the search finds, and what journal and progress cost.

Truth is every design of a grid over three of the variables, judged by the same model; the search
may use the same steps. Run by name: pytest tests/benchmarks -s
"""

from __future__ import annotations

import io
import time
from pathlib import Path

import numpy as np
import pytest
from pymoo.indicators.hv import HV
from rich.console import Console

from models.conventions import FloatArray
from optim.archive import nondominated
from optim.evaluate import Evaluator
from optim.evolve import evolve
from optim.journal import Header, Journal
from optim.margins import Judge
from optim.progress import Progress
from optim.referee import Referee
from optim.requirements import read_requirements
from optim.search import FIRST_SAMPLE, SCOUT_PATIENCE, first_sample
from optim.space import DesignSpace

MODEL = "ray"
HEADER = Header(seed=1, spec_sha256="", scout=MODEL, prove="none", versions={}, columns={})

SPEC = f"""
title = "Three variables free"
[band]
low_mhz = 430
high_mhz = 430
[require]
gain_dbi = {{ min = 9 }}
front_to_back_db = {{ min = 18 }}
beamwidth_h_deg = {{ max = 65 }}
[search]
apex_angle_deg = 90
spacing_mm = [200, 400]
plate_width_mm = [300, 900]
plate_length_mm = [300, 900]
dipole_length_mm = 328
[build]
length_step_mm = 10
[run]
scout = "{MODEL}"
prove = "none"
"""


class Scouting:
    """A search of one stage at the default budget, with the exhaustive truth beside it."""

    def __init__(self, folder: Path, text: str = SPEC) -> None:
        path = folder / "spec.toml"
        path.write_text(text, encoding="utf-8")
        self.requirements = read_requirements(path)
        self.space = DesignSpace.from_requirements(self.requirements)

    def referee(self, evaluator: Evaluator, journal: Journal) -> Referee:
        frequencies = self.requirements.band.frequencies()
        rules = Judge(self.requirements)
        return Referee("scout", self.space, rules, evaluator, frequencies, journal)

    def truth(self) -> tuple[FloatArray, int]:
        """Return the objectives of the true front and the number of designs on the grid."""
        axes = [np.array([self.space.low[0]])]
        axes += [
            np.arange(round(low / 0.01), round(high / 0.01) + 1) / 100.0
            for low, high in zip(self.space.low[1:4], self.space.high[1:4], strict=True)
        ]
        axes.append(np.array([self.space.low[4]]))
        designs = np.stack([axis.ravel() for axis in np.meshgrid(*axes, indexing="ij")], axis=1)
        reflectors, rules = self.space.reflectors(designs), Judge(self.requirements)
        with Evaluator(self.requirements, MODEL, 2) as evaluator:
            figures = evaluator.figures(reflectors, self.requirements.band.frequencies())
        objectives = rules.objectives(reflectors, figures)[rules.feasible(reflectors, figures)]
        return objectives[nondominated(objectives)], len(designs)

    def scout(self, folder: Path, seed: int) -> Referee:
        run, rng = self.requirements.run, np.random.default_rng(seed)
        console = Console(file=io.StringIO(), force_terminal=True)
        with (
            Journal(folder / f"{seed}.jsonl", HEADER, resume=False) as journal,
            Evaluator(self.requirements, MODEL, 1) as evaluator,
            Progress(console=console) as progress,
        ):
            referee = self.referee(evaluator, journal)
            evolve(
                referee,
                first_sample(self.space, FIRST_SAMPLE * run.population, rng),
                population=run.population,
                generations=run.generations,
                patience=SCOUT_PATIENCE,
                rng=rng,
                progress=progress,
            )
        return referee


@pytest.fixture(scope="module")
def truth(tmp_path_factory: pytest.TempPathFactory) -> tuple[FloatArray, int]:
    return Scouting(tmp_path_factory.mktemp("truth")).truth()


def share(found: FloatArray, true: FloatArray) -> float:
    """Return the hypervolume of `found` over that of `true`; the reference is the worst corner."""
    low, extent = true.min(axis=0), np.ptp(true, axis=0)
    corner = np.full(true.shape[1], 1.1)
    volumes = [HV(ref_point=corner)((front - low) / extent) for front in (found, true)]
    return float(volumes[0] / volumes[1])


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_share_of_the_true_front(tmp_path: Path, truth: tuple[FloatArray, int], seed: int) -> None:
    true, grid = truth
    archive = Scouting(tmp_path).scout(tmp_path, seed).archive
    found = share(archive.front.objectives, true)
    print(  # noqa: T201
        f"\nseed {seed}: {100 * found:.2f} % of the hypervolume of the true front of {len(true)} "
        f"designs, with {len(archive)} of {grid} designs judged"
    )
    assert len(archive) < 0.15 * grid
    assert 0.98 <= found <= 1.0 + 1e-9


def test_journal_and_progress_cost_little(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    spent = {"seconds": 0.0}

    def timed(kind: type, name: str) -> None:
        plain = getattr(kind, name)

        def call(*given: object, **named: object) -> object:
            began = time.perf_counter()
            try:
                return plain(*given, **named)
            finally:
                spent["seconds"] += time.perf_counter() - began

        monkeypatch.setattr(kind, name, call)

    timed(Journal, "append")
    timed(Progress, "tell")
    began = time.perf_counter()
    band = SPEC.replace("low_mhz = 430", "low_mhz = 420\npoints = 5")
    Scouting(tmp_path, band).scout(tmp_path, 1)
    overhead = spent["seconds"] / (time.perf_counter() - began)
    print(f"\njournal and progress: {100 * overhead:.2f} % of the time of a search")  # noqa: T201
    assert spent["seconds"] > 0.0
    assert overhead <= 0.03
