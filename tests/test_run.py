"""A run from file to folder, and all that is refused on the way, through the command line."""

import csv
import json
import os
import tomllib
from pathlib import Path

import pytest

from models.geometry import DIMENSIONS
from optim.cli import main
from optim.designfile import read_design
from optim.outcome import read_outcome
from tests.search_specs import EASY, IMPOSSIBLE, write


def command(spec: Path, *options: str) -> int:
    return main(["search", str(spec), "--jobs", "1", "--out", str(spec.parent / "run"), *options])


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("met")
    assert command(write(folder), "--quiet") == 0
    return folder / "run"


def test_summary_of_a_spec_that_is_met(folder: Path) -> None:
    summary = json.loads((folder / "summary.json").read_text())
    assert summary["status"] == "met"
    assert summary["seed"] == 1
    assert summary["evaluations"]["image"] > 200
    assert summary["seconds"] > 0.0
    assert set(summary["versions"]) == {"apexfront", "numpy", "scipy", "pymoo"}
    assert len(summary["spec_sha256"]) == 64
    assert summary["recommended"][0]["role"] == "smallest"
    for entry in summary["recommended"]:
        assert entry["margins"]["gain_dbi.min"] == pytest.approx(
            entry["figures"]["gain_dbi"] - 11.0, abs=1e-4
        )
        assert min(entry["margins"].values()) >= 0.0


def test_design_files_are_the_rows_they_stand_for(folder: Path) -> None:
    rows = list(csv.DictReader((folder / "front.csv").read_text().splitlines()))
    for entry in json.loads((folder / "summary.json").read_text())["recommended"]:
        design = read_design(folder / entry["design_file"])
        table = tomllib.loads((folder / entry["design_file"]).read_text())
        (row,) = [
            row
            for row in rows
            if float(row["spacing_mm"]) == table["reflector"]["spacing_mm"]
            and float(row["dipole_length_mm"]) == table["dipole"]["length_mm"]
            and float(row["plate_length_mm"]) == table["reflector"]["plate_length_mm"]
            and float(row["plate_width_mm"]) == table["reflector"]["plate_width_mm"]
        ]
        assert float(row["frontal_area_m2"]) == pytest.approx(
            design.reflectors.frontal_area[0], abs=1e-6
        )


def test_front_columns(folder: Path) -> None:
    rows = list(csv.reader((folder / "front.csv").read_text().splitlines()))
    assert rows[0] == [
        "apex_angle_deg", "spacing_mm", "plate_width_mm", "plate_length_mm", "dipole_length_mm",
        "dipole_diameter_mm", "width_mm", "height_mm", "depth_mm", "frontal_area_m2", "mass_kg",
        "directivity_dbi", "gain_dbi", "realized_gain_dbi", "beamwidth_h_deg", "beamwidth_e_deg",
        "front_to_back_db", "front_to_back_180_db", "sidelobe_db", "boresight_dip_db",
        "resistance_ohm", "reactance_ohm", "vswr", "smallest_margin", "model",
    ]  # fmt: skip
    assert len(DIMENSIONS) == 6
    areas = [float(row[9]) for row in rows[1:]]
    assert areas == sorted(areas)
    assert {row[-1] for row in rows[1:]} == {"image"}


def test_not_met_is_exit_1_and_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert command(write(tmp_path, IMPOSSIBLE)) == 1
    told = capsys.readouterr()
    assert "Not met" in told.out
    assert "Relax beamwidth_h_deg.max from 40 to " in told.out
    summary = json.loads((tmp_path / "run" / "summary.json").read_text())
    assert summary["status"] == "not met"
    assert summary["recommended"] == []
    assert {"gain_dbi.min", "beamwidth_h_deg.max"} <= set(summary["binding"])
    assert read_design(tmp_path / "run" / summary["nearest"][0]["design_file"])
    assert len((tmp_path / "run" / "front.csv").read_text().splitlines()) == 1


def test_met_is_shown_as_a_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert command(write(tmp_path)) == 0
    told = capsys.readouterr()
    assert told.out.startswith("Met: ")
    assert "min 11" in told.out
    assert "wrote front.csv" in told.err


