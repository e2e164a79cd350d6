"""All that stands beside a run's data, made and made again from its folder."""

from pathlib import Path

import pytest

from optim.cli import main
from optim.report import make_report
from tests.search_specs import EASY, write

TITLE = "$x^2$ <b>&</b>"


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    spec = write(tmp_path_factory.mktemp("met"), EASY.replace('"Easy"', f'"{TITLE}"'))
    folder = spec.parent / "run"
    assert main(["search", str(spec), "--out", str(folder), "--jobs", "1", "--quiet"]) == 0
    return folder


def contents(folder: Path) -> dict[str, bytes]:
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in folder.rglob("*")
        if path.suffix != ".jsonl" and path.is_file()
    }


def test_report_links_to_papers_and_pictures(folder: Path) -> None:
    html = (folder / "report.html").read_text(encoding="utf-8")
    for name in ("papers/smallest/sheet.pdf", "pictures/front.svg"):
        assert (folder / name).is_file()
        assert f'href="{name}"' in html


def test_the_command_makes_the_same_again(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = contents(folder)
    (folder / "patterns.json").unlink()
    (folder / "report.html").unlink()
    assert main(["report", str(folder)]) == 0
    assert capsys.readouterr().out.strip() == str(folder / "report.html")
    assert contents(folder) == before


def test_patterns_edited_by_hand_are_made_again(
    folder: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("optim.finish.PARTS", ("patterns",))
    before = contents(folder)
    (folder / "patterns.json").write_bytes(before["patterns.json"].replace(b"[", b"[null,", 4))
    assert main(["report", str(folder)]) == 0
    assert contents(folder) == before


@pytest.mark.parametrize("name", ["found.json", "journal.jsonl", "requirements.toml"])
def test_damaged_data_is_one_message(
    folder: Path, capsys: pytest.CaptureFixture[str], name: str
) -> None:
    before = (folder / name).read_bytes()
    try:
        (folder / name).write_bytes(before[:80] + b"\n" + before[90:])
        assert main(["report", str(folder)]) == 2
    finally:
        (folder / name).write_bytes(before)
    told = capsys.readouterr().err.splitlines()
    assert f"{folder / name}: " in told[0]
    assert len(told) == 1


def test_an_interrupt_tells_how_to_go_on(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def interrupted(_folder: Path) -> Path:
        raise KeyboardInterrupt

    monkeypatch.setattr("optim.finish.make_report", interrupted)
    monkeypatch.setattr("optim.finish.PARTS", ("patterns",))
    before = contents(folder)
    assert main(["report", str(folder)]) == 130
    (told,) = capsys.readouterr().err.splitlines()
    assert told.startswith("interrupted; what the search found is saved. Go on with:")
    assert told.endswith(f" apexfront report {folder}")
    assert contents(folder) == before


def test_trade_results_in_the_folder_are_shown(folder: Path) -> None:
    (folder / "trade").mkdir()
    (folder / "trade" / "trade.txt").write_text("one more decibel <costs> area")
    html = make_report(folder).read_text(encoding="utf-8")
    assert "one more decibel &lt;costs&gt; area" in html
    assert 'href="trade/trade.txt"' in html


def test_a_folder_without_a_run_is_bad_input(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["report", str(tmp_path)]) == 2
    assert "allowed: the folder of a finished search" in capsys.readouterr().err
