"""A room imports only from rooms below it, no module in a circle, and the command line nothing heavy."""

from __future__ import annotations

import ast
import sys
from collections.abc import Iterator
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
PACKAGE = "reanalysis"

LAYERS = (
    {"errors", "progress"},
    {"study"},
    {"data"},
    {"families"},
    {"design"},
    {"frequentist", "bayesian"},  # neither knows the other
    {"effects"},
    {"sensitivity"},
    {"comparison"},
    {"analysis"},
    {"report"},
    {"batch"},
    {"commands"},
    {"cli", "__main__"},
)
"""Rooms from the ground floor up; rooms on one floor do not import each other."""

HEAVY = {
    *("arviz", "arviz_base", "arviz_stats", "bambi", "dask", "formulae", "matplotlib", "numba", "numpy"),
    *("nutpie", "openpyxl", "pandas", "pyarrow", "pymc", "pytensor", "scipy", "statsmodels", "weasyprint"),
    *("xarray",),
}
"""Libraries that must not be loaded on the way to ``--help``."""

type Imports = dict[str, set[str]]


def read_modules(root: Path) -> dict[str, ast.Module]:
    """Parse every module of the package under `root`, by dotted name."""
    trees = {}
    for path in sorted((root / PACKAGE).rglob("*.py")):
        parts = path.relative_to(root).with_suffix("").parts
        name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
        trees[name] = ast.parse(path.read_text(encoding="utf-8"), str(path))
    return trees


def imports_of(nodes: Iterator[ast.AST], modules: set[str]) -> set[str]:
    """Return the dotted names imported by `nodes`; of ``from package import module``, the module's."""
    names = set()
    for node in nodes:
        if isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            base = "." * node.level + (node.module or "")
            members = {f"{base}.{alias.name}" for alias in node.names}
            names |= (members & modules) or {base}
    return names


def at_import(node: ast.AST) -> Iterator[ast.AST]:
    """Walk what runs when a module is imported: everything but function bodies and type-checking blocks."""
    for child in ast.iter_child_nodes(node):
        if isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda):
            continue
        if isinstance(child, ast.If) and ast.unparse(child.test).endswith("TYPE_CHECKING"):
            continue
        yield child
        yield from at_import(child)


def room_of(module: str) -> str:
    """Return the room that a module belongs to."""
    return module.split(".")[1]


def floor_of(room: str) -> int:
    """Return the floor of a room."""
    for floor, rooms in enumerate(LAYERS):
        if room in rooms:
            return floor
    raise AssertionError(f"room {room!r} is on no floor: give it a place in LAYERS")


def layer_faults(imports: Imports) -> list[str]:
    """Say which imports go upward, sideways, relative or through the package's root."""
    faults = []
    for module, targets in sorted(imports.items()):
        if module == PACKAGE:
            continue  # the public surface stands above all rooms
        for target in sorted(targets):
            if target.startswith("."):
                faults.append(f"{module} imports {target} relatively: name the defining module in full")
            elif target == PACKAGE:
                faults.append(f"{module} imports from the package's root: name the defining module")
            elif target.startswith(f"{PACKAGE}."):
                here, there = room_of(module), room_of(target)
                if here != there and floor_of(here) <= floor_of(there):
                    faults.append(f"{module} imports {target}, which is not below it")
    return faults


def all_imports(trees: dict[str, ast.Module]) -> Imports:
    """Return every import of every module, those inside functions included."""
    return {name: imports_of(ast.walk(tree), set(trees)) for name, tree in trees.items()}


def circle(imports: Imports) -> list[str]:
    """Return the modules of a circular import, or nothing."""
    graph = {name: {t for t in targets if t in imports and t != name} for name, targets in imports.items()}
    try:
        TopologicalSorter(graph).prepare()
    except CycleError as error:
        return list(error.args[1])
    return []


def loaded_with(module: str, trees: dict[str, ast.Module]) -> set[str]:
    """Return the top-level names of all libraries that importing a module loads, through our own modules."""
    waiting, seen, libraries = [module], set(), set()
    while waiting:
        name = waiting.pop()
        parents = [name.rsplit(".", count)[0] for count in range(1, name.count(".") + 1)]
        for known in {name, *parents} & set(trees) - seen:
            seen.add(known)
            targets = imports_of(at_import(trees[known]), set(trees))
            waiting += [target for target in targets if target.split(".")[0] == PACKAGE]
            libraries |= {target.split(".")[0] for target in targets} - {PACKAGE}
    return libraries


TREES = read_modules(ROOT)


def test_every_module_has_a_floor() -> None:
    """Each room of the package stands in the list of layers."""
    assert {room_of(name) for name in TREES if name != PACKAGE} <= set().union(*LAYERS)


def test_imports_go_downward() -> None:
    """No import goes to a room on the same floor or above, not even inside a function."""
    assert layer_faults(all_imports(TREES)) == []


def test_no_module_imports_itself_in_a_circle() -> None:
    """Following imports never leads back to where one started."""
    assert circle(all_imports(TREES)) == []


def test_command_line_loads_nothing_heavy() -> None:
    """Importing the command line loads no numerical library, so that help is instant."""
    entry = [name for name in TREES if name == f"{PACKAGE}.cli" or name.startswith(f"{PACKAGE}.cli.")]

    assert {name: loaded_with(name, TREES) & HEAVY for name in entry} == {name: set() for name in entry}


def test_only_known_libraries_are_called_heavy() -> None:
    """The standard library is not in the list of heavy libraries by mistake."""
    assert not HEAVY & sys.stdlib_module_names


# The checks themselves, on a package small enough to see through.


@pytest.mark.parametrize(
    ("module", "source", "fault"),
    [
        ("study/spec.py", "from reanalysis.design.model import Design", "not below"),
        ("frequentist/fit.py", "import reanalysis.bayesian.fit", "not below"),
        ("study/read.py", "def f():\n    from reanalysis.cli import main", "not below"),
        ("report/html.py", "from reanalysis import errors_list", "package's root"),
        ("study/read.py", "from .spec import Study", "relatively"),
        ("cli.py", "from reanalysis.report.html import render", ""),
        ("report/html.py", "from reanalysis.report.tables import rows", ""),
        ("study/read.py", "from reanalysis import errors", ""),
    ],
)
def test_layer_check_sees(tmp_path: Path, module: str, source: str, fault: str) -> None:
    """The check finds an upward, sideways, hidden, relative or root import, and lets a proper one pass."""
    for name, text in {"errors.py": "", module: source}.items():
        path = tmp_path / PACKAGE / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")

    faults = layer_faults(all_imports(read_modules(tmp_path)))

    assert len(faults) == bool(fault)
    assert all(fault in text for text in faults)


def test_circle_check_sees_a_circle() -> None:
    """Two modules of one room that import each other are found, a chain is not."""
    assert set(circle({"a.x": {"a.y"}, "a.y": {"a.x", "json"}})) == {"a.x", "a.y"}
    assert circle({"a.x": {"a.y"}, "a.y": {"json"}}) == []


def test_load_check_follows_modules() -> None:
    """A heavy library is found through other modules and through a parent package, not inside functions."""
    trees = {
        "reanalysis": ast.parse("import tomllib"),
        "reanalysis.cli": ast.parse("from reanalysis.study.spec import Study\ndef f(): import pymc"),
        "reanalysis.study": ast.parse("import scipy.stats"),
        "reanalysis.study.spec": ast.parse("try:\n    import numpy\nexcept ImportError: pass"),
    }

    assert loaded_with("reanalysis.cli", trees) == {"tomllib", "scipy", "numpy"}
