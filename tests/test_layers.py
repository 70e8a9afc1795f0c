"""The layers of the package: a module imports from its own or an earlier one, and no two import each other."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import networkx as nx
import pytest
import ringstrain

ROOT = Path(ringstrain.__file__).parent
#: Layer by module or package, as the design fixes them; anything else belongs between the core and batch.
LAYERS = {
    "errors": 1,
    "units": 1,
    "provenance": 1,
    "tables": 2,
    "structure": 2,
    "ringgraph": 3,
    "substituents": 3,
    "geometry": 3,
    "states": 3,
    "stereo": 3,
    "symmetry": 3,
    "contacts": 3,
    "ledger": 4,
    "equilibrium": 4,
    "analysis": 4,
    "isomers": 5,
    "patterns": 5,
    "_kernels": 5,
    "consequences": 5,
    "validation": 5,
    "batch": 6,
    "views": 7,
    "cli": 8,
}
MODULES = sorted(path for path in ROOT.rglob("*.py") if "_tables" not in path.parts)


def name_of(path: Path) -> str:
    """Dotted name below the package."""
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def is_for_types_only(node: ast.stmt) -> bool:
    """True for ``if TYPE_CHECKING:``."""
    return isinstance(node, ast.If) and isinstance(node.test, ast.Name) and node.test.id == "TYPE_CHECKING"


def statements(tree: ast.AST, *, top_only: bool) -> list[ast.stmt]:
    """Import statements, those for type checking left out."""
    found: list[ast.stmt] = []
    for child in ast.iter_child_nodes(tree):
        if isinstance(child, ast.stmt) and is_for_types_only(child):
            continue
        if isinstance(child, ast.Import | ast.ImportFrom):
            found.append(child)
        elif not (top_only and isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef)):
            found.extend(statements(child, top_only=top_only))
    return found


def imports(path: Path, *, top_only: bool = False) -> set[str]:
    """Dotted names a module imports, functions included unless ``top_only``."""
    found: set[str] = set()
    for node in statements(ast.parse(path.read_text(encoding="utf-8")), top_only=top_only):
        if isinstance(node, ast.Import):
            found.update(alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path} imports relatively"
            found.add(str(node.module))
            found.update(f"{node.module}.{alias.name}" for alias in node.names)
    return found


def own(names: set[str]) -> set[str]:
    """Modules of the package among imported names."""
    known = {f"ringstrain.{name_of(path)}" for path in MODULES if name_of(path)}
    return {name.removeprefix("ringstrain.") for name in names if name in known}


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_a_module_imports_from_its_own_or_an_earlier_layer(path: Path) -> None:
    mine = LAYERS.get(name_of(path).split(".")[0])
    for name in own(imports(path)):
        other = LAYERS.get(name.split(".")[0])
        if mine is not None and other is not None:
            assert other <= mine, f"{name_of(path)} (layer {mine}) imports {name} (layer {other})"


def test_unlisted_modules_sit_between_what_they_import_and_what_imports_them() -> None:
    graph: nx.DiGraph[str] = nx.DiGraph()
    for path in MODULES:
        graph.add_edges_from((name_of(path), name) for name in own(imports(path)) if name_of(path))
    for name in graph:
        below = [LAYERS[n.split(".")[0]] for n in nx.descendants(graph, name) if n.split(".")[0] in LAYERS]
        above = [LAYERS[n.split(".")[0]] for n in nx.ancestors(graph, name) if n.split(".")[0] in LAYERS]
        if below and above:
            assert max(below) <= min(above), f"{name} ties layer {max(below)} to layer {min(above)}"


def test_no_two_modules_import_each_other() -> None:
    graph: nx.DiGraph[str] = nx.DiGraph()
    for path in MODULES:
        graph.add_edges_from((name_of(path), name) for name in own(imports(path, top_only=True)) if name_of(path))
    assert list(nx.simple_cycles(graph)) == []


HOMES = {
    "rdkit": ("structure", "views", "crosscheck"),
    "rich": ("views", "cli"),
    "typer": ("cli",),
}


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_outside_packages_stay_where_they_belong(path: Path) -> None:
    home = name_of(path).split(".")[0]
    for name in imports(path):
        allowed = HOMES.get(name.split(".")[0])
        if name in ("rdkit", "rdkit.rdBase") and home == "cli":
            continue  # --version names RDKit's
        assert allowed is None or home in allowed, f"{name_of(path)} imports {name}"


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_only_the_border_touches_clock_environment_and_console(path: Path) -> None:
    home = name_of(path).split(".")[0]
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for node in ast.walk(tree):
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
            assert node.func.id != "print", f"{name_of(path)} prints"
        if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name):
            where = f"{node.value.id}.{node.attr}"
            assert home == "cli" or where not in ("os.environ", "os.getenv", "sys.exit", "sys.argv"), where
            assert home in ("cli", "batch") or node.value.id not in ("time", "datetime"), where


def test_importing_the_package_stays_light() -> None:
    code = "import sys, ringstrain; print(*sorted({m.split('.')[0] for m in sys.modules}))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, encoding="utf-8")
    assert not {"rdkit", "rich", "typer", "networkx", "numpy"} & set(done.stdout.split())


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_modules_stay_small(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= 450, "split it (about 400 lines is the limit)"


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_every_open_names_encoding_and_newline(path: Path) -> None:
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if not isinstance(node, ast.Call):
            continue
        called = node.func.id if isinstance(node.func, ast.Name) else getattr(node.func, "attr", "")
        owner = getattr(getattr(node.func, "value", None), "id", "")
        if called != "open" or owner in ("os", "webbrowser"):
            continue
        if any(isinstance(a, ast.Constant) and isinstance(a.value, str) and "b" in a.value for a in node.args[1:2]):
            continue
        assert {"encoding", "newline"} <= {keyword.arg for keyword in node.keywords}, f"line {node.lineno}"
