"""Figures of merit of a whole population: chunks of designs, spread over worker processes.

The size of a chunk never depends on the number of workers, and every chunk is computed with one
thread of linear algebra, in a worker and in the main process alike: products of matrices of
another size, or split over threads, differ in the last bits. So one worker and twenty give the
same figures, bit for bit.
"""

from __future__ import annotations

import signal
from collections.abc import Callable
from contextlib import ExitStack
from functools import cache
from types import TracebackType
from typing import Any, Final, Self

import numpy as np
from joblib import Parallel, delayed, parallel_config
from threadpoolctl import ThreadpoolController

from models import Build, Figures, Reflectors, Terms, evaluate
from models.conventions import FloatArray
from optim.cluster import Cluster, ClusterError, here, refuse_another
from optim.requirements import Requirements

__all__ = ["CHUNK", "Evaluator", "chunk_count", "leave_interrupts_to_main"]

Job = tuple[FloatArray, str, Build, Terms]

CHUNK: Final = 25
"""Most designs a worker takes at a time."""

WHOLE: Final = 16
"""Fewer designs are not divided."""

IDLE: Final = 60.0
"""Seconds after which workers without work end, also when this process was killed."""


class Evaluator:
    """A model, ready to judge populations against what `requirements` asks about.

    Use as a context manager: the workers live inside it and start with the first population.

    Parameters
    ----------
    requirements : Requirements
        Gives the material and the terms of the figures.
    model : str
        A name of `models.MODELS`.
    jobs : int
        Worker processes, 1 for none beside this one.
    cluster : Cluster, optional
        Whose workers do the work, all of them, instead of those on this machine.
    """

    def __init__(
        self,
        requirements: Requirements,
        model: str,
        jobs: int = 1,
        *,
        cluster: Cluster | None = None,
    ) -> None:
        self.model = model
        self._build = requirements.build
        self._terms = requirements.terms
        self._jobs = jobs
        self._cluster = cluster
        self._exit = ExitStack()
        self._pool: Parallel | None = None

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self._exit.__exit__(kind, error, trace)
        self._pool = None

    def figures(self, reflectors: Reflectors, frequencies: FloatArray) -> Figures:
        """Return the figures of n designs at n_freq frequencies (Hz), each (n, n_freq)."""
        designs = reflectors.matrix()
        chunks = np.array_split(designs, chunk_count(len(designs)))
        job = (frequencies, self.model, self._build, self._terms)
        if self._cluster is not None:
            return Figures.concatenate(self._far(self._cluster, chunks, job))
        if self._jobs == 1:
            return Figures.concatenate([_figures(chunk, *job) for chunk in chunks])
        pool = self._workers(
            "loky",
            n_jobs=self._jobs,
            inner_max_num_threads=1,
            initializer=leave_interrupts_to_main,
            idle_worker_timeout=IDLE,
        )
        return Figures.concatenate(list(pool(delayed(_figures)(chunk, *job) for chunk in chunks)))

    def _far(self, cluster: Cluster, chunks: list[FloatArray], job: Job) -> list[Figures]:
        """Return the figures of each chunk from the workers of `cluster`."""
        pool = self._workers(cluster.backend(), n_jobs=-1)
        frequencies, *rest = job
        # Lists, not arrays: joblib would leave an array on one worker, to be lost with it.
        grid = frequencies.tolist()
        try:
            found = list(
                pool(delayed(_figures_there)(here(), c.tolist(), grid, *rest) for c in chunks)
            )
        except ClusterError:
            raise
        except Exception as error:
            raise cluster.lost(error) from error
        return found

    def _workers(self, backend: Any, *, n_jobs: int, **options: Any) -> Parallel:
        if self._pool is None:
            with parallel_config(backend, **options):
                pool = Parallel(n_jobs, batch_size=1, pre_dispatch="all", max_nbytes=None)
            self._pool = self._exit.enter_context(pool)
        return self._pool


def chunk_count(n: int) -> int:
    """Return into how many chunks n designs are divided: a power of two, so that cores share."""
    return 2 ** max(int(np.ceil(np.log2(n / CHUNK))), 1) if n >= WHOLE else 1


def _figures_there(
    asked: dict[str, str],
    designs: list[list[float]],
    frequencies: list[float],
    model: str,
    build: Build,
    terms: Terms,
) -> Figures:
    """Return the figures of a chunk, in a worker of a cluster that computes as `asked`."""
    refuse_another(asked)
    return _figures(np.array(designs), np.array(frequencies), model, build, terms)


def _figures(
    designs: FloatArray, frequencies: FloatArray, model: str, build: Build, terms: Terms
) -> Figures:
    with _one_thread()():
        return evaluate(
            Reflectors.from_matrix(designs), frequencies, model=model, build=build, terms=terms
        )


@cache
def _one_thread() -> Callable[[], Any]:
    controller = ThreadpoolController()
    return lambda: controller.limit(limits=1)


def leave_interrupts_to_main() -> None:
    """Let Ctrl-C reach the main process only, which then ends its workers."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
