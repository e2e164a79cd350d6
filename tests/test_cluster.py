"""Two Dask workers on loopback: same bytes, also when one is lost; and what is refused."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import ExitStack
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from optim import cluster
from optim.cli import main
from optim.cluster import ClusterError, connected, here
from optim.run import JOURNAL, Options, run
from optim.study import StudyOptions, study
from tests.search_specs import EASY, write

pytest.importorskip("distributed")
pytestmark = pytest.mark.filterwarnings("ignore::ResourceWarning", "ignore::DeprecationWarning")

ROOT = Path(__file__).parents[1]
LOOPBACK = ["--host", "127.0.0.1", "--no-dashboard"]
ONCE = ["--nthreads", "1", "--no-nanny"]
SOLVED = (
    EASY.replace('"image"', '"moment"')
    .replace("points = 3", "points = 2")
    .replace("generations = 8", "generations = 4")
    .replace("min = 11", "min = 8")
)


def dask(stack: ExitStack, *arguments: str, cwd: Path = ROOT) -> subprocess.Popen[bytes]:
    """Start a Dask process; it is ended, by its own id, with the stack."""
    code = "import sys; from dask.__main__ import main; sys.exit(main())"
    process = subprocess.Popen(
        [sys.executable, "-c", code, *arguments, *LOOPBACK],
        cwd=cwd,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )

    def end() -> None:
        process.kill()
        process.wait(timeout=30)

    stack.callback(end)
    return process


@dataclass
class Processes:
    """A scheduler and its two workers."""

    address: str
    scheduler: subprocess.Popen[bytes]
    workers: list[subprocess.Popen[bytes]]


@pytest.fixture(scope="module")
def processes(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Processes]:
    folder = tmp_path_factory.mktemp("dask")
    file = folder / "scheduler.json"
    with ExitStack() as stack:
        scheduler = dask(stack, "scheduler", "--port", "0", "--scheduler-file", str(file))
        started = [dask(stack, "worker", "--scheduler-file", str(file), *ONCE) for _ in range(2)]
        address = _address(file)
        _wait_for(address, 2)
        yield Processes(address, scheduler, started)


def _address(file: Path) -> str:
    end = time.monotonic() + 60.0
    while time.monotonic() < end:
        if file.exists() and file.stat().st_size:
            return str(json.loads(file.read_text())["address"])
        time.sleep(0.05)
    pytest.fail("the scheduler did not start")


def _wait_for(address: str, workers: int) -> None:
    import distributed

    client: Any = distributed.Client(address, set_as_default=False)  # type: ignore[no-untyped-call]
    end = time.monotonic() + 60.0
    while len(client.ncores()) != workers:
        assert time.monotonic() < end, "the workers did not come, or did not go"
        time.sleep(0.05)
    client.close()


@pytest.fixture(scope="module")
def alone(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A search by one process, its requirements file beside it."""
    folder = tmp_path_factory.mktemp("alone")
    run(write(folder, SOLVED), Options(out=folder / "run", jobs=1, quiet=True))
    return folder


def assert_same(one: Path, other: Path) -> None:
    for name in ("front.csv", JOURNAL):
        assert (one / name).read_bytes() == (other / name).read_bytes()
    assert len((one / "front.csv").read_text().splitlines()) > 2


def test_two_workers_here_are_one(alone: Path) -> None:
    run(alone / "spec.toml", Options(out=alone / "two", jobs=2, quiet=True))
    assert_same(alone / "two", alone / "run")


def test_a_cluster_is_one_worker(alone: Path, processes: Processes) -> None:
    out = alone / "cluster"
    run(alone / "spec.toml", Options(out=out, cluster=processes.address, quiet=True))
    assert_same(out, alone / "run")


def test_a_study_on_a_cluster_is_the_same_study(tmp_path: Path, processes: Processes) -> None:
    write(tmp_path)
    path = tmp_path / "study.toml"
    path.write_text('spec = "spec.toml"\nrepeats = 2', encoding="utf-8")
    far = tmp_path / "far"
    options = StudyOptions(out=far, jobs=1, cluster=processes.address, quiet=True)
    assert [outcome.status for outcome in study(path, options).outcomes.values()] == ["met", "met"]
    for number in ("0001", "0002"):
        spec = far / "runs" / number / "spec.toml"
        run(spec, Options(out=tmp_path / number, jobs=1, quiet=True))
        assert_same(spec.parent, tmp_path / number)


def test_traffic_stays_on_loopback(processes: Processes) -> None:
    with connected(processes.address) as found:
        assert found is not None
        info = found.client.scheduler_info(n_workers=-1)
        places = [info["address"], *info["workers"]]
        assert found.workers == 2
    assert all(place.startswith("tcp://127.0.0.1:") for place in places)


