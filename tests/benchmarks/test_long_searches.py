"""What a default search finds against long independent ones, and a long search for holes.

Run by name: pytest tests/benchmarks/test_long_searches.py -s (some minutes).
"""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

from optim.run import Options, run
from tests.test_holes import assert_holds, let_loose

SPECS = {
    # Specs of no shipped study: a narrow and a medium band, with and without match.
    "narrow": """
[band]
low_mhz = 1420
high_mhz = 1430
[require]
gain_dbi = { min = 11.5 }
front_to_back_db = { min = 22 }
beamwidth_e_deg = { max = 52 }
""",
    "band": """
[band]
low_mhz = 380
high_mhz = 430
[require]
gain_dbi = { min = 9 }
beamwidth_h_deg = { min = 45, max = 75 }
[size]
height_mm = { max = 900 }
""",
    "match": """
[band]
low_mhz = 860
high_mhz = 880
[require]
realized_gain_dbi = { min = 9.5 }
vswr = { max = 1.6, reference_ohm = 50 }
""",
}


@pytest.mark.parametrize("name", SPECS)
def test_smallest_is_near_the_best_of_long_searches(tmp_path: Path, name: str) -> None:
    def smallest(label: str, extra: str) -> float:
        spec = tmp_path / f"{label}.toml"
        spec.write_text(f'title = "{name}"\n{SPECS[name]}\n[run]\n{extra}\n', encoding="utf-8")
        result = run(spec, Options(out=tmp_path / label, jobs=2, quiet=True))
        assert len(result.found.front)
        return float(result.space.reflectors(result.found.front.designs).frontal_area.min())

    found = smallest("default", "seed = 1")
    long = 'scout = "moment"\nprove = "none"\npopulation = 160\ngenerations = 120\n'
    best = min(smallest(f"long{seed}", f"{long}seed = {seed}") for seed in (11, 12))
    sys.stdout.write(f"\n{name}: {found:.4f} m² against {best:.4f} m², {found / best - 1:+.1%}\n")
    assert found <= 1.03 * best


def test_no_holes_after_a_long_search(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert_holds(*let_loose(tmp_path, monkeypatch, population=120, generations=80, longest=2000))
