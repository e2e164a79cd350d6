"""One contract over every model, and a published case for each."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest

from models import MODELS, Figures, Reflectors, Terms, evaluate, radiate
from models.conventions import C0

NAMES = tuple(MODELS)
COLUMNS = {
    "apex_angle": np.radians([60.0, 90.0, 90.0]),
    "spacing": [0.5, 0.4, 0.6],
    "plate_width": 1.0,
    "plate_length": [0.9, 1.2, 1.2],
    "dipole_length": 0.47,
    "dipole_diameter": 0.01,
}
FREQUENCIES = C0 * np.array([0.95, 1.05])


def designs() -> Reflectors:
    return Reflectors(**COLUMNS)  # type: ignore[arg-type]


def test_the_ladder_has_the_four_rungs() -> None:
    assert NAMES == ("image", "ray", "modal", "moment")


@pytest.mark.parametrize("model", NAMES)
def test_shapes_and_bounds(model: str) -> None:
    pattern = radiate(designs(), FREQUENCIES, model=model)
    figures = evaluate(designs(), FREQUENCIES, model=model)
    for field in fields(Figures):
        assert getattr(figures, field.name).shape == (3, 2), field.name
    assert pattern.h_field.shape == pattern.e_field.shape == (3, 2, pattern.angles.size)
    # Both cuts share boresight.
    np.testing.assert_allclose(pattern.h_field[..., 0], pattern.e_field[..., 0], rtol=1e-5)
    assert (pattern.power > 0.0).all()
    assert (figures.gain_dbi <= figures.directivity_dbi + 1e-12).all()
    known = ~np.isnan(figures.vswr)
    assert (figures.vswr[known] >= 1.0).all()
    assert (figures.realized_gain_dbi[known] <= figures.gain_dbi[known] + 1e-12).all()


@pytest.mark.parametrize("model", NAMES)
def test_batches_are_rows(model: str) -> None:
    together = evaluate(designs(), FREQUENCIES, model=model)
    for i in range(3):
        alone = evaluate(designs()[i], FREQUENCIES[1], model=model)
        for field in fields(Figures):
            expected = getattr(together, field.name)[i, 1]
            given = getattr(alone, field.name)[0, 0]
            np.testing.assert_allclose(given, expected, rtol=2e-4, atol=2e-4, err_msg=field.name)


@pytest.mark.parametrize("model", NAMES)
def test_scale_invariance(model: str) -> None:
    matrix = designs().matrix()
    matrix[:, 1:] *= 0.25
    large = evaluate(designs(), FREQUENCIES, model=model)
    small = evaluate(Reflectors.from_matrix(matrix), FREQUENCIES * 4.0, model=model)
    np.testing.assert_allclose(small.directivity_dbi, large.directivity_dbi, atol=2e-3)
    np.testing.assert_allclose(small.beamwidth_h_deg, large.beamwidth_h_deg, atol=0.02)


def test_every_model_has_a_published_case() -> None:
    # A test of the model's own name that says where its values come from.
    for model, file in (
        ("image", "test_images.py"),
        ("ray", "test_ray.py"),
        ("modal", "test_modal.py"),
        ("moment", "test_moment.py"),
    ):
        text = (Path(__file__).parent / file).read_text(encoding="utf-8")
        assert model in text
        assert any(name in text for name in ("Kraus", "Balanis", "Cebik", "published")), file


def test_bad_calls_are_refused() -> None:
    with pytest.raises(ValueError, match="model: 'magic' given, allowed: image, ray"):
        evaluate(designs(), C0, model="magic")
    for bad in (0.0, -1e9, np.nan, np.inf, [[1e9]]):
        with pytest.raises(ValueError, match="frequencies_hz"):
            evaluate(designs(), bad, model="image")


@pytest.mark.parametrize("model", ["ray", "moment"])
def test_envelope_of_0_db_on_boresight_is_kept(model: str) -> None:
    # Levels are relative to boresight, whatever the last bits of the two cuts say.
    flat = (0.0, 0.0), (np.radians(10.0), 0.0)
    figures = evaluate(designs(), FREQUENCIES, model=model, terms=Terms(mask_h=flat, mask_e=flat))
    assert (figures.boresight_dip_db == 0.0).all()
    assert (figures.mask_h_db < 0.0).all()
    assert (figures.mask_e_db < 0.0).all()
