"""The command line: each command is a step that reads, calls and prints, and returns an exit code.

0 done; 1 done, but no design meets the requirements; 2 bad input or usage; 130 interrupted.
Results go to stdout, progress and messages to stderr.
"""

from __future__ import annotations

import functools
import io
import json
import shlex
import sys
from collections.abc import Callable, Sequence
from importlib.metadata import version
from importlib.resources import files
from pathlib import Path
from typing import Annotated, Final, ParamSpec

import typer
from joblib import cpu_count

from models import MODELS
from optim.analysis import analyse, as_json, words
from optim.cluster import ClusterError
from optim.designfile import read_design
from optim.faults import SpecError
from optim.journal import JournalError
from optim.overview import overview
from optim.precheck import findings
from optim.requirements import default_model, read_requirements
from optim.space import DesignSpace
from optim.streams import say
from optim.study_file import StudyError

__all__ = ["app", "main", "step"]

DONE: Final = 0
NOT_MET: Final = 1
BAD_INPUT: Final = 2
INTERRUPTED: Final = 130

P = ParamSpec("P")

app = typer.Typer(
    name="apexfront",
    help="Search engine for corner reflectors: the smallest one that meets a specification.",
    add_completion=False,
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
)


def step(command: Callable[P, int]) -> Callable[P, None]:
    """Turn a function that returns an exit code into a command that ends with it.

    What is the user's to mend is one clear message on stderr, never a traceback.
    """

    @functools.wraps(command)
    def run(*args: P.args, **kwargs: P.kwargs) -> None:
        try:
            code = command(*args, **kwargs)
        except (SpecError, JournalError, ClusterError, StudyError) as error:
            message(str(error))
            code = BAD_INPUT
        except KeyboardInterrupt as interrupt:
            message(str(interrupt) or "interrupted")
            code = INTERRUPTED
        except OSError as error:
            place = f"{error.filename}: " if error.filename else ""
            message(f"{place}{error.strerror or error}")
            code = BAD_INPUT
        raise typer.Exit(code)

    return run


def answer(text: str) -> None:
    """Print a result, on stdout."""
    say(text, sys.stdout)


def message(text: str) -> None:
    """Print `text` on stderr."""
    say(text, sys.stderr)


def model_name(value: str | None) -> str | None:
    """Return the name of a model, or refuse it with the names there are."""
    return _one_of(value, *MODELS)


def prover_name(value: str | None) -> str | None:
    """Return the name of a proving model or "none", or refuse it."""
    return _one_of(value, *MODELS, "none")


def _one_of(value: str | None, *names: str) -> str | None:
    if value is None or value in names:
        return value
    reason = f"{value!r} given, allowed: {', '.join(names)}"
    raise typer.BadParameter(reason)


def _print_version(value: bool) -> None:
    if value:
        answer(f"apexfront {version('apexfront')}")
        raise typer.Exit(DONE)


Spec = Annotated[Path, typer.Argument(metavar="SPEC", help="Requirements file.")]
Out = Annotated[
    Path | None,
    typer.Option(metavar="DIR", help="Folder of results; runs/ and the file's name if left out."),
]
Jobs = Annotated[
    int | None,
    typer.Option(metavar="N", min=1, help="Worker processes; all cores if left out."),
]
Cluster = Annotated[
    str | None,
    typer.Option(metavar="ADDRESS", help="Of a Dask scheduler whose workers do the work."),
]
Resume = Annotated[bool, typer.Option("--resume", help="Go on with what is in the folder.")]
Quiet = Annotated[bool, typer.Option("--quiet", help="No progress, no messages.")]


@app.callback()
def _options(
    _version: Annotated[
        bool,
        typer.Option(
            "--version", callback=_print_version, is_eager=True, help="Print the version."
        ),
    ] = False,
) -> None:
    pass


@app.command("new")
@step
def new(
    file: Annotated[
        Path, typer.Argument(metavar="FILE", help="File to write; must not exist yet.")
    ],
) -> int:
    """Write a commented requirements file to start from."""
    template = files("optim").joinpath("template.toml").read_text(encoding="utf-8")
    try:
        with file.open("x", encoding="utf-8", newline="\n") as stream:
            stream.write(template)
    except FileExistsError:
        message(f"{file}: exists already and is left as it is; name a new file")
        return BAD_INPUT
    message(f"wrote {file}; next: {shlex.join(['apexfront', 'check', str(file)])}")
    return DONE


@app.command("check")
@step
def check(spec: Spec) -> int:
    """Say how a requirements file is understood.

    Ranges derived from it are shown, and what physics rules out before any search.
    """
    requirements = read_requirements(spec)
    space = DesignSpace.from_requirements(requirements)
    found = findings(requirements, space)
    answer("\n".join(overview(requirements, space, found)))
    return NOT_MET if any(finding.ruled_out for finding in found) else DONE


