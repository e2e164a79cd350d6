"""The files that ship are read without fault, say what their rules say, and are listed."""

from __future__ import annotations

import tomllib
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import qmc

from models import evaluate
from optim.faults import Source
from optim.margins import Judge
from optim.precheck import findings
from optim.requirements import read_requirements, understood
from optim.space import DesignSpace
from optim.study_file import read_study

STUDIES = Path(__file__).parents[1] / "studies"
STUDY_FILES = sorted(STUDIES.glob("study_*.toml"))
FILES = sorted(set(STUDIES.glob("*.toml")) - set(STUDY_FILES))


def test_there_are_studies() -> None:
    assert len(FILES) >= 3


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_study_is_sound_and_listed(file: Path) -> None:
    requirements = read_requirements(file)
    space = DesignSpace.from_requirements(requirements)
    assert not [finding for finding in findings(requirements, space) if finding.ruled_out]
    assert f"[{file.name}]({file.name})" in (STUDIES / "README.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("file", STUDY_FILES, ids=lambda file: file.stem)
def test_study_of_many_runs_is_sound_and_listed(file: Path) -> None:
    study = read_study(file)
    for run in study.runs:
        text = study.text(run)
        source = Source(file.name, text, "", tomllib.loads(text))
        requirements = understood(source, file)
        space = DesignSpace.from_requirements(requirements)
        assert not [finding for finding in findings(requirements, space) if finding.ruled_out]
    assert 3 <= len(study.runs) <= 24
    assert f"[{file.name}]({file.name})" in (STUDIES / "README.md").read_text(encoding="utf-8")


def test_envelope_of_bands_iv_and_v() -> None:
    # Recommendation ITU-R BT.419-3: 0 dB to 20°, then 0.4 dB a degree to 16 dB at 60°, then flat.
    mask = read_requirements(STUDIES / "valley_reception_uhf.toml").terms.mask_h
    assert mask is not None
    angles, levels = np.array(mask).T
    found = np.interp(np.radians([0.0, 20.0, 21.0, 40.0, 60.0, 180.0]), angles, levels)
    assert found == pytest.approx([0.0, 0.0, -0.4, -8.0, -16.0, -16.0])


def test_suppression_of_category_b() -> None:
    # 47 CFR 101.115(b), 932.5 to 935 MHz, category B: beamwidth 20°; suppression from 15, 20, 30,
    # 100 and 140° of 6, 10, 13, 15 and 20 dB.
    requirements = read_requirements(STUDIES / "hub_category_b.toml")
    assert (requirements.band.low_hz, requirements.band.high_hz) == (932.5e6, 935e6)
    (beamwidth,) = [lim.value for lim in requirements.limits if lim.figure == "beamwidth_h_deg"]
    assert beamwidth == 20.0
    assert requirements.terms.mask_h is not None
    angles, levels = np.array(requirements.terms.mask_h).T
    inside = np.interp(np.radians([15.1, 19.9, 20.1, 30.1, 99.0, 101.0, 141.0]), angles, levels)
    assert inside == pytest.approx([-6.0, -6.0, -10.0, -13.0, -13.0, -15.0, -20.0])


def test_category_b_is_beyond_corners_of_that_size() -> None:
    # Common practice: corners of buildable size have beamwidths well above 20°.
    requirements = read_requirements(STUDIES / "hub_category_b.toml")
    space, judge = DesignSpace.from_requirements(requirements), Judge(requirements)
    sample = qmc.Sobol(space.low.size, rng=np.random.default_rng(1)).random(64)
    designs = space.reflectors(space.snap(space.low + sample * (space.high - space.low)))
    figures = evaluate(designs, requirements.band.middle_hz, model="ray", terms=requirements.terms)
    assert not judge.feasible(designs, figures).any()
    labels = [limit.label for limit in judge.limits]
    margins = judge.margins(designs, figures)
    beam, mask = (margins[:, labels.index(name)] for name in ("beamwidth_h_deg.max", "mask_h"))
    # A split beam is narrow only in name: it breaks the envelope.
    assert np.all((beam < 0.0) | (mask < 0.0))
