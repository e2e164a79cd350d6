"""Populations over workers: the same figures, bit for bit, whatever the number of workers."""

from pathlib import Path

import numpy as np

from models import Figures, Reflectors, evaluate
from optim.evaluate import CHUNK, Evaluator, chunk_count
from tests.search_specs import read


def population(n: int) -> Reflectors:
    rng = np.random.default_rng(5)
    return Reflectors(
        apex_angle=np.radians(rng.uniform(60.0, 120.0, n)),
        spacing=rng.uniform(0.2, 0.4, n),
        plate_width=rng.uniform(0.3, 0.6, n),
        plate_length=rng.uniform(0.3, 0.6, n),
        dipole_length=0.33,
        dipole_diameter=0.008,
    )


def test_one_worker_is_two_workers_bit_for_bit(tmp_path: Path) -> None:
    requirements, designs = read(tmp_path), population(2 * CHUNK + 1)
    frequencies = np.array([430e6])
    with Evaluator(requirements, "moment", 1) as one, Evaluator(requirements, "moment", 2) as two:
        alone, shared = one.figures(designs, frequencies), two.figures(designs, frequencies)
    for name in Figures.names():
        assert getattr(alone, name).tobytes() == getattr(shared, name).tobytes(), name


def test_chunks_are_as_many_as_cores_share_and_none_too_large() -> None:
    counts = {n: chunk_count(n) for n in (1, 15, 16, 24, 50, 51, 100, 400)}
    assert counts == {1: 1, 15: 1, 16: 2, 24: 2, 50: 2, 51: 4, 100: 4, 400: 16}
    assert all(n / chunk_count(n) <= CHUNK for n in range(1, 2000))


def test_chunks_are_the_models_own_figures_in_order(tmp_path: Path) -> None:
    requirements, designs = read(tmp_path), population(CHUNK + 3)
    frequencies = requirements.band.frequencies()
    with Evaluator(requirements, "image", 1) as evaluator:
        found = evaluator.figures(designs, frequencies)
    direct = evaluate(designs, frequencies, model="image", terms=requirements.terms)
    assert found.gain_dbi.shape == (CHUNK + 3, 3)
    np.testing.assert_allclose(found.resistance_ohm, direct.resistance_ohm, rtol=1e-12)
