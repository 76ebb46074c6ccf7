"""House rules that can be counted: sizes, docstrings of tests, broad handlers, asserts, forbidden text."""

from __future__ import annotations

import ast
import re
import subprocess
from collections.abc import Iterator
from pathlib import Path
from statistics import median, quantiles

import pytest

ROOT = Path(__file__).resolve().parents[1]
FOLDERS = ("reanalysis", "tests", "benchmarks", "sample_data")

FILE_LINES = 400
BODY_LINES, BODY_LINES_P95, BODY_LINES_MEDIAN = 60, 40, 10
ARGUMENTS = 7

# Escapes and brackets keep these patterns from finding themselves in this file.
FORBIDDEN = {
    "a path of somebody's machine": r"(?<![\w.~])/(?:work|tmp|root|home|opt|mnt|Users)/",
    "a package registry's host": r"\b(?:pypi|pythonhosted|npmjs|debian|anaconda|crates)\.(?:org|io)\b",
    "a working paper kept elsewhere": r"\b(?:methods|pitfalls|style|design|brief|look)\.m[d]\b",
}

type Function = ast.FunctionDef | ast.AsyncFunctionDef


def parse_folder(folder: str) -> dict[str, ast.Module]:
    """Parse every Python file of a folder, by its path from the root."""
    paths = sorted((ROOT / folder).rglob("*.py"))
    return {str(p.relative_to(ROOT)): ast.parse(p.read_text(encoding="utf-8")) for p in paths}


def functions(trees: dict[str, ast.Module]) -> Iterator[tuple[str, Function]]:
    """Yield each function with where it stands."""
    for path, tree in trees.items():
        for node in ast.walk(tree):
            if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
                yield f"{path}:{node.lineno} {node.name}", node


def body_lines(function: Function) -> int:
    """Count the lines of a function less its signature and docstring."""
    statements = function.body[1:] if ast.get_docstring(function) is not None else function.body
    return function.end_lineno - statements[0].lineno + 1 if statements else 0


def argument_count(function: Function) -> int:
    """Count arguments, the instance or class not included."""
    arguments = function.args
    names = [a.arg for a in (*arguments.posonlyargs, *arguments.args, *arguments.kwonlyargs)]
    return len([name for name in names if name not in {"self", "cls"}])


def broad_handlers(tree: ast.Module) -> list[int]:
    """Return the lines of handlers that catch everything, or nearly."""
    lines = []
    for node in ast.walk(tree):
        if isinstance(node, ast.ExceptHandler):
            caught = ast.walk(node.type) if node.type else [ast.Name("BaseException")]
            if any(isinstance(n, ast.Name) and n.id in {"Exception", "BaseException"} for n in caught):
                lines.append(node.lineno)
    return lines


def forbidden_text(text: str) -> list[str]:
    """Say what a file's text holds that it must not."""
    return [
        f"{what}: {found.group()!r}"
        for what, pattern in FORBIDDEN.items()
        for found in re.finditer(pattern, text)
    ]


def repository_texts() -> Iterator[tuple[str, str]]:
    """Yield path and text of every file that is, or is about to be, committed; binary files left out."""
    command = ["git", "ls-files", "-z", "--cached", "--others", "--exclude-standard"]
    listing = subprocess.run(command, cwd=ROOT, check=True, capture_output=True, text=True).stdout  # noqa: S603
    for name in filter(None, listing.split("\0")):
        path = ROOT / name
        content = path.read_bytes() if path.is_file() else b"\0"
        if b"\0" not in content:
            yield name, content.decode("utf-8", errors="replace")


PACKAGE = parse_folder("reanalysis")
ALL = {path: tree for folder in FOLDERS for path, tree in parse_folder(folder).items()}


def test_files_are_short() -> None:
    """No Python file is longer than 400 lines."""
    counts = {path: (ROOT / path).read_text(encoding="utf-8").count("\n") for path in ALL}

    assert {path: count for path, count in counts.items() if count > FILE_LINES} == {}


