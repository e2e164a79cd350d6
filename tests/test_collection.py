"""Every test file is collected; every module has a test file of its name or a reason why not."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]

TESTED_ELSEWHERE = {
    "models/conventions.py": "constants and two one-line functions, used by every test",
    "models/pattern.py": "a record and a row of angles, made and read in test_figures.py",
    "models/ray_sources.py": "the near fields behind the currents that test_ray.py checks",
    "models/ray_currents.py": "the currents whose radiation test_ray.py checks",
    "optim/analysis.py": "the object and table that test_cli.py reads",
    "optim/analysis_files.py": "the files that test_cli.py looks at",
    "optim/checks.py": "what test_refusals.py and test_designfile.py refuse",
    "optim/datasheet_plots.py": "the pictures of the pages that test_datasheet.py checks",
    "optim/drafting.py": "the pen of the drawings that test_drawing.py checks",
    "optim/faults.py": "what test_refusals.py and test_designfile.py refuse",
    "optim/overview.py": "the text that test_cli.py reads",
    "optim/report_page.py": "the words that test_report.py reads on the page",
    "optim/report_quantities.py": "the numbers that test_report.py compares with summary.json",
    "optim/schema.py": "what test_requirements.py and test_designfile.py read",
    "optim/settle.py": "what test_doors.py and test_search.py end with",
    "optim/study_status.py": "the words that test_study.py reads while a study runs",
    "optim/study_table.py": "the tables that test_study.py reads",
    "optim/tolerance_table.py": "rows and object that test_robust.py reads",
    "optim/trade_files.py": "files and words that test_trade.py reads",
    "optim/units.py": "round trips in test_designfile.py",
    "optim/values.py": "what test_refusals.py refuses",
}
"""Modules without a test file of their name, each with where its tests are."""


def modules() -> list[str]:
    found = [*ROOT.glob("models/*.py"), *ROOT.glob("optim/*.py")]
    return sorted(str(path.relative_to(ROOT)) for path in found if path.name != "__init__.py")


@pytest.mark.parametrize("name", modules())
def test_module_has_tests(name: str) -> None:
    own = ROOT / "tests" / f"test_{Path(name).stem}.py"
    assert own.exists() or name in TESTED_ELSEWHERE


@pytest.mark.parametrize(("name", "reason"), TESTED_ELSEWHERE.items())
def test_reasons_are_still_true(name: str, reason: str) -> None:
    assert (ROOT / name).exists()
    assert not (ROOT / "tests" / f"test_{Path(name).stem}.py").exists()
    for file in re.findall(r"test_\w+\.py", reason):
        assert (ROOT / "tests" / file).exists()


def test_every_test_file_is_collected(request: pytest.FixtureRequest) -> None:
    asked = [Path(str(a).partition("::")[0]).resolve() for a in request.config.args]
    if asked != [ROOT / "tests"]:
        asked_for = ", ".join(map(str, asked))
        pytest.skip(f"only a whole run can tell; this one is of {asked_for}")
    if request.config.option.keyword or request.config.option.markexpr:
        pytest.skip("only a whole run can tell; this one is of a selection")
    collected = {item.path for item in request.session.items}
    # Benchmarks are asked for by name, never part of a run.
    files = set((ROOT / "tests").rglob("test_*.py")) - set((ROOT / "tests/benchmarks").rglob("*"))
    assert files <= collected


def test_every_test_file_has_a_test_that_asserts() -> None:
    for path in (ROOT / "tests").glob("test_*.py"):
        text = path.read_text(encoding="utf-8")
        for body in re.split(r"\n(?=def |@|class )", text):
            if body.startswith("def test_"):
                assert re.search(r"\bassert\b|pytest\.raises|assert_\w+\(", body), (
                    path.name,
                    body[:60],
                )
