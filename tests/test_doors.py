"""Doors: what the search says about relaxing limits, against looking everywhere."""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from models import Figures, Reflectors, evaluate
from models.conventions import FloatArray
from optim.doors import open_doors
from optim.evaluate import Evaluator
from optim.margins import Judge
from optim.problem import View, door
from optim.progress import Progress
from optim.referee import Referee
from optim.run import Options, run
from optim.space import DesignSpace
from tests.search_specs import IMPOSSIBLE, SMALL, read, write


def test_relaxing_opens_the_door_as_far_as_exhaustion_does(tmp_path: Path) -> None:
    result = run(write(tmp_path, IMPOSSIBLE), Options(out=tmp_path / "run", jobs=1, quiet=True))
    assert not result.met
    requirements, space = result.requirements, result.space
    # With image plates only spacing and dipole length matter: all of both, on their steps.
    spacing, dipole = (
        mesh.ravel() for mesh in np.meshgrid(np.arange(200, 501, 5), np.arange(290, 351, 5))
    )
    rows = np.full((spacing.size, 5), 0.6)
    rows[:, 0], rows[:, 1], rows[:, 4] = np.pi / 2, spacing / 1e3, dipole / 1e3
    fine = requirements.band.refined().frequencies()
    figures = evaluate(space.reflectors(rows), fine, model="image")
    gain, beam = figures.gain_dbi.min(axis=1), figures.beamwidth_h_deg.max(axis=1)
    sound = figures.resistance_ohm.min(axis=1) >= 10.0
    assert not (sound & (gain >= 12.2) & (beam <= 40.0)).any()
    best = {
        "gain_dbi.min": gain[sound & (beam <= 40.0)].max(),
        "beamwidth_h_deg.max": beam[sound & (gain >= 12.2)].min(),
    }
    relaxed = json.loads((tmp_path / "run" / "summary.json").read_text())["relaxations"]
    offered = {}
    for entry in relaxed:
        (limit,) = entry["limits"]
        offered[limit["requirement"]] = limit["to"]
    assert offered.keys() == best.keys()
    assert best["gain_dbi.min"] - 0.2 < offered["gain_dbi.min"] <= best["gain_dbi.min"]
    assert best["beamwidth_h_deg.max"] <= offered["beamwidth_h_deg.max"]
    assert offered["beamwidth_h_deg.max"] < best["beamwidth_h_deg.max"] + 0.5


def test_a_size_cap_that_cut_the_ranges_is_a_door_too(tmp_path: Path) -> None:
    result = run(write(tmp_path, SMALL), Options(out=tmp_path / "run", jobs=1, quiet=True))
    relaxed = json.loads((tmp_path / "run" / "summary.json").read_text())["relaxations"]
    limits = {entry["limits"][0]["requirement"]: entry["limits"][0] for entry in relaxed}
    assert not result.met
    assert limits.keys() == {"depth_mm.max", "resistance_ohm.min"}
    limit = limits["depth_mm.max"]
    # Boresight gain over resistance: the least spacing of 45 ohm, by looking at every step.
    spacing = np.arange(0.2, 0.5, 0.005)
    rows = np.full((spacing.size, 5), 0.33)
    rows[:, 0], rows[:, 1] = np.pi / 2, spacing
    figures = evaluate(
        result.space.reflectors(rows),
        result.requirements.band.refined().frequencies(),
        model="image",
    )
    least = spacing[(figures.resistance_ohm.min(axis=1) >= 45.0)].min()
    depth = 1e3 * least + result.requirements.dipole_diameter * 500.0
    assert depth > 230.0
    assert limit["to"] == pytest.approx(depth, abs=1.0)
    assert limit["to"] > depth - 1e-9


class Notched(Evaluator):
    """The image model with 30 dB less gain at one frequency."""

    def figures(self, reflectors: Reflectors, frequencies: FloatArray) -> Figures:
        figures = super().figures(reflectors, frequencies)
        loss = np.where(np.isclose(frequencies, NOTCH), 30.0, 0.0)
        return replace(figures, gain_dbi=figures.gain_dbi - loss)


NOTCH = 425e6


def test_doors_are_those_of_all_frequencies(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked = read(tmp_path)
    space, rules = DesignSpace.from_requirements(asked), Judge(asked)
    first, *rest = asked.band.split()
    assert NOTCH not in first
    deciding = Referee(
        "scout", space, rules, Notched(asked, "image"), first, None, further=np.concatenate(rest)
    )
    # Gain and beamwidth of a 90° corner, at the edges and the middle met by more than a step.
    deciding.judge(
        np.array([[np.pi / 2, 0.3, 0.6, 0.7, 0.33]]), lambda judged: judged.violations[:, 0] > 0
    )
    tried: list[list[int]] = []

    def noted(limits: list[int]) -> View:
        tried.append(limits)
        return door(limits)

    monkeypatch.setattr("optim.doors.door", noted)
    monkeypatch.setattr("optim.doors.evolve", lambda *_, **__: None)
    open_doors(asked, deciding, deciding, np.random.default_rng(1), Progress(quiet=True))
    assert tried == [[0]]
