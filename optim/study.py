"""A study from its file to its folder: many searches side by side, a table and pictures of them.

A study that was stopped goes on by --resume and ends as if nothing had happened: runs that are done
stay done, those under way go on from their journals, failed ones are tried again.
"""

from __future__ import annotations

from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path
from typing import Final

from joblib import cpu_count

from optim.cluster import connected
from optim.run import DEFAULT_FOLDER, LIBRARIES
from optim.study_file import Study, read_study
from optim.study_folder import DONE, Outcome, StudyFolder, write_whole
from optim.study_progress import StudyProgress
from optim.study_slots import Done, Task, work
from optim.study_status import again, status_text
from optim.study_table import study_csv, study_text

__all__ = ["StudyOptions", "StudyResult", "status", "study"]

TABLE: Final = "study.csv"


@dataclass(frozen=True, kw_only=True)
class StudyOptions:
    """What the command line may say.

    Parameters
    ----------
    out : Path, optional
        Folder of results; "runs/" and the name of the file if left out.
    jobs : int, optional
        Worker processes for all runs together, all cores if left out; with a cluster, the runs
        side by side, as many as it has workers if left out.
    cluster : str, optional
        Address of a Dask scheduler.
    resume, quiet : bool
        Go on with the study in the folder; no progress and no messages.
    """

    out: Path | None = None
    jobs: int | None = None
    cluster: str | None = None
    resume: bool = False
    quiet: bool = False


@dataclass(frozen=True)
class StudyResult:
    """A finished study: the outcome of each run by its number."""

    study: Study
    outcomes: dict[int, Outcome]

    @property
    def failed(self) -> int:
        """Return the number of runs that failed."""
        return sum(outcome.status not in DONE for outcome in self.outcomes.values())

    def text(self) -> str:
        """Return the outcome as a page of plain text."""
        met = sum(outcome.status == "met" for outcome in self.outcomes.values())
        count = len(self.outcomes)
        failed = f", {self.failed} failed" if self.failed else ""
        head = f"{self.study.title}: {count} runs, {met} met{failed}."
        return f"{head}\n\n{study_text(self.study, self.outcomes)}"


def study(path: Path, options: StudyOptions) -> StudyResult:
    """Do all searches of the study file at `path` and write table and pictures; return them.

    Raises
    ------
    SpecError
        For a study file, or its requirements file, that cannot be used.
    StudyError
        For a folder that holds another study or is in use, and when disk or cluster fail.
    ClusterError
        For a cluster that cannot be used.
    OSError
        For a folder that cannot be written.
    KeyboardInterrupt
        When interrupted, with the words how to go on.
    """
    asked = read_study(path)
    folder = folder_of(path, options.out)
    with connected(options.cluster) as cluster:
        jobs = options.jobs or (cluster.workers if cluster else cpu_count())
    versions = {name: version(name) for name in LIBRARIES}
    with folder.opened(asked, versions, resume=options.resume):
        known = {run.number: folder.outcome(run.number) for run in asked.runs}
        outcomes = {number: o for number, o in known.items() if o and o.status in DONE}
        left = [run for run in asked.runs if run.number not in outcomes]
        tasks = (Task(run.number, asked.text(run)) for run in left)
        words = {run.number: asked.words(run) for run in left}
        try:
            with StudyProgress(len(asked.runs), len(outcomes), quiet=options.quiet) as progress:
                if outcomes:
                    progress.say(f"{len(outcomes)} runs are done already")
                for event in work(folder, tasks, jobs=jobs, cluster=options.cluster):
                    if isinstance(event, Done):
                        outcomes[event.number] = event.outcome
                        progress.done(event, words[event.number])
                    else:
                        progress.told(event)
                write_whole(folder.path / TABLE, study_csv(asked, outcomes))
                from optim.study_pictures import draw_study  # matplotlib is slow to start

                files = draw_study(folder.path / "pictures", asked, outcomes)
                progress.say(f"wrote {TABLE} and {len(files)} pictures to {folder.path}")
        except KeyboardInterrupt as interrupt:
            cluster_too = ("--cluster", options.cluster) if options.cluster is not None else ()
            words_on = again(asked, folder, *cluster_too)
            msg = f"interrupted; what was evaluated is safe. Go on with: {words_on}"
            raise KeyboardInterrupt(msg) from interrupt
    return StudyResult(asked, dict(sorted(outcomes.items())))


def status(path: Path, out: Path | None) -> str:
    """Return how far the study of the file at `path` is.

    Raises
    ------
    SpecError
        For a study file that cannot be used.
    StudyError
        For a folder without this study.
    """
    return status_text(read_study(path), folder_of(path, out))


def folder_of(path: Path, out: Path | None) -> StudyFolder:
    """Return the folder of a study."""
    return StudyFolder(out or Path(DEFAULT_FOLDER) / path.stem)