@app.command("search")
@step
def search(
    spec: Spec,
    out: Out = None,
    jobs: Jobs = None,
    seed: Annotated[
        int | None, typer.Option(metavar="N", min=0, help="Of the random generator.")
    ] = None,
    scout: Annotated[
        str | None,
        typer.Option(
            metavar="MODEL",
            callback=model_name,
            help=f"Model that looks at the whole space: {', '.join(MODELS)}.",
        ),
    ] = None,
    prove: Annotated[
        str | None,
        typer.Option(
            metavar="MODEL", callback=prover_name, help="Model with the last word, or none."
        ),
    ] = None,
    cluster: Cluster = None,
    resume: Resume = False,
    quiet: Quiet = False,
) -> int:
    """Find the smallest antennas that meet the requirements."""
    from optim.finish import finish  # matplotlib and pymoo are slow to start
    from optim.run import DEFAULT_FOLDER, Options, run

    options = Options(
        out=out,
        jobs=jobs,
        seed=seed,
        scout=scout,
        prove=prove,
        resume=resume,
        quiet=quiet,
        cluster=cluster,
    )
    result = run(spec, options)
    answer(result.text())
    report = finish(out or Path(DEFAULT_FOLDER) / spec.stem, jobs or cpu_count())
    if not quiet:
        message(f"wrote papers, pictures and {report}")
    return DONE if result.met else NOT_MET


@app.command("report")
@step
def report_of(
    folder: Annotated[Path, typer.Argument(metavar="DIR", help="Folder of a finished search.")],
) -> int:
    """Make the report of a finished search again.

    Everything is made from the data in its folder, papers and pictures as well.
    """
    from optim.finish import finish  # matplotlib and pymoo are slow to start

    answer(str(finish(folder, cpu_count())))
    return DONE


@app.command("study")
@step
def study_of(
    study: Annotated[Path, typer.Argument(metavar="STUDY", help="Study file.")],
    out: Out = None,
    jobs: Jobs = None,
    cluster: Cluster = None,
    resume: Resume = False,
    quiet: Quiet = False,
    status: Annotated[
        bool, typer.Option("--status", help="Only say how far the study in the folder is.")
    ] = False,
) -> int:
    """Search many times, with keys of the requirements varied."""
    from optim import study as studies  # pymoo is slow to start

    if status:
        answer(studies.status(study, out))
        return DONE
    options = studies.StudyOptions(out=out, jobs=jobs, cluster=cluster, resume=resume, quiet=quiet)
    result = studies.study(study, options)
    answer(result.text())
    return NOT_MET if result.failed else DONE


@app.command("analyse")
@step
def analyse_design(
    design: Annotated[Path, typer.Argument(metavar="DESIGN", help="Design file.")],
    model: Annotated[
        str | None,
        typer.Option(
            metavar="MODEL",
            callback=model_name,
            help=f"One of {', '.join(MODELS)}; the most truthful there is if left out.",
        ),
    ] = None,
    out: Annotated[
        Path | None,
        typer.Option(metavar="DIR", help="Folder for pictures, drawing and data; made if need be."),
    ] = None,
    as_object: Annotated[
        bool, typer.Option("--json", help="Print one JSON object instead of a table.")
    ] = False,
) -> int:
    """Give the figures of merit of one design over its band."""
    analysis = analyse(read_design(design), model or default_model("moment", "ray", "image"))
    data = json.dumps(as_json(analysis), indent=2, allow_nan=False)
    answer(data if as_object else words(analysis))
    if out is not None:
        from optim.analysis_files import write  # matplotlib is slow to start

        message(f"wrote {', '.join(write(out, analysis))} to {out}")
    return DONE


@app.command("trade")
@step
def trade_off(
    spec: Spec,
    out: Annotated[
        Path | None,
        typer.Option(metavar="DIR", help="Folder; runs/ and SPEC's name with -trade if left out."),
    ] = None,
    jobs: Jobs = None,
    model: Annotated[
        str | None,
        typer.Option(
            metavar="MODEL",
            callback=model_name,
            help=f"One of {', '.join(MODELS)}; the one with the last word if left out.",
        ),
    ] = None,
    cluster: Cluster = None,
    quiet: Quiet = False,
) -> int:
    """Show what each requirement costs in size.

    And how the figures move across the ranges and across the band.
    """
    from optim.run import DEFAULT_FOLDER  # pymoo and matplotlib are slow to start
    from optim.trade import Options, trade
    from optim.trade_files import page, write

    folder = out or Path(DEFAULT_FOLDER) / f"{spec.stem}-trade"
    found = trade(spec, Options(out=folder, jobs=jobs, model=model, quiet=quiet, cluster=cluster))
    files = write(folder, found)
    answer(page(found))
    if not quiet:
        message(f"wrote {', '.join(files)} to {folder}")
    return DONE if found.met else NOT_MET


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit code."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="replace")
    try:
        app(args=None if arguments is None else list(arguments), prog_name="apexfront")
    except SystemExit as end:
        return end.code if isinstance(end.code, int) else BAD_INPUT
    except KeyboardInterrupt:
        return INTERRUPTED
    return DONE
