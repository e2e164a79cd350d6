"""The journal: what goes in comes back bit for bit, wherever a crash cut it."""

import json
import math
import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from models.conventions import FloatArray
from optim.journal import Header, Journal, JournalError, read_batches, read_header

HEADER = Header(
    seed=7,
    spec_sha256="ab" * 32,
    scout="image",
    prove="none",
    versions={"apexfront": "0.1.0", "numpy": np.__version__},
    columns={"scout": ["goal gain", "margin gain"], "check": ["goal gain", "margin gain"]},
)
BATCHES = [
    ("scout", np.array([[1.0, 0.1], [2.0, 1 / 3]]), np.array([[math.pi, -0.0], [1e-300, 5e-324]])),
    ("scout", np.array([[3.0, 0.7]]), np.array([[math.nan, math.inf]])),
    ("check", np.array([[4.0, 0.9]]), np.array([[-math.inf, 2.5]])),
]


def fill(path: Path, batches: list[tuple[str, FloatArray, FloatArray]]) -> None:
    with Journal(path, HEADER, resume=False) as journal:
        for batch in batches:
            journal.append(*batch)


def same_bits(one: FloatArray, other: FloatArray) -> bool:
    return one.shape == other.shape and one.tobytes() == other.tobytes()


def test_gives_back_what_it_took_then_runs_out(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    with Journal(path, HEADER, resume=True) as journal:
        assert journal.remaining == 3
        for stage, designs, numbers in BATCHES:
            replayed = journal.replay(stage, designs)
            assert replayed is not None
            assert same_bits(replayed, numbers)
        assert journal.replay("check", np.array([[5.0, 5.0]])) is None


@given(
    numbers=arrays(np.float64, (3, 4), elements=st.floats()),
)
@settings(derandomize=True, max_examples=50, deadline=None)
def test_every_float_survives(
    numbers: FloatArray, tmp_path_factory: pytest.TempPathFactory
) -> None:
    path = tmp_path_factory.mktemp("floats") / "journal.jsonl"
    designs = np.arange(6.0).reshape(3, 2)
    fill(path, [("scout", designs, numbers)])
    with Journal(path, HEADER, resume=True) as journal:
        replayed = journal.replay("scout", designs)
    assert replayed is not None
    assert same_bits(replayed, numbers)


@given(data=st.data())
@settings(derandomize=True, max_examples=80, deadline=None)
def test_cut_anywhere_and_gone_on_with_is_the_same_file(
    data: st.DataObject, tmp_path_factory: pytest.TempPathFactory
) -> None:
    path = tmp_path_factory.mktemp("cut") / "journal.jsonl"
    fill(path, BATCHES)
    whole = path.read_bytes()
    path.write_bytes(whole[: data.draw(st.integers(0, len(whole)))])
    with Journal(path, HEADER, resume=True) as journal:
        for stage, designs, numbers in BATCHES:
            if journal.replay(stage, designs) is None:
                journal.append(stage, designs, numbers)
    assert path.read_bytes() == whole


def test_strict_json_lines(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)

    def refuse(word: str) -> float:
        pytest.fail(f"{word} is no JSON")

    entries = [json.loads(line, parse_constant=refuse) for line in path.read_text().splitlines()]
    assert [entry.get("stage") for entry in entries] == [None, "scout", "scout", "check"]


def test_refuses_a_folder_that_holds_a_run(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    before = path.read_bytes()
    with pytest.raises(JournalError, match=r"holds a run already.*--resume"):
        Journal(path, HEADER, resume=False)
    assert path.read_bytes() == before


@pytest.mark.parametrize(
    ("other", "words"),
    [
        (replace(HEADER, seed=8), "seed: 7 recorded, 8 asked for"),
        (replace(HEADER, spec_sha256="cd" * 32), "requirements file"),
        (replace(HEADER, scout="ray"), "scout: 'image' recorded, 'ray' asked for"),
        (replace(HEADER, prove="moment"), "prove: 'none' recorded"),
        (replace(HEADER, versions={"apexfront": "9"}), "versions: "),
    ],
)
def test_refuses_another_searchs_journal(tmp_path: Path, other: Header, words: str) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    before = path.read_bytes()
    with pytest.raises(JournalError, match=words):
        Journal(path, other, resume=True)
    assert path.read_bytes() == before


def test_refuses_damage_that_is_not_at_the_end(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    lines = path.read_bytes().splitlines(keepends=True)
    lines[2] = lines[2][:20] + b"\n"
    path.write_bytes(b"".join(lines))
    with pytest.raises(JournalError, match="line 3 is damaged"):
        Journal(path, HEADER, resume=True)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ('"numbers":"', '"numbers":"*'),
        ('"designs"', '"other"'),
        ('"numbers":"', '"numbers":7,"x":"'),
    ],
)
def test_refuses_a_line_that_is_no_batch(tmp_path: Path, old: str, new: str) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    path.write_text(path.read_text().replace(old, new, 1))
    with (
        Journal(path, HEADER, resume=True) as journal,
        pytest.raises(JournalError, match="line 2 is damaged"),
    ):
        journal.replay(*BATCHES[0][:2])


def test_refuses_a_batch_that_was_not_asked_for(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    with (
        Journal(path, HEADER, resume=True) as journal,
        pytest.raises(JournalError, match="line 2 holds another batch"),
    ):
        journal.replay("scout", BATCHES[0][1] + 1e-12)


def test_one_writer_at_a_time(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    with (
        Journal(path, HEADER, resume=False),
        pytest.raises(JournalError, match="another search is writing"),
    ):
        Journal(path, HEADER, resume=True)
    with Journal(path, HEADER, resume=True) as journal:
        assert journal.remaining == 0


def test_unwritable_place_and_full_disk_are_told(tmp_path: Path) -> None:
    (tmp_path / "file").touch()
    with pytest.raises(JournalError, match="file: cannot be made: File exists"):
        Journal(tmp_path / "file" / "journal.jsonl", HEADER, resume=False)
    (tmp_path / "folder" / "journal.jsonl").mkdir(parents=True)
    with pytest.raises(JournalError, match=r"journal\.jsonl: cannot be opened: Is a directory"):
        Journal(tmp_path / "folder" / "journal.jsonl", HEADER, resume=False)
    script = (
        "import resource, sys; from pathlib import Path; import numpy as np\n"
        "import signal; signal.signal(signal.SIGXFSZ, signal.SIG_IGN)\n"
        "from optim.journal import *\n"
        "header = read_header(Path(sys.argv[1]))\n"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (1500, 1500))\n"
        "with Journal(Path(sys.argv[1]), header, resume=True) as journal:\n"
        "    try: journal.append('scout', np.ones((100, 5)), np.ones((100, 5)))\n"
        "    except JournalError as error: print(error)\n"
    )
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    done = subprocess.run(
        [sys.executable, "-c", script, str(path)],
        capture_output=True,
        text=True,
        check=True,
        cwd=Path(__file__).parents[1],
        env={**os.environ, "OPENBLAS_NUM_THREADS": "1"},
    )
    assert "journal.jsonl: cannot be written: File too large" in done.stdout
    with Journal(path, HEADER, resume=True) as journal:
        assert journal.remaining == 3


def test_header_can_be_read_alone(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    assert read_header(path) is None
    fill(path, BATCHES)
    assert read_header(path) == HEADER
    path.write_text("{}\n")
    with pytest.raises(JournalError, match="no journal of this program"):
        read_header(path)


def test_batches_can_be_read_without_a_search(tmp_path: Path) -> None:
    path = tmp_path / "journal.jsonl"
    fill(path, BATCHES)
    found = list(read_batches(path, HEADER))
    assert [stage for stage, _ in found] == ["scout", "scout", "check"]
    for (_, numbers), (_, _, asked) in zip(found, BATCHES, strict=True):
        assert numbers.tobytes() == asked.tobytes()
    with path.open("a") as file:
        file.write('{"stage":"scout"}\n')
    with pytest.raises(JournalError, match="line 5 is damaged"):
        list(read_batches(path, HEADER))
