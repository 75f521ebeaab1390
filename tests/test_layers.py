"""Imports point downward only, and no floor has a cycle.

Read from the source text: imports inside functions count as well, since they bind as
much. Imports for type checking only may not point upward either, but may close a
cycle.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

import pytest

PACKAGE = Path(__file__).resolve().parent.parent / "formbuf"
#: Floor of each module or sub-package directly below the package.
FLOORS: Mapping[str, int] = {
    "errors": 0,
    "constants": 0,
    "notebook": 0,
    "units": 0,
    "library": 1,
    "chemistry": 2,
    "product": 3,
    "advice": 4,
    "bench": 4,
    "qualify": 4,
    "output": 5,
    "report": 5,
    "cli": 6,
    "__main__": 7,
}


@dataclass(frozen=True)
class Import:
    """One import of a module of the package by another."""

    importer: str
    imported: str
    line: int
    typing_only: bool

    def __str__(self) -> str:
        return f"{self.importer}:{self.line} imports {self.imported}"


def modules(root: Path) -> dict[str, Path]:
    """Every module below a package directory, by its full name."""
    found = {}
    for path in sorted(root.rglob("*.py")):
        parts = [root.name, *path.relative_to(root).with_suffix("").parts]
        if parts[-1] == "__init__":
            parts.pop()
        found[".".join(parts)] = path
    return found


def imports(root: Path) -> list[Import]:
    """Every import of a module of the package within it."""
    known = modules(root)
    found = []
    for name, path in known.items():
        tree = ast.parse(path.read_text(encoding="utf-8"))
        for node, typing_only in _import_nodes(tree, typing_only=False):
            found += [
                Import(name, target, node.lineno, typing_only)
                for target in _targets(node, known, root.name)
            ]
    return found


def _import_nodes(
    node: ast.AST, *, typing_only: bool
) -> Iterator[tuple[ast.Import | ast.ImportFrom, bool]]:
    for child in ast.iter_child_nodes(node):
        if isinstance(child, ast.Import | ast.ImportFrom):
            yield child, typing_only
        elif isinstance(child, ast.If) and "TYPE_CHECKING" in ast.dump(child.test):
            for part in child.body:
                wrapper = ast.Module([part], [])
                yield from _import_nodes(wrapper, typing_only=True)
            for part in child.orelse:
                wrapper = ast.Module([part], [])
                yield from _import_nodes(wrapper, typing_only=typing_only)
        else:
            yield from _import_nodes(child, typing_only=typing_only)


def _targets(
    node: ast.Import | ast.ImportFrom, known: Mapping[str, Path], package: str
) -> list[str]:
    if isinstance(node, ast.Import):
        return [a.name for a in node.names if a.name.split(".")[0] == package]
    assert node.level == 0, f"relative import on line {node.lineno}"
    base = node.module or ""
    if base.split(".")[0] != package:
        return []
    deeper = [f"{base}.{alias.name}" for alias in node.names]
    return list(dict.fromkeys(name if name in known else base for name in deeper))


def floor(name: str) -> int | None:
    """Floor of a module; None for the package itself, which only offers names."""
    parts = name.split(".")
    return None if len(parts) == 1 else FLOORS[parts[1]]


def upward(found: list[Import]) -> list[Import]:
    """Imports that point to a higher floor."""
    broken = []
    for one in found:
        below, above = floor(one.importer), floor(one.imported)
        if below is not None and above is not None and above > below:
            broken.append(one)
    return broken


def cycles(found: list[Import]) -> list[list[str]]:
    """Groups of modules that import each other in a circle."""
    graph: dict[str, set[str]] = {}
    for one in found:
        if not one.typing_only and floor(one.importer) is not None:
            graph.setdefault(one.importer, set()).add(one.imported)
    reached = {name: _reached(name, graph) for name in graph}
    circles = {
        frozenset(other for other in reached[name] if name in reached.get(other, ()))
        for name in graph
        if name in reached[name]
    }
    return sorted(sorted(circle) for circle in circles)


def _reached(start: str, graph: Mapping[str, set[str]]) -> set[str]:
    seen: set[str] = set()
    waiting = list(graph.get(start, ()))
    while waiting:
        name = waiting.pop()
        if name not in seen:
            seen.add(name)
            waiting += graph.get(name, ())
    return seen


def test_every_part_of_the_package_has_a_floor() -> None:
    parts = {name.split(".")[1] for name in modules(PACKAGE) if "." in name}
    assert parts <= FLOORS.keys(), "give the new part a floor"


def test_the_walk_sees_what_is_known_to_be_there() -> None:
    pairs = {(one.importer, one.imported) for one in imports(PACKAGE)}
    assert ("formbuf.cli.main", "formbuf.cli.frame") in pairs
    assert ("formbuf.advice.shortlist", "formbuf.product.brief") in pairs
    assert len(pairs) > 200


def test_imports_point_downward_only() -> None:
    broken = upward(imports(PACKAGE))
    assert not broken, "\n".join(map(str, broken))


def test_no_modules_import_each_other_in_a_circle() -> None:
    found = cycles(imports(PACKAGE))
    assert not found, "\n".join(" <-> ".join(circle) for circle in found)


@pytest.mark.parametrize(
    "line",
    [
        "from formbuf.advice.shortlist import shortlist",
        "import formbuf.cli.main",
        "from formbuf import cli",
        "def f():\n    from formbuf.output import writers",
        "if TYPE_CHECKING:\n    from formbuf.product.brief import Brief",
        "class A:\n    def f(self):\n        import formbuf.report",
    ],
)
def test_a_planted_upward_import_is_found(tmp_path: Path, line: str) -> None:
    root = _planted(tmp_path, {"chemistry/bad.py": line})
    assert [one.importer for one in upward(imports(root))] == ["formbuf.chemistry.bad"]


def test_a_planted_downward_import_is_fine(tmp_path: Path) -> None:
    line = "from formbuf.library import records\nfrom formbuf import __version__"
    root = _planted(tmp_path, {"chemistry/good.py": line})
    assert not upward(imports(root))


def test_a_planted_circle_is_found(tmp_path: Path) -> None:
    root = _planted(
        tmp_path,
        {
            "chemistry/a.py": "from formbuf.chemistry import b",
            "chemistry/b.py": "def f():\n    from formbuf.chemistry.c import x",
            "chemistry/c.py": "import formbuf.chemistry.a",
        },
    )
    names = ["formbuf.chemistry.a", "formbuf.chemistry.b", "formbuf.chemistry.c"]
    assert cycles(imports(root)) == [names]


def _planted(folder: Path, files: Mapping[str, str]) -> Path:
    root = folder / "formbuf"
    places = ("advice/shortlist", "cli/main", "output/writers", "product/brief")
    parts = {f"{name}.py": "" for name in places}
    parts |= {f"{name}/__init__.py": "" for name in FLOORS if "_" not in name}
    parts["__init__.py"] = ""
    for name, text in {**parts, **files}.items():
        path = root / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text)
    return root
