"""Workers on other machines: a Dask cluster, reached through joblib, and whether it computes alike.

A front is the same bit for bit only where the same program computes it: every worker must have
this program's source and this process's numpy and scipy, and one thread, because the number of
threads of linear algebra is set for a whole process. That is checked when a run starts and again
beside every chunk of designs, as workers may join later. Dask moves the work of a worker that is
lost to another. Needs the extra `cluster`.
"""

from __future__ import annotations

import hashlib
import logging
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from functools import cache
from importlib.metadata import version
from importlib.util import find_spec
from pathlib import Path
from typing import Any, Final

__all__ = ["Cluster", "ClusterError", "connected", "here", "refuse_another"]

REACH: Final = 5.0
"""Seconds within which a scheduler must answer."""

SAME: Final = ("numpy", "scipy")
PACKAGES: Final = ("models", "optim")


class ClusterError(Exception):
    """The cluster cannot be used; the message says why and what to do."""


@dataclass(frozen=True)
class Cluster:
    """A cluster that computes as this process does: its scheduler's address, and Dask's client."""

    address: str
    client: Any

    @property
    def workers(self) -> int:
        """Return the number of workers there are now."""
        return len(self.client.ncores())

    def backend(self) -> Any:
        """Return joblib's way to this cluster."""
        from joblib._dask import DaskDistributedBackend

        class Backend(DaskDistributedBackend):  # type: ignore[misc]
            """joblib's own, which would leave the work at home where there is one worker."""

            def effective_n_jobs(self, n_jobs: int) -> int:
                return max(2, int(super().effective_n_jobs(n_jobs)))

        return Backend(client=self.client)

    def lost(self, error: Exception) -> ClusterError:
        """Return in words what `error`, raised while the cluster worked, means."""
        return ClusterError(
            f"cluster {self.address}: stopped working ({_first_line(error)}). "
            "What was evaluated is safe; go on with --resume"
        )


@contextmanager
def connected(address: str | None) -> Iterator[Cluster | None]:
    """Give the cluster whose scheduler is at `address`, every worker checked; None for None.

    Raises
    ------
    ClusterError
        For a missing extra, an address that does not answer, a cluster without workers, and
        workers that would compute differently.
    """
    if address is None:
        yield None
        return
    if find_spec("distributed") is None:
        msg = f'cluster {address}: needs the extra: pip install -e ".[cluster]"'
        raise ClusterError(msg)
    import distributed  # slow to start, and perhaps not there

    _silence()
    try:
        make: Any = distributed.Client
        client = make(address, timeout=REACH, set_as_default=False)
    except (OSError, ValueError) as error:  # TimeoutError is an OSError
        msg = (
            f"cluster {address}: no scheduler answers there ({_first_line(error)}). "
            "Start one with: dask scheduler --host 127.0.0.1"
        )
        raise ClusterError(msg) from error
    try:
        _check(address, client)
        yield Cluster(address, client)
    finally:
        client.close(timeout=2.0)


@cache
def here() -> dict[str, str]:
    """Return what the numbers of this process depend on: versions, and a hash of the source."""
    digest = hashlib.sha256()
    root = Path(__file__).parents[1]
    for package in PACKAGES:
        for path in sorted((root / package).iterdir()):
            if path.suffix in {".py", ".npz", ".csv"}:
                digest.update(f"{package}/{path.name}\0".encode())
                digest.update(hashlib.sha256(path.read_bytes()).digest())
    versions = {name: version(name) for name in ("apexfront", *SAME)}
    return versions | {"source": digest.hexdigest()[:12]}


def refuse_another(asked: dict[str, str]) -> None:
    """Refuse to work, in a worker that would compute otherwise than `asked`.

    Raises
    ------
    ClusterError
        With what differs.
    """
    from distributed import get_worker

    worker = get_worker()
    complaint = _complaint(worker.address, here(), worker.state.nthreads, asked)
    if complaint:
        raise ClusterError(complaint)


def _silence() -> None:
    """Leave it to the messages here to say what is wrong; Dask logs tracebacks."""
    for name in logging.root.manager.loggerDict:
        if name.partition(".")[0] in {"distributed", "tornado", "asyncio"}:
            logging.getLogger(name).setLevel(logging.CRITICAL)


def _check(address: str, client: Any) -> None:
    threads: dict[str, int] = client.nthreads()
    if not threads:
        msg = (
            f"cluster {address}: has no workers. "
            f"Start some with: dask worker {address} --nthreads 1"
        )
        raise ClusterError(msg)
    found: dict[str, Any] = client.run(here, on_error="return")
    complaints = [
        _complaint(worker, there, threads.get(worker, 1), here()) for worker, there in found.items()
    ]
    if any(complaints):
        msg = "\n".join(f"cluster {address}: {text}" for text in complaints if text)
        raise ClusterError(msg)


def _complaint(worker: str, there: object, threads: int, asked: dict[str, str]) -> str:
    """Return what keeps a worker from computing as `asked`; nothing if nothing does."""
    if not isinstance(there, dict):
        return (
            f"worker {worker} cannot run apexfront ({_first_line(there)}). Install it there, the "
            'same version as here, with: pip install -e ".[cluster]"'
        )
    unlike = [
        f"{name} {there.get(name, 'missing')} there, {value} here"
        for name, value in asked.items()
        if there.get(name) != value
    ]
    if unlike:
        words = "; ".join(unlike)
        return f"worker {worker} would compute differently: {words}. Install the same on both"
    if threads != 1:
        return f"worker {worker} has {threads} threads. Start it with --nthreads 1"
    return ""


def _first_line(error: object) -> str:
    text = f"{type(error).__name__}: {error}".strip().rstrip(":")
    return text.splitlines()[0]
