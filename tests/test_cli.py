"""The command line: names, exit codes, streams, and the object that `analyse --json` prints."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from models import MODELS, Figures
from optim import cli
from optim.quantities import FIGURES
from optim.requirements import read_requirements

DESIGN = """
title = "Invented [bold]corner[/bold]"
[reflector]
apex_angle_deg = 90
spacing_mm = 150
plate_width_mm = 300
plate_length_mm = 300
[dipole]
length_mm = 141
diameter_mm = 3
[band]
low_mhz = 980
high_mhz = 1020
points = 3
"""

SPEC = """
[band]
low_mhz = 902
high_mhz = 928
[require]
gain_dbi = { min = 10.5 }
[run]
scout = "image"
prove = "none"
"""


@pytest.fixture
def design(tmp_path: Path) -> Path:
    path = tmp_path / "design.toml"
    path.write_text(DESIGN, encoding="utf-8")
    return path


@pytest.fixture
def spec(tmp_path: Path) -> Path:
    path = tmp_path / "spec.toml"
    path.write_text(SPEC, encoding="utf-8")
    return path


CONTRACT = [
    "directivity_dbi",
    "gain_dbi",
    "realized_gain_dbi",
    "beamwidth_h_deg",
    "beamwidth_e_deg",
    "front_to_back_db",
    "front_to_back_180_db",
    "sidelobe_db",
    "boresight_dip_db",
    "resistance_ohm",
    "reactance_ohm",
    "vswr",
]
SIZES = ["width_mm", "height_mm", "depth_mm", "frontal_area_m2", "sheet_area_m2", "mass_kg"]


def test_analyse_prints_one_object(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    design.write_text(DESIGN.replace("= 141", "= 149.9"), encoding="utf-8")
    assert cli.main(["analyse", str(design), "--model", "image", "--json"]) == 0
    out, err = capsys.readouterr()
    found = json.loads(out)
    assert list(found) == ["model", "frequencies_mhz", *CONTRACT, *SIZES, "warnings"]
    assert found["model"] == "image"
    assert found["frequencies_mhz"] == [980.0, 1000.0, 1020.0]
    assert all(len(found[name]) == 3 for name in CONTRACT)
    # Nothing is behind infinite plates: an infinite ratio is null, as JSON has no infinity.
    assert found["front_to_back_db"] == [None] * 3
    # Kraus, Antennas: infinite 90° corner, half-wave dipole at S = λ/2: 11.82 dBi, 41.8°.
    assert found["directivity_dbi"][1] == pytest.approx(11.82, abs=0.03)
    assert found["beamwidth_h_deg"][1] == pytest.approx(41.8, abs=0.3)
    side = 300.0 * np.sqrt(2.0)
    assert [found[name] for name in SIZES[:5]] == pytest.approx(
        [side, 300.0, side / 2.0, side * 0.3 * 1e-3, 0.18]
    )
    assert any("infinite" in warning for warning in found["warnings"])
    assert err == ""


def test_analyse_takes_the_most_truthful_model(
    design: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert cli.main(["analyse", str(design), "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["model"] == "moment"
    # Two independent codes: 90°, S = .5, w = L = 1 λ gives 10.667 dBi with a half-wave dipole.
    assert found["directivity_dbi"][1] == pytest.approx(10.667, abs=0.1)
    assert found["warnings"] == []


def test_analyse_prints_a_table(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["analyse", str(design), "--model", "image"]) == 0
    out = capsys.readouterr().out
    assert "Invented [bold]corner[/bold]" in out
    assert "half-power beamwidth, H-plane" in out
    assert "424 × 300 × 212 mm" in out


def test_analyse_writes_data_and_pictures(
    design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = tmp_path / "deep" / "out"
    code = cli.main(["analyse", str(design), "--model", "image", "--json", "--out", str(folder)])
    out, err = capsys.readouterr()
    assert code == 0
    assert json.loads((folder / "analysis.json").read_text(encoding="utf-8")) == json.loads(out)
    assert (folder / "cuts.png").read_bytes().startswith(b"\x89PNG")
    assert (folder / "band.png").read_bytes().startswith(b"\x89PNG")
    assert "<svg" in (folder / "drawing.svg").read_text(encoding="utf-8")
    assert str(folder) in err


def test_image_says_where_it_has_no_answer(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "odd.toml"
    path.write_text(DESIGN.replace("= 90", "= 73"), encoding="utf-8")
    assert cli.main(["analyse", str(path), "--model", "image", "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["gain_dbi"] == [None, None, None]
    assert any("only at 180°/n" in warning for warning in found["warnings"])


def test_a_split_beam_and_a_low_resistance_are_warned_of(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    split, low = tmp_path / "split.toml", tmp_path / "low.toml"
    # Infinite 90° corner (Balanis, from memory): a null on axis at S = λ.
    split.write_text(DESIGN.replace("= 150", "= 290"), encoding="utf-8")
    low.write_text(DESIGN.replace("= 150", "= 40"), encoding="utf-8")
    for path, words in ((split, "dips on boresight"), (low, "input resistance falls to")):
        assert cli.main(["analyse", str(path), "--model", "image", "--json"]) == 0
        found = json.loads(capsys.readouterr().out)
        assert any(words in warning for warning in found["warnings"])


def test_every_figure_of_the_output_is_a_figure_of_the_models() -> None:
    assert list(FIGURES) == CONTRACT
    assert set(CONTRACT) <= set(Figures.names())


def test_new_writes_a_file_that_is_understood(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "first.toml"
    assert cli.main(["new", str(path)]) == 0
    out, err = capsys.readouterr()
    assert out == ""
    assert str(path) in err
    assert read_requirements(path).band.points == 3
    # Every key that stands in a comment is a key there is, with a value that is allowed.
    text = path.read_text(encoding="utf-8")
    lines = []
    for line in text.splitlines():
        bare = line.removeprefix("# ")
        lines.append(bare if line.startswith("# ") and " = " in bare.split("#")[0] else line)
    everything = tmp_path / "everything.toml"
    everything.write_text("\n".join(lines), encoding="utf-8")
    r = read_requirements(everything)
    assert len(r.limits) > 15
    assert len(r.tolerance) == 5
    assert r.derived == frozenset()


def test_new_leaves_an_existing_file_alone(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "mine.toml"
    path.write_text("mine", encoding="utf-8")
    assert cli.main(["new", str(path)]) == 2
    assert "exists already" in capsys.readouterr().err
    assert path.read_text(encoding="utf-8") == "mine"


def test_new_into_a_folder_that_is_not_there(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert cli.main(["new", str(tmp_path / "none" / "a.toml")]) == 2
    assert "No such file" in capsys.readouterr().err


def test_check_prints_what_was_understood(spec: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["check", str(spec)]) == 0
    out, err = capsys.readouterr()
    for words in ("902 to 928 MHz", "gain_dbi at least 10.5", "resistance_ohm at least 10"):
        assert words in out
    assert "plate_width_mm: 131 to 655 (0.40 to 2.00 λ); derived" in out
    assert all(f"{name} can" in out for name in MODELS)
    assert err == ""


def test_check_ends_with_one_where_physics_says_no(
    spec: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    spec.write_text(SPEC.replace("10.5", "40"), encoding="utf-8")
    assert cli.main(["check", str(spec)]) == 1
    assert "Ruled out: gain_dbi.min = 40 dBi" in capsys.readouterr().out


@pytest.mark.parametrize(
    "arguments",
    [
        ["frobnicate"],
        ["check"],
        ["check", "a", "b"],
        ["analyse", "x.toml", "--modle", "image"],
        ["analyse", "x.toml", "--model", "momnt"],
        ["search", "x.toml", "--prove", "nobody"],
        ["analyse", "no-such-file.toml"],
        ["check", "/"],
    ],
)
def test_bad_usage_ends_with_two(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(arguments) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err
    assert "Traceback" not in err


@pytest.mark.parametrize(
    "arguments", [["--help"], *[[c, "--help"] for c in ("new", "check", "analyse")]]
)
def test_help_ends_with_zero(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(arguments) == 0
    assert "Usage: apexfront" in capsys.readouterr().out


def test_what_may_prove_is_listed(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["search", "x.toml", "--prove", "nobody"]) == 2
    told = " ".join(capsys.readouterr().err.split())
    assert f"'nobody' given, allowed: {', '.join(MODELS)}, none" in told


def test_summaries_of_the_commands_are_whole(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["--help"]) == 0
    commands = capsys.readouterr().out.partition("Commands:")[2]
    assert "requirements file" in commands
    assert "..." not in commands


def test_version(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["--version"]) == 0
    assert capsys.readouterr().out.startswith("apexfront 0.")


@pytest.mark.parametrize(
    ("raised", "code", "words"),
    [
        (KeyboardInterrupt(), 130, "interrupted"),
        (OSError(28, "No space left on device", "out/x"), 2, "out/x: No space left on device"),
        (PermissionError(13, "Permission denied", "out"), 2, "out: Permission denied"),
    ],
)
def test_trouble_from_outside_is_one_message(
    spec: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    raised: BaseException,
    code: int,
    words: str,
) -> None:
    def fail(_path: Path) -> None:
        raise raised

    monkeypatch.setattr(cli, "read_requirements", fail)
    assert cli.main(["check", str(spec)]) == code
    assert capsys.readouterr().err.strip() == words


def test_folder_of_results_that_is_a_file(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code = cli.main(["analyse", str(design), "--model", "image", "--out", str(design)])
    assert code == 2
    assert str(design) in capsys.readouterr().err


def test_in_a_process_of_its_own_with_a_plain_terminal(spec: Path) -> None:
    program = "import sys; from optim.cli import main; sys.exit(main())"
    run = subprocess.run(
        [sys.executable, "-c", program, "check", str(spec)],
        capture_output=True,
        check=False,
        env={"PYTHONIOENCODING": "ascii", "PYTHONPATH": str(Path(cli.__file__).parents[1])},
    )
    assert run.returncode == 0
    assert b"902 to 928 MHz" in run.stdout
    assert run.stderr == b""


@pytest.mark.parametrize("messages_too", [False, True])
@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        (["analyse", "design.toml", "--model", "image", "--out", "out"], 0),
        (["check", "spec.toml"], 1),
        (["search", "spec.toml", "--out", "run", "--jobs", "1"], 1),
        (["check", "none.toml"], 2),
    ],
)
def test_a_reader_that_has_seen_enough_changes_nothing(
    design: Path, spec: Path, arguments: list[str], code: int, messages_too: bool
) -> None:
    # No corner on the mast gives 40 dBi: physics says no, and so does a search.
    few = "population = 4\ngenerations = 1\n[run]"
    spec.write_text(SPEC.replace("10.5", "40").replace("[run]", f"[run]\n{few[:-6]}"))
    program = "import sys; from optim.cli import main; sys.exit(main())"
    ours, theirs = os.pipe()
    os.close(ours)
    run = subprocess.run(
        [sys.executable, "-c", program, *arguments],
        stdout=theirs,
        stderr=theirs if messages_too else subprocess.PIPE,
        check=False,
        cwd=design.parent,
        env={"PYTHONPATH": str(Path(cli.__file__).parents[1])},
    )
    os.close(theirs)
    assert run.returncode == code
    assert messages_too or b"Error" not in run.stderr
    assert (design.parent / "out" / "drawing.svg").exists() == (arguments[0] == "analyse")
    assert (design.parent / "run" / "report.html").exists() == (arguments[0] == "search")
