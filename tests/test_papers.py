"""Every paper is there, readable by its own kind of reader, and the same each time."""

from __future__ import annotations

import csv
import re
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree as ET

import numpy as np
import pytest
import skrf
from ezdxf.filemanagement import readfile

from models import Reflectors, radiate
from optim.cli import main
from optim.papers import FOLDER, write_papers, write_run
from optim.subject import Subject
from tests.search_specs import SMALL, read, write
from tests.test_result import result, row

HOSTILE = "<script>alert(1)</script> ../../x $\\\\frac{1}{0}$"
SPEC = f"""
title = '''{HOSTILE}'''
[band]
low_mhz = 420
high_mhz = 440
points = 2
[require]
gain_dbi = {{ min = 9 }}
"""
PAPERS = {
    "sheet.pdf",
    "drawing.pdf",
    "drawing.svg",
    "blank.dxf",
    "plate.dxf",
    "cut_list.txt",
    "cut_list.csv",
    "pattern_h.csv",
    "pattern_e.csv",
    "sphere.csv",
    "match.s1p",
}
CORNER = Reflectors(
    apex_angle=np.radians(90.0),
    spacing=0.33,
    plate_width=0.6,
    plate_length=0.6,
    dipole_length=0.33,
    dipole_diameter=0.006,
)


def _subject(folder: Path, model: str = "moment", reflectors: Reflectors = CORNER) -> Subject:
    requirements = read(folder, SPEC)
    frequencies = requirements.band.refined().frequencies()
    pattern = radiate(reflectors, frequencies, model=model, build=requirements.build)
    return Subject(
        requirements=requirements,
        reflectors=reflectors,
        role="most_margin",
        model=model,
        pattern=pattern,
    )


@pytest.fixture(scope="module")
def place(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("run")
    write_papers(folder, _subject(folder))
    return folder


def test_every_paper_is_in_the_folder_of_its_role(place: Path) -> None:
    found = {str(p.relative_to(place)) for p in place.rglob("*") if p.is_file()} - {"spec.toml"}
    assert found == {f"{FOLDER}/most_margin/{name}" for name in PAPERS}


def test_each_opens_as_what_it_is(place: Path, tmp_path: Path) -> None:
    papers = place / FOLDER / "most_margin"
    for name in ("sheet.pdf", "drawing.pdf"):
        content = (papers / name).read_bytes()
        assert content.startswith(b"%PDF")
        assert content.rstrip().endswith(b"%%EOF")
    # A4 is 210 by 297 mm; a point is 1/72 inch.
    boxes = re.findall(rb"/MediaBox \[ 0 0 (\S+) (\S+) \]", (papers / "sheet.pdf").read_bytes())
    np.testing.assert_allclose(
        np.array(boxes, float) * 25.4 / 72.0, [[210.0, 297.0]] * 2, rtol=1e-6
    )
    root = ET.fromstring((papers / "drawing.svg").read_text(encoding="utf-8"))
    assert root.tag.endswith("svg")
    assert not [e for e in root.iter() if e.tag.lower().endswith("script")]
    for name in ("blank.dxf", "plate.dxf"):
        assert not readfile(papers / name).audit().errors
    network = skrf.Network(str(papers / "match.s1p"))
    figures = _subject(tmp_path).figures
    np.testing.assert_allclose(network.s_vswr[:, 0, 0], figures.vswr[0], rtol=0.01)
    with (papers / "cut_list.csv").open(encoding="utf-8") as stream:
        assert list(csv.DictReader(stream))


def test_same_bytes_each_time(place: Path, tmp_path: Path) -> None:
    for path in write_papers(tmp_path, _subject(tmp_path)):
        assert path.read_bytes() == (place / path.relative_to(tmp_path)).read_bytes(), path.name


def test_what_a_model_cannot_give_is_left_out(tmp_path: Path) -> None:
    written = {path.name for path in write_papers(tmp_path, _subject(tmp_path, model="image"))}
    assert written == PAPERS - {"sphere.csv", "match.s1p"}


@pytest.mark.parametrize("role", ["../x", "a/b", "", "A", "x\n"])
def test_roles_make_no_paths(role: str, tmp_path: Path) -> None:
    with pytest.raises(ValueError, match=r"role: .* given, allowed: small letters"):
        write_papers(tmp_path, replace(_subject(tmp_path, model="image"), role=role))
    assert not (tmp_path / FOLDER).exists()


def test_papers_are_for_what_meets_the_requirements(tmp_path: Path) -> None:
    design = row(0.33, 0.5, 11.5, 50.0)
    assert write_run(tmp_path, result(tmp_path, nearest=design)) == []
    written = write_run(tmp_path, result(tmp_path, front=design))
    assert {path.parent.name for path in written} == {"smallest"}
    assert all(path.is_relative_to(tmp_path / FOLDER / "smallest") for path in written)


def test_a_search_writes_them(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    spec = write(tmp_path, SMALL.replace("min = 45", "min = 43"))
    assert main(["search", str(spec), "--out", str(tmp_path / "out"), "--jobs", "1"]) == 0
    assert "wrote papers, pictures and" in capsys.readouterr().err
    assert (tmp_path / "out" / FOLDER).is_dir()
    roles = {path.stem for path in (tmp_path / "out" / "recommended").iterdir()}
    papers = tmp_path / "out" / FOLDER
    assert roles
    assert {path.name for path in papers.iterdir()} == roles
    for role in roles:
        assert {path.name for path in (papers / role).iterdir()} == PAPERS - {
            "sphere.csv",
            "match.s1p",
        }
