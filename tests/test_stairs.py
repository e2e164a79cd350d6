"""One-way stairs: who may import whom, read from the files themselves."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
MODULES = sorted([*ROOT.glob("models/*.py"), *ROOT.glob("optim/*.py")])
SEARCHERS = {"optim/problem.py", "optim/search.py"}
NAMES = [str(path.relative_to(ROOT)) for path in MODULES]


def imported(path: Path) -> set[str]:
    """Return the full names of everything a file imports, anywhere in it."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: a relative import"
            found |= {f"{node.module}.{alias.name}" for alias in node.names}
    return found


def tops(path: Path) -> set[str]:
    return {name.partition(".")[0] for name in imported(path)}


def test_there_is_something_to_look_at() -> None:
    assert {"models/ladder.py", "optim/cli.py"} <= set(NAMES)


@pytest.mark.parametrize("name", [n for n in NAMES if n.startswith("models/")])
def test_physics_knows_numpy_and_scipy_only(name: str) -> None:
    outside = tops(ROOT / name) - {"models", "numpy", "scipy"}
    standard = {"__future__", "collections", "dataclasses", "functools", "importlib", "itertools"}
    standard |= {"math", "pathlib", "typing", "csv", "warnings", "enum"}
    assert outside <= standard


@pytest.mark.parametrize("name", [n for n in NAMES if n not in SEARCHERS])
def test_the_genetic_algorithm_stays_in_its_room(name: str) -> None:
    assert "pymoo" not in tops(ROOT / name)


@pytest.mark.parametrize("name", NAMES)
def test_nothing_user_made_is_executed(name: str) -> None:
    forbidden = {"pickle", "marshal", "shelve", "dill", "cloudpickle", "subprocess"}
    assert not tops(ROOT / name) & forbidden
    calls = {
        node.func.id
        for node in ast.walk(ast.parse((ROOT / name).read_text(encoding="utf-8")))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
    }
    assert not calls & {"eval", "exec", "compile", "__import__"}


def test_only_the_command_line_imports_the_command_line() -> None:
    users = [
        name for name in NAMES if any(i.startswith("optim.cli") for i in imported(ROOT / name))
    ]
    assert users == []


def test_modules_import_each_other_in_no_circle() -> None:
    known = {name.removesuffix(".py").replace("/", "."): ROOT / name for name in NAMES}
    edges = {}
    for module, path in known.items():
        names = {part for name in imported(path) for part in (name, name.rpartition(".")[0])}
        edges[module] = names & set(known) - {module}
    done: set[str] = set()
    while len(done) < len(edges):
        ready = {module for module, needs in edges.items() if module not in done and needs <= done}
        assert ready, f"a circle among {sorted(set(edges) - done)}"
        done |= ready


@pytest.mark.parametrize("name", NAMES)
def test_files_are_small_and_say_what_they_are(name: str) -> None:
    text = (ROOT / name).read_text(encoding="utf-8")
    assert len(text.splitlines()) <= 400
    assert ast.get_docstring(ast.parse(text))
