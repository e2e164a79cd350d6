"""Broken requirements files and what is said of them; from Python and the command line."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optim.cli import main
from optim.faults import MAX_BYTES, Fault
from optim.requirements import SpecError, read_requirements
from tests.spec_texts import FULL, GOOD, read, with_lines, written

# Each broken file with the fragments that its error must hold; the first is the dotted key.
BROKEN = {
    "misspelt key": (with_lines(band="hihg_mhz = 3"), ["band.hihg_mhz", "did you mean high_mhz"]),
    "misspelt table": (GOOD + "[serach]\n", ["serach", "did you mean search"]),
    "text for a number": (with_lines(run='seed = "1"'), ["run.seed", "'1'", "whole number"]),
    "truth for a number": (GOOD.replace("10.5", "true"), ["require.gain_dbi.min", "true"]),
    "low above high": (GOOD.replace("902", "960"), ["band.high_mhz", "928", "960"]),
    "not a number": (GOOD.replace("10.5", "nan"), ["require.gain_dbi.min", "nan"]),
    "infinity": (GOOD.replace("928", "inf"), ["band.high_mhz", "inf"]),
    "huge number": (GOOD.replace("928", "1e308"), ["band.high_mhz", "1e+308"]),
    "integer beyond floats": (GOOD.replace("928", "9" * 400), ["band.high_mhz", "40 digits"]),
    "negative cap": (with_lines(size="width_mm = { max = -5 }"), ["size.width_mm.max", "-5"]),
    "plain number for a cap": (with_lines(size="mass_kg = 5"), ["size.mass_kg", "5", "max"]),
    "wind without speed": (
        with_lines(size="wind_load_n = { max = 100 }"),
        ["size.wind_load_n.wind_speed_m_s", "nothing"],
    ),
    "no band": (GOOD.replace("[band]\nlow_mhz = 902\nhigh_mhz = 928", ""), ["band.low_mhz"]),
    "half a band": (GOOD.replace("high_mhz = 928", ""), ["band.high_mhz", "nothing"]),
    "band of decades": (GOOD.replace("928", "9280"), ["band.high_mhz", "4 times"]),
    "one point for a band": (with_lines(band="points = 1"), ["band.points", "2 or more"]),
    "a billion points": (with_lines(band="points = 1_000_000_000"), ["band.points", "201"]),
    "points with a fraction": (with_lines(band="points = 5.0"), ["band.points", "5.0"]),
    "points for one frequency": (
        with_lines(band="points = 3").replace("928", "902"),
        ["band.points", "3", "low_mhz is high_mhz"],
    ),
    "no requirement": (GOOD.replace("gain_dbi = { min = 10.5 }", ""), ["require", "at least one"]),
    "empty requirement": (
        GOOD.replace("{ min = 10.5 }", "{}"),
        ["require.gain_dbi.min", "nothing"],
    ),
    "wrong side": (GOOD.replace("min = 10.5", "max = 10.5"), ["require.gain_dbi.max", "min"]),
    "beamwidth crossed": (
        with_lines(require="beamwidth_e_deg = { min = 60, max = 40 }"),
        ["require.beamwidth_e_deg.min", "60", "40"],
    ),
    "side lobe above the beam": (
        with_lines(require="sidelobe_db = { max = 12 }"),
        ["require.sidelobe_db.max", "12", "relative to boresight"],
    ),
    "mismatch below one": (with_lines(require="vswr = { max = 0.9 }"), ["require.vswr.max", "0.9"]),
    "two references": (
        with_lines(require="vswr = { max = 2, reference_ohm = 75 }", build="reference_ohm = 50"),
        ["build.reference_ohm", "50", "75"],
    ),
    "mask not sorted": (
        with_lines(require="mask_h = [[0, 0], [60, -16], [20, 0]]"),
        ["require.mask_h", "rising"],
    ),
    "mask of wrong shape": (
        with_lines(require="mask_h = [[0, 0], [20, 0, 1]]"),
        ["require.mask_h", "pairs", "[1]"],
    ),
    "mask of one point": (with_lines(require="mask_e = [[0, 0]]"), ["require.mask_e", "two to"]),
    "mask past the rear": (
        with_lines(require="mask_h = [[0, 0], [200, -5]]"),
        ["require.mask_h", "180", "[1]"],
    ),
    "mask of text": (with_lines(require='mask_h = "ITU"'), ["require.mask_h", "'ITU'"]),
    "apex angle beyond flat": (
        with_lines(search="apex_angle_deg = [90, 200]"),
        ["search.apex_angle_deg", "[90, 200]", "180"],
    ),
    "spacing of many wavelengths": (
        with_lines(search="spacing_mm = [100, 5000]"),
        ["search.spacing_mm", "5000", "wavelengths"],
    ),
    "range crossed": (
        with_lines(search="plate_width_mm = [400, 300]"),
        ["search.plate_width_mm", "low not above high"],
    ),
    "range of three": (
        with_lines(search="plate_width_mm = [1, 2, 3]"),
        ["search.plate_width_mm", "[1, 2, 3]"],
    ),
    "negative size": (with_lines(search="spacing_mm = -10"), ["search.spacing_mm", "-10"]),
    "negative thickness": (
        with_lines(build="sheet_thickness_mm = -1"),
        ["build.sheet_thickness_mm", "-1"],
    ),
    "coarse step": (with_lines(build="length_step_mm = 200"), ["build.length_step_mm", "200"]),
    "unknown feed": (with_lines(build='feed = "foldet"'), ["build.feed", "did you mean folded"]),
    "negative tolerance": (
        with_lines(tolerance="spacing_mm = -1"),
        ["tolerance.spacing_mm", "-1"],
    ),
    "yield in percent": (with_lines(tolerance="min_yield = 95"), ["tolerance.min_yield", "95"]),
    "unknown goal": (
        with_lines(goals='minimise = ["frontal_aera"]'),
        ["goals.minimise[0]", "did you mean frontal_area"],
    ),
    "goal the wrong way": (
        with_lines(goals='minimise = ["gain"]'),
        ["goals.minimise[0]", "'gain'"],
    ),
    "goal twice": (
        with_lines(goals='minimise = ["mass", "mass"]'),
        ["goals.minimise[1]", "each goal once"],
    ),
    "yield without a tolerance": (
        with_lines(goals='maximise = ["yield"]'),
        ["goals.maximise", "[tolerance]", "spacing_mm"],
    ),
    "least yield of nothing that deviates": (
        with_lines(tolerance="spacing_mm = 0\nmin_yield = 0.9"),
        ["tolerance.min_yield", "± above 0"],
    ),
    "no goal": (with_lines(goals="minimise = []"), ["goals", "at least one"]),
    "goals as text": (with_lines(goals='minimise = "mass"'), ["goals.minimise", "a list"]),
    "unknown model": (with_lines(run='scout = "momnt"'), ["run.scout", "did you mean moment"]),
    "no population": (with_lines(run="population = 0"), ["run.population", "0"]),
    "no generations": (with_lines(run="generations = 0"), ["run.generations", "0"]),
    "table for a title": (GOOD.replace('"Invented link"', "{ a = 1 }"), ["title", "a table"]),
    "title with escapes": (GOOD.replace("Invented link", "a\\u001b[2Jb"), ["title", "one line"]),
    "title of a book": (GOOD.replace("Invented link", "x" * 300), ["title", "200 characters"]),
    "number for a table": ("band = 5\n" + GOOD.partition("[require]")[2], ["band", "low_mhz"]),
    "date": (GOOD.replace("928", "2020-01-01"), ["band.high_mhz", "date"]),
    "syntax": (GOOD + "\n[band\n", ["not TOML", "line", "column"]),
    "key twice": (GOOD + "\ngain_dbi = { min = 1 }\n", ["not TOML", "line"]),
    "brackets without end": ("a = " + "[" * 50_000, ["TOML"]),
    "dots without end": ("a." * 20_000 + "a = 1\n" + GOOD, ["forty parts"]),
    "number without end": ("a = " + "9" * 10_000, ["TOML"]),
    "empty file": ("", ["band.low_mhz", "require"]),
}


@pytest.mark.parametrize(("text", "fragments"), BROKEN.values(), ids=BROKEN.keys())
def test_broken_file_is_refused_in_words(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, fragments: list[str]
) -> None:
    path = written(tmp_path, text)
    assert main(["check", str(path)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert "Traceback" not in err
    lines = err.strip().splitlines()
    assert all(line.startswith(f"{path}: ") for line in lines)
    assert all(" given, allowed: " in line for line in lines)
    assert any(all(fragment in line for fragment in fragments) for line in lines) or all(
        any(fragment in line for line in lines) for fragment in fragments
    )


@pytest.mark.parametrize(
    ("command", "text", "words"),
    [
        ("analyse", GOOD, "a requirements file given, allowed: a design file"),
        ("study", GOOD, "a requirements file given, allowed: a study file"),
        (
            "search",
            "[reflector]\nspacing_mm = 3",
            "a design file given, allowed: a requirements file",
        ),
        ("check", 'spec = "x.toml"', "a study file given, allowed: a requirements file"),
    ],
)
def test_file_of_another_kind_is_told_in_one_line(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], command: str, text: str, words: str
) -> None:
    path = written(tmp_path, text)
    assert main([command, str(path)]) == 2
    assert capsys.readouterr().err == f"{path}: {words}\n"


def test_every_fault_is_named_at_once(tmp_path: Path) -> None:
    text = """
    titel = "x"
    [band]
    low_mz = 900
    high_mhz = true
    [require]
    gain_dbi = { min = "10" }
    beamwidth_h_deg = { min = 70, max = 60, mid = 65 }
    vswr = { reference_ohm = 50 }
    [size]
    wind_load_n = { max = -3 }
    [goals]
    minimise = ["mass", "mess"]
    [run]
    population = 2
    """
    with pytest.raises(SpecError) as caught:
        read(tmp_path, text)
    assert {fault.key for fault in caught.value.faults} == {
        "titel",
        "band.low_mz",
        "band.low_mhz",
        "band.high_mhz",
        "require.gain_dbi.min",
        "require.beamwidth_h_deg.mid",
        "require.beamwidth_h_deg.min",
        "require.vswr.max",
        "size.wind_load_n.max",
        "size.wind_load_n.wind_speed_m_s",
        "goals.minimise[1]",
        "run.population",
    }


def test_faults_come_in_the_order_of_the_template(tmp_path: Path) -> None:
    keys = ["gain_dbi", "beamwidth_h_deg", "front_to_back_db", "sidelobe_db", "vswr"]
    lines = [f"{key} = {{}}" for key in reversed(keys)]
    caps = ["width_mm", "height_mm", "depth_mm", "mass_kg"]
    text = "\n".join(["[require]", *lines, "[size]", *(f"{cap} = {{}}" for cap in reversed(caps))])
    with pytest.raises(SpecError) as caught:
        read(tmp_path, f"[band]\nlow_mhz = 900\nhigh_mhz = 920\n{text}")
    named = [fault.key.split(".")[1] for fault in caught.value.faults]
    assert named == [*keys, *caps]


def test_faults_past_a_hundred_are_counted(tmp_path: Path) -> None:
    noise = "".join(f"key{i} = {i}\n" for i in range(2000))
    with pytest.raises(SpecError, match="1900 more faults") as caught:
        read(tmp_path, noise + GOOD)
    assert len(str(caught.value).splitlines()) == 101


def test_unreadable_files(tmp_path: Path) -> None:
    with pytest.raises(SpecError, match="no file given"):
        read_requirements(tmp_path / "none.toml")
    with pytest.raises(SpecError, match="a folder given"):
        read_requirements(tmp_path)
    with pytest.raises(SpecError, match="not UTF-8"):
        read_requirements(written(tmp_path, b'title = "\xff\xfe"'))
    with pytest.raises(SpecError, match=r"not TOML|not UTF-8"):
        read_requirements(written(tmp_path, bytes(range(256)) * 20))
    with pytest.raises(SpecError, match="unreadable"):
        read_requirements(tmp_path / "a\0b")


def test_ten_megabytes_of_noise_are_not_read(tmp_path: Path) -> None:
    noise = np.random.default_rng(1).bytes(10_000_000)
    with pytest.raises(SpecError, match=f"more than {MAX_BYTES} bytes"):
        read_requirements(written(tmp_path, noise))


def test_file_without_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*_args: object, **_options: object) -> None:
        raise PermissionError(13, "Permission denied")  # as root, the real thing cannot be had

    monkeypatch.setattr(Path, "open", refused)
    with pytest.raises(SpecError, match="may not be read"):
        read_requirements(tmp_path / "spec.toml")


VALUES = st.recursive(
    st.sampled_from(
        [
            "nan",
            "inf",
            "-inf",
            "0",
            "-1",
            "1e308",
            "-1e-308",
            "true",
            '""',
            '"1"',
            "1979-05-27",
            "07:32:00",
        ]
    )
    | st.integers().map(str)
    | st.floats(allow_nan=False, allow_infinity=False).map(repr),
    lambda inner: (
        st.lists(inner, max_size=3).map(lambda items: "[" + ", ".join(items) + "]")
        | st.dictionaries(
            st.sampled_from(["min", "max", "low_mhz", "x", "reference_ohm"]), inner, max_size=3
        ).map(lambda d: "{" + ", ".join(f"{k} = {v}" for k, v in d.items()) + "}")
    ),
    max_leaves=6,
)
KEYS = st.sampled_from([line.split(" = ")[0] for line in FULL.splitlines() if " = " in line])


@settings(derandomize=True, max_examples=80, deadline=None)
@given(changes=st.dictionaries(KEYS, VALUES, min_size=1, max_size=4))
def test_any_value_anywhere_is_read_or_refused(
    changes: dict[str, str], tmp_path_factory: pytest.TempPathFactory
) -> None:
    lines = [
        f"{key} = {changes[key]}" if (key := line.split(" = ")[0]) in changes else line
        for line in FULL.splitlines()
    ]
    path = written(tmp_path_factory.getbasetemp(), "\n".join(lines), "fuzz.toml")
    faults: tuple[Fault, ...] = ()
    r = None
    try:
        r = read_requirements(path)
    except SpecError as error:
        faults = error.faults
    assert (r is None) == bool(faults)
    assert all(fault.key and fault.given and fault.allowed for fault in faults)
    if r is not None:
        assert np.isfinite([limit.value for limit in r.limits]).all()
        assert r.band.frequencies().size == r.band.points


@settings(derandomize=True, max_examples=60, deadline=None)
@given(
    data=st.binary(max_size=300) | st.text(max_size=200).map(lambda t: t.encode("utf-8", "replace"))
)
def test_any_bytes_are_refused_in_words(
    data: bytes, tmp_path_factory: pytest.TempPathFactory
) -> None:
    path = written(tmp_path_factory.getbasetemp(), data, "noise.toml")
    with pytest.raises(SpecError, match="given, allowed"):
        read_requirements(path)
