"""Imports go down only, without circles; the core stays equations; starting stays fast."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

import actuator_sizing

PACKAGE = Path(actuator_sizing.__file__).parent
ROOT = PACKAGE.parent

# Higher may import lower or its own layer. `files` is plumbing beside `errors` and `units`.
LAYERS = {
    "version": 0, "errors": 0, "files": 0, "units": 0, "core": 1, "case": 2, "sizing": 3, "report": 4,
}  # fmt: skip
TOP = {
    "cli": 5, "cli_parts": 5, "cli_studies": 5, "console": 5, "simulation_console": 5, "headroom_console": 5,
    "machine_console": 5, "robustness_console": 5, "workbench": 5, "__main__": 6,
}  # fmt: skip

# Upward arrows that are wanted: a convenience method that calls a writer, imported when it is called.
ALLOWED_UPWARD = {
    ("actuator_sizing.sizing.results", "actuator_sizing.report"),
    ("actuator_sizing.sizing.simulation_results", "actuator_sizing.report.figures.dynamics"),
    ("actuator_sizing.sizing.simulation_results", "actuator_sizing.report.simulation_files"),
    ("actuator_sizing.sizing.robustness.results", "actuator_sizing.report.figures.robustness"),
    ("actuator_sizing.sizing.robustness.results", "actuator_sizing.report.robustness_files"),
}

# The core knows numbers, not files, tables or clocks.
CORE_MAY_IMPORT = {
    "__future__", "abc", "bisect", "cmath", "collections", "dataclasses", "enum", "functools", "importlib",
    "itertools",
    "math", "numpy", "operator", "scipy", "types", "typing",
}  # fmt: skip

HEAVY = {
    "numpy", "scipy", "pandas", "matplotlib", "openpyxl", "xlsxwriter", "jinja2", "rich", "typst",
    "defusedxml", "xml", "csv", "json", "sqlite3",
}  # fmt: skip


def module_name(path):
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


MODULES = {module_name(path): path for path in sorted(PACKAGE.rglob("*.py"))}


class _Imports(ast.NodeVisitor):
    """Every import of a module, with whether it runs when the module is imported."""

    def __init__(self, name, is_package):
        self.package = name.split(".") if is_package else name.split(".")[:-1]
        self.found = []  # (imported module, at import time)
        self.runs = True

    def visit_Import(self, node):  # noqa: N802
        self.found += [(alias.name, self.runs) for alias in node.names]

    def visit_ImportFrom(self, node):  # noqa: N802
        base = node.module or ""
        if node.level:
            head = self.package[: len(self.package) - node.level + 1]
            base = ".".join([*head, base] if base else head)
        for alias in node.names:
            deeper = f"{base}.{alias.name}"
            self.found.append((deeper if deeper in MODULES else base, self.runs))

    def visit_If(self, node):  # noqa: N802
        is_typing = "TYPE_CHECKING" in ast.dump(node.test)
        self._later(node.body) if is_typing else [self.visit(child) for child in node.body]
        for child in node.orelse:
            self.visit(child)

    def _later(self, body):
        before, self.runs = self.runs, False
        for child in body:
            self.visit(child)
        self.runs = before

    def visit_FunctionDef(self, node):  # noqa: N802
        self._later(node.body)

    visit_AsyncFunctionDef = visit_FunctionDef  # noqa: N815


def imports_of(source, name, is_package=False):
    visitor = _Imports(name, is_package)
    visitor.visit(ast.parse(source))
    return visitor.found


GRAPH = {
    name: imports_of(path.read_text(encoding="utf-8"), name, path.name == "__init__.py")
    for name, path in MODULES.items()
}


def layer_of(name):
    parts = name.split(".")
    if len(parts) == 1:
        return 6  # the public face
    head = "units" if parts[1].startswith("unit_") else parts[1]  # units.py and what it is made of
    layer = {**LAYERS, **TOP}.get(head)
    assert layer is not None, f"{name} belongs to no layer: add it to the list, or move it"
    return layer


def upward_arrows(graph):
    for name, imported in graph.items():
        for target, _ in imported:
            if not target.startswith("actuator_sizing"):
                continue
            if target == "actuator_sizing":
                yield from () if layer_of(name) >= 5 else [(name, target)]
            elif layer_of(target) > layer_of(name) and (name, target) not in ALLOWED_UPWARD:
                yield name, target


def circles(graph):
    """Modules that import each other when imported, found by depth-first search."""
    state, path = {}, []

    def visit(name):
        state[name] = "open"
        path.append(name)
        for target, runs in graph[name]:
            if not runs or target not in graph or target == name:
                continue
            if state.get(target) == "open":
                yield [*path[path.index(target) :], target]
            elif target not in state:
                yield from visit(target)
        path.pop()
        state[name] = "done"

    for name in graph:
        if name not in state:
            yield from visit(name)


def test_imports_go_down_only():
    assert list(upward_arrows(GRAPH)) == []


def test_no_circle():
    # A package's face lists what its own modules offer, and they may ask for siblings: that is no circle.
    graph = {
        name: [(t, runs and not name.startswith(f"{t}.")) for t, runs in found]
        for name, found in GRAPH.items()
    }
    assert list(circles(graph)) == []


def test_core_imports_only_mathematics():
    wrong = [
        (name, target)
        for name, imported in GRAPH.items()
        if name.startswith("actuator_sizing.core")
        for target, _ in imported
        if target.split(".")[0] not in CORE_MAY_IMPORT
        and not target.startswith(("actuator_sizing.core", "actuator_sizing.errors"))
    ]
    assert wrong == []


def test_the_test_itself_sees_faults():
    """An upward arrow, also a late one, and a circle are found; typing-only imports make no circle."""
    up = {"actuator_sizing.core.x": imports_of("def f():\n  from actuator_sizing.sizing import compare", "")}
    assert len(list(upward_arrows(up))) == 1
    pair = {
        "actuator_sizing.core.a": [("actuator_sizing.core.b", True)],
        "actuator_sizing.core.b": [("actuator_sizing.core.a", True)],
    }
    assert len(list(circles(pair))) == 1
    typed = imports_of("if TYPE_CHECKING:\n  import actuator_sizing.core.b\nelse:\n  import math", "")
    assert typed == [("actuator_sizing.core.b", False), ("math", True)]


def loaded_after(code):
    done = subprocess.run(
        [sys.executable, "-c", f"{code}\nimport sys; print('\\n'.join(sys.modules))"],
        capture_output=True,
        text=True,
        check=True,
        cwd=ROOT,
    )
    return {name.split(".")[0] for name in done.stdout.splitlines()}


@pytest.mark.parametrize(
    "code",
    [
        "import actuator_sizing",
        "import actuator_sizing.cli",
        "from actuator_sizing.cli import commands as c\nc.main(['--help'], standalone_mode=False)",
        "from actuator_sizing.cli import commands as c\nc.main(['compare', '--help'], standalone_mode=False)",
    ],
)
def test_starting_loads_nothing_heavy(code):
    assert loaded_after(code) & HEAVY == set()


def test_the_public_face_offers_what_it_lists():
    for name in actuator_sizing.__all__:
        assert getattr(actuator_sizing, name) is not None
    assert set(actuator_sizing.__all__) <= set(dir(actuator_sizing))
    with pytest.raises(AttributeError, match="no attribute 'nothing'"):
        actuator_sizing.nothing  # noqa: B018


def test_the_limits_table_knows_every_check():
    """The case layer cannot import the checks, so it keeps their names; the two lists must agree."""
    from actuator_sizing.case.check_names import CHECK_NAMES
    from actuator_sizing.sizing.checks import CHECKS

    assert [(check.key, check.title.casefold()) for check in CHECKS] == [
        (key, title.casefold()) for key, title in CHECK_NAMES
    ]