def test_a_folder_with_a_run_is_left_alone(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    before = (folder / "journal.jsonl").read_bytes()
    assert command(folder.parent / "spec.toml") == 2
    assert "holds a run already" in capsys.readouterr().err
    assert (folder / "journal.jsonl").read_bytes() == before


def test_a_journal_with_an_unknown_model_is_refused(
    folder: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "run").mkdir()
    journal = (folder / "journal.jsonl").read_text().replace('"scout":"image"', '"scout":"other"')
    (tmp_path / "run" / "journal.jsonl").write_text(journal)
    assert command(write(tmp_path), "--resume") == 2
    assert "models of another version" in capsys.readouterr().err


def test_results_without_their_journal_are_not_mixed_with_others(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    # Designs, papers and patterns of the first search would stand beside those of the second.
    (tmp_path / "run").mkdir()
    (tmp_path / "run" / "found.json").write_text("{}")
    for options in ((), ("--resume",)):
        assert command(write(tmp_path), *options) == 2
        assert "results of a run without its journal" in capsys.readouterr().err
    assert [path.name for path in (tmp_path / "run").iterdir()] == ["found.json"]


def test_resuming_a_finished_run_writes_its_results_again(folder: Path) -> None:
    front = (folder / "front.csv").read_bytes()
    (folder / "front.csv").unlink()
    assert command(folder.parent / "spec.toml", "--resume", "--quiet") == 0
    assert (folder / "front.csv").read_bytes() == front


def test_resuming_takes_the_seed_of_the_journal(tmp_path: Path) -> None:
    spec = write(tmp_path)
    assert command(spec, "--seed", "5", "--quiet") == 0
    assert command(spec, "--resume", "--quiet") == 0
    assert json.loads((tmp_path / "run" / "summary.json").read_text())["seed"] == 5


@pytest.mark.parametrize(
    ("change", "options", "words"),
    [
        ("", ("--seed", "2"), "seed: 1 recorded, 2 asked for"),
        ("\n", (), "requirements file (sha256)"),
        ("", ("--scout", "moment"), "scout: 'image' recorded, 'moment' asked for"),
    ],
)
def test_another_searchs_journal_is_refused(
    folder: Path,
    capsys: pytest.CaptureFixture[str],
    change: str,
    options: tuple[str, ...],
    words: str,
) -> None:
    write(folder.parent, EASY + change)
    assert command(folder.parent / "spec.toml", "--resume", *options) == 2
    assert words in capsys.readouterr().err
    write(folder.parent)


def test_a_match_that_nobody_judges_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    spec = write(tmp_path, EASY.replace("[search]", "vswr = { max = 1.8 }\n[search]"))
    assert command(spec) == 2
    told = capsys.readouterr().err
    assert "image, which cannot judge vswr.max, given, allowed: " in told
    assert "moment" in told
    assert not (tmp_path / "run").exists()


def test_a_goal_that_nobody_judges_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    spec = write(tmp_path, EASY.replace('["gain"]', '["realized_gain"]'))
    assert command(spec) == 2
    assert "cannot judge goal realized_gain" in capsys.readouterr().err


def test_a_folder_that_cannot_be_made_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "run").write_text("a file")
    assert command(write(tmp_path)) == 2
    assert f"{tmp_path / 'run'}" in capsys.readouterr().err


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_that_cannot_be_written_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "run").mkdir(mode=0o500)
    assert command(write(tmp_path)) == 2
    assert "Permission denied" in capsys.readouterr().err


@pytest.mark.parametrize(
    "name", [b"\xff\n\x1b[31m\xe2\x80\xae.toml", b"x" * 240 + b".toml", b" .toml"]
)
def test_a_file_name_of_any_bytes_stands_in_for_a_title(tmp_path: Path, name: bytes) -> None:
    spec = tmp_path / os.fsdecode(name)
    spec.write_text(EASY.replace('title = "Easy"', ""))
    assert command(spec, "--quiet") == 0
    again, _ = read_outcome(tmp_path / "run")
    title = again.requirements.title
    assert 0 < len(title) <= 200
    assert title.isprintable()
    # The rules for a title hold for that of a design file, which must be read.
    assert read_design(tmp_path / "run/recommended/smallest.toml").title.startswith(title[:180])


def test_quiet_is_quiet(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert command(write(tmp_path), "--quiet") == 0
    assert capsys.readouterr().err == ""