def test_functions_are_short() -> None:
    """No function body exceeds 60 lines."""
    counts = {where: body_lines(function) for where, function in functions(ALL)}

    assert {where: count for where, count in counts.items() if count > BODY_LINES} == {}


def test_most_functions_are_very_short() -> None:
    """Half of the package's function bodies are no longer than 10 lines, and 95 % no longer than 40."""
    counts = [body_lines(function) for _, function in functions(PACKAGE)]

    assert median(counts) <= BODY_LINES_MEDIAN
    assert quantiles(counts, n=20)[-1] <= BODY_LINES_P95


def test_functions_take_few_arguments() -> None:
    """No function takes more than 7 arguments."""
    counts = {where: argument_count(function) for where, function in functions(ALL)}

    assert {where: count for where, count in counts.items() if count > ARGUMENTS} == {}


def test_tests_say_what_they_show() -> None:
    """Every test function has a docstring."""
    trees = {path: tree for path, tree in ALL.items() if path.startswith("tests/")}
    tests = [(where, node) for where, node in functions(trees) if node.name.startswith("test_")]

    assert [where for where, node in tests if not ast.get_docstring(node)] == []


def test_only_the_batch_catches_broadly() -> None:
    """Nothing but the batch runner catches Exception: elsewhere it would hide our own mistakes."""
    places = {path: broad_handlers(tree) for path, tree in PACKAGE.items() if "/batch/" not in path}

    assert {path: lines for path, lines in places.items() if lines} == {}


def test_package_asserts_nothing() -> None:
    """The package holds no assert statement: ``python -O`` would drop it."""
    places = [path for path, tree in PACKAGE.items() for n in ast.walk(tree) if isinstance(n, ast.Assert)]

    assert places == []


def test_no_file_names_a_machine_or_a_registry() -> None:
    """No committed file holds a machine's path, a registry's host or the name of a paper left outside."""
    found = {name: forbidden_text(text) for name, text in repository_texts()}

    assert {name: texts for name, texts in found.items() if texts} == {}


# The checks themselves, on text small enough to see through.


def _function(source: str) -> Function:
    return next(function for _, function in functions({"x": ast.parse(source)}))


def test_body_lines_leave_out_signature_and_docstring() -> None:
    """Two statements on three lines count three, whatever stands above them."""
    source = 'def f(\n    a,\n):\n    """One.\n\n    Two.\n    """\n    b = (\n    a)\n    return b\n'

    assert body_lines(_function(source)) == 3
    assert body_lines(_function('def f():\n    """Nothing."""\n')) == 0


def test_argument_count_takes_every_kind() -> None:
    """Positional-only, ordinary and keyword-only arguments count, the instance does not."""
    assert argument_count(_function("def f(self, a, /, b, *, c): pass")) == 3


@pytest.mark.parametrize(
    "handler", ["except:", "except Exception:", "except (KeyError, BaseException) as e:"]
)
def test_broad_handlers_are_seen(handler: str) -> None:
    """A bare handler, a broad one and a broad one in a tuple are found on their line."""
    assert broad_handlers(ast.parse(f"try:\n    pass\n{handler}\n    pass")) == [3]


def test_narrow_handlers_pass() -> None:
    """A handler of a named error is no broad one."""
    assert broad_handlers(ast.parse("try:\n    pass\nexcept KeyError:\n    pass")) == []


@pytest.mark.parametrize(
    "parts", [("/", "tmp/x"), ("see /", "work/a"), ("py", "pi.org"), ("pitfalls", ".md 2.6")]
)
def test_forbidden_text_is_seen(parts: tuple[str, str]) -> None:
    """Each kind of forbidden text is found once."""
    assert len(forbidden_text("".join(parts))) == 1


@pytest.mark.parametrize("text", ["tests/work/x", "~/home/", "README.md", "out/tmp/y", "1/root/2"])
def test_ordinary_text_passes(text: str) -> None:
    """Relative paths and our own documents are left alone."""
    assert forbidden_text(text) == []
