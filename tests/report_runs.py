"""Small finished runs on the image model, with texts that mean harm, for tests of the report."""

from pathlib import Path
from typing import Any

from optim.outcome import read_outcome
from optim.report import make_report
from optim.report_data import compute, write_data
from optim.run import Options, run
from tests.search_specs import EASY, IMPOSSIBLE

HOSTILE = "</script><script>alert(1)</script><img src=x onerror=alert(2)> ../../x & {{ 7*7 }}"


def finished(place: Path, text: str = EASY, title: str = HOSTILE) -> Path:
    """Search in `place`, and return the run's folder with its report but no pictures or papers."""
    spec = place / "spec.toml"
    old = text.splitlines()[1]
    spec.write_text(text.replace(old, f"title = '{title}'"), encoding="utf-8")
    run(spec, Options(out=place / "run", jobs=1, quiet=True))
    result, _ = read_outcome(place / "run")
    write_data(place / "run", compute(result))
    make_report(place / "run")
    return place / "run"


def missed(place: Path) -> Path:
    """Return the folder of a run that nothing met."""
    return finished(place, IMPOSSIBLE)


def changed(tree: Any, path: tuple[str | int, ...], value: object) -> Any:
    """Change what lies at `path` in `tree`, an ellipsis takes it out; return the tree."""
    *way, last = path
    node = tree
    for key in way:
        node = node[key]
    if value is ...:
        del node[last]
    else:
        node[last] = value
    return tree
