"""One search from the requirements file to the folder of results.

What overrides what: the command line, then (going on with a run) its journal, then the `[run]`
table of the requirements file, then the defaults.
"""

from __future__ import annotations

import shlex
import time
from collections.abc import Iterator
from contextlib import nullcontext
from dataclasses import dataclass, replace
from importlib.metadata import version
from pathlib import Path
from typing import Final

from joblib import cpu_count

from models import MODELS
from optim.cluster import connected
from optim.evaluate import Evaluator
from optim.faults import Fault, SpecError
from optim.journal import Header, Journal, JournalError, read_header
from optim.margins import Judge
from optim.outcome import FILE, write_outcome
from optim.precheck import blind_spots
from optim.progress import Progress
from optim.referee import columns
from optim.requirements import Requirements, read_requirements
from optim.result import Result
from optim.robust import bred, tolerated
from optim.search import scouted, search
from optim.space import DesignSpace
from optim.tolerance import STAGE
from optim.tolerance import columns as yield_columns

__all__ = ["DEFAULT_FOLDER", "JOURNAL", "LIBRARIES", "Options", "run"]

JOURNAL: Final = "journal.jsonl"
DEFAULT_FOLDER: Final = "runs"
LIBRARIES: Final = ("apexfront", "numpy", "scipy", "pymoo")


@dataclass(frozen=True, kw_only=True)
class Options:
    """What the command line may say; None is left to the journal, the file or the default.

    Parameters
    ----------
    out : Path, optional
        Folder of results; "runs/" and the name of the file if left out.
    jobs : int, optional
        Worker processes; all cores if left out.
    seed : int, optional
    scout, prove : str, optional
        Models; `prove` may be "none".
    resume : bool
        Go on with the run in the folder.
    quiet : bool
        No progress and no messages.
    cluster : str, optional
        Address of a Dask scheduler whose workers do the work instead of processes here.
    """

    out: Path | None = None
    jobs: int | None = None
    seed: int | None = None
    scout: str | None = None
    prove: str | None = None
    resume: bool = False
    quiet: bool = False
    cluster: str | None = None


def run(spec: Path, options: Options, progress: Progress | None = None) -> Result:
    """Search as `spec` asks and write the results; return them.

    Parameters
    ----------
    spec : Path
        The requirements file.
    options : Options
    progress : Progress, optional
        Is told how the search goes, in place of one on stderr.

    Raises
    ------
    SpecError
        For a requirements file that cannot be used, and models that cannot judge it.
    JournalError
        For a folder that holds another run or what is left of one, or a journal that cannot be
        written.
    ClusterError
        For a cluster that cannot be used, or that stopped working.
    OSError
        For a folder or a file of results that cannot be written.
    KeyboardInterrupt
        When interrupted, with the words how to go on.
    """
    began = time.monotonic()
    requirements = read_requirements(spec)
    folder = options.out or Path(DEFAULT_FOLDER) / spec.stem
    recorded = read_header(folder / JOURNAL) if options.resume else None
    if recorded is not None and {recorded.scout, recorded.prove} - {*MODELS, "none"}:
        msg = f"{folder / JOURNAL}: made with models of another version. Choose another folder"
        raise JournalError(msg)
    requirements = settled(requirements, options, recorded)
    space = DesignSpace.from_requirements(requirements)
    faults = list(unjudged(requirements, space))
    if faults:
        raise SpecError(faults)
    header = header_of(requirements, space)
    if (folder / FILE).exists() and not (folder / JOURNAL).exists():
        msg = f"{folder}: holds the results of a run without its journal; choose another with --out"
        raise JournalError(msg)
    settings = requirements.run
    jobs = options.jobs or cpu_count()
    try:
        with (
            connected(options.cluster) as cluster,
            Journal(folder / JOURNAL, header, resume=options.resume) as journal,
            Evaluator(requirements, settings.scout, jobs, cluster=cluster) as scout,
            Evaluator(requirements, settings.prove, jobs, cluster=cluster)
            if settings.prove
            else nullcontext() as prove,
            progress or Progress(quiet=options.quiet) as progress,
        ):
            if journal.remaining:
                progress.say(f"taking {journal.remaining} batches from {folder / JOURNAL}")
            found = search(
                requirements, space, scout=scout, prove=prove, journal=journal, progress=progress
            )
            result = Result(requirements, space, found)
            result.write(
                folder,
                {
                    "seconds": time.monotonic() - began,
                    "seed": settings.seed,
                    "models": {"scout": settings.scout, "prove": settings.prove or "none"},
                    "versions": header.versions,
                },
            )
            write_outcome(folder, result, header.versions)
            progress.say(f"wrote front.csv, summary.json and design files to {folder}")
    except KeyboardInterrupt as interrupt:
        again = shlex.join(
            ["apexfront", "search", str(spec), "--out", str(folder), "--resume"]
            + (["--cluster", options.cluster] if options.cluster is not None else [])
        )
        msg = f"interrupted; what was evaluated is safe. Go on with: {again}"
        raise KeyboardInterrupt(msg) from interrupt
    return result


def settled(requirements: Requirements, options: Options, recorded: Header | None) -> Requirements:
    """Return `requirements` with the settings that hold for this run."""
    of_file = requirements.run
    seed, scout, prove = options.seed, options.scout, options.prove
    if recorded is not None:
        seed = recorded.seed if seed is None else seed
        scout, prove = scout or recorded.scout, prove or recorded.prove
    proving = prove or of_file.prove
    return replace(
        requirements,
        run=replace(
            of_file,
            seed=of_file.seed if seed is None else seed,
            scout=scout or of_file.scout,
            prove=None if proving == "none" else proving,
        ),
    )


def unjudged(requirements: Requirements, space: DesignSpace) -> Iterator[Fault]:
    """Find what the model with the last word cannot judge."""
    settings = requirements.run
    decider = settings.prove or settings.scout
    blind = blind_spots(requirements, space, decider)
    if not MODELS[decider].gives_match:
        match = {"vswr", "realized_gain"}
        blind += [f"goal {goal.name}" for goal in requirements.goals if goal.name in match]
    if not blind:
        return
    able = [
        name
        for name, model in MODELS.items()
        if not blind_spots(requirements, space, name)
        and (model.gives_match or not requirements.needs_match)
    ]
    yield Fault(
        str(requirements.path),
        "run.prove" if settings.prove else "run.scout (run.prove is none)",
        f"{decider}, which cannot judge {', '.join(blind)},",
        ", ".join(able) if able else "no model here can judge all that is asked for",
    )


def header_of(requirements: Requirements, space: DesignSpace) -> Header:
    """Return the header of the journal of a run."""
    settings = requirements.run
    requirements = bred(requirements)
    asked = Judge(requirements)
    stages = {"scout": asked}
    if settings.prove:
        scouting = Judge(scouted(requirements, space, settings.scout))
        stages = {"scout": scouting, "prove": asked}
    return Header(
        seed=settings.seed,
        spec_sha256=requirements.sha256,
        scout=settings.scout,
        prove=settings.prove or "none",
        versions={name: version(name) for name in LIBRARIES},
        columns={stage: columns(rules) for stage, rules in stages.items()}
        | ({STAGE: yield_columns(requirements)} if tolerated(requirements) else {}),
    )