def test_a_worker_of_another_program_is_refused(
    processes: Processes, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    for package in ("models", "optim"):
        shutil.copytree(ROOT / package, tmp_path / package)
    with (tmp_path / "models" / "dipole.py").open("a") as source:
        source.write("# changed\n")
    out, spec = tmp_path / "run", str(write(tmp_path))
    with ExitStack() as stack:
        dask(stack, "worker", processes.address, *ONCE, cwd=tmp_path)
        _wait_for(processes.address, 3)
        assert main(["search", spec, "--out", str(out), "--cluster", processes.address]) == 2
    told = capsys.readouterr().err
    assert told.count("would compute differently: source") == 1
    assert "Traceback" not in told
    assert not (out / JOURNAL).exists()
    _wait_for(processes.address, 2)


def test_a_chunk_for_another_program_is_refused(
    alone: Path, processes: Processes, monkeypatch: pytest.MonkeyPatch
) -> None:
    """As by a worker that came after the run had started."""
    monkeypatch.setattr("optim.evaluate.here", lambda: here() | {"source": "another"})
    options = Options(out=alone / "late", cluster=processes.address, quiet=True)
    with pytest.raises(ClusterError, match="would compute differently: source"):
        run(alone / "spec.toml", options)


def when_under_way(out: Path, then: Callable[[], None]) -> threading.Thread:
    """Do something as soon as a search has recorded its first designs."""

    def wait() -> None:
        end = time.monotonic() + 60.0
        while time.monotonic() < end:
            if (out / JOURNAL).exists() and (out / JOURNAL).read_bytes().count(b"\n") >= 2:
                break
            time.sleep(0.002)
        then()

    thread = threading.Thread(target=wait)
    thread.start()
    return thread


def test_a_lost_worker_costs_no_results(alone: Path, processes: Processes) -> None:
    out = alone / "lost"
    killer = when_under_way(out, processes.workers[0].kill)
    run(alone / "spec.toml", Options(out=out, cluster=processes.address, quiet=True))
    killer.join()
    assert processes.workers[0].wait(timeout=30) != 0
    assert_same(out, alone / "run")


def test_a_lost_scheduler_stops_the_run_in_words(
    alone: Path, processes: Processes, capfd: pytest.CaptureFixture[str]
) -> None:
    """Last of those with a cluster: it is gone afterwards."""
    out, spec = alone / "gone", str(alone / "spec.toml")
    killer = when_under_way(out, processes.scheduler.kill)
    assert main(["search", spec, "--out", str(out), "--cluster", processes.address]) == 2
    killer.join()
    (told,) = capfd.readouterr().err.splitlines()
    assert told.startswith(f"cluster {processes.address}: stopped working (")
    assert told.endswith("What was evaluated is safe; go on with --resume")
    recorded = (out / JOURNAL).read_bytes()
    assert (alone / "run" / JOURNAL).read_bytes().startswith(recorded)
    assert recorded.count(b"\n") >= 2


def test_an_address_without_a_scheduler(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cluster, "REACH", 0.3)
    spec = str(write(tmp_path))
    for address in ("127.0.0.1:9", "nothing://there", "", "tcp://127.0.0.1:notaport"):
        arguments = ["search", spec, "--out", str(tmp_path / "run"), "--cluster", address]
        assert main(arguments) == 2
        told = capsys.readouterr().err
        assert f"cluster {address}: no scheduler answers there" in told
        assert "Traceback" not in told
    assert not (tmp_path / "run").exists()


def test_without_the_extra(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cluster, "find_spec", lambda _name: None)
    assert main(["search", str(write(tmp_path)), "--cluster", "127.0.0.1:8786"]) == 2
    assert 'pip install -e ".[cluster]"' in capsys.readouterr().err


class Fake:
    """A client of a cluster with these workers: threads and what they say of themselves."""

    def __init__(self, workers: dict[str, tuple[int, object]]) -> None:
        self._workers = workers

    def nthreads(self) -> dict[str, int]:
        return {name: threads for name, (threads, _) in self._workers.items()}

    def run(self, _function: object, on_error: str) -> dict[str, object]:
        assert on_error == "return"
        return {name: there for name, (_, there) in self._workers.items()}


@pytest.mark.parametrize(
    ("workers", "words"),
    [
        ({}, "has no workers. Start some with: dask worker tcp://x --nthreads 1"),
        ({"a": (2, here())}, "worker a has 2 threads. Start it with --nthreads 1"),
        ({"a": (1, ModuleNotFoundError("No module named 'optim'"))}, "cannot run apexfront"),
        ({"a": (1, here()), "b": (1, here() | {"scipy": "0.1"})}, "scipy 0.1 there, "),
    ],
)
def test_workers_that_will_not_do(workers: dict[str, tuple[int, object]], words: str) -> None:
    with pytest.raises(ClusterError) as told:
        cluster._check("tcp://x", Fake(workers))
    assert words in str(told.value)


def test_alike_workers_will_do() -> None:
    assert cluster._complaint("a", dict(here()), 1, here()) == ""


def test_the_hash_is_of_the_source(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    for package in ("models", "optim"):
        (tmp_path / package).mkdir()
        (tmp_path / package / "a.py").write_text("x = 1\n")
    monkeypatch.setattr(cluster, "__file__", os.fspath(tmp_path / "optim" / "cluster.py"))
    hashed = here.__wrapped__
    before = hashed()
    (tmp_path / "models" / "notes.txt").write_text("not source")
    assert hashed() == before
    (tmp_path / "models" / "a.py").write_text("x = 2\n")
    assert hashed()["source"] != before["source"]
