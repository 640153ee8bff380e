"""The import rule: a folder of the program imports only from folders above it in the listing."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

PROGRAM = Path(__file__).parent.parent / "workbench"
ORDER = (
    "base", "bench", "capture", "cycle", "loop", "quantities", "store", "theory", "verdict", "views", "write", "cli",
)  # fmt: skip
MODULES = sorted(PROGRAM.rglob("*.py"))
# cli.py: help and typing errors come at once; __init__: `import workbench` does not load the widgets.
MAY_DEFER = {"cli.py", "__init__.py"}
NO_WIDGETS = ("ipywidgets", "bqplot")


def layer(module: Path) -> str:
    return module.relative_to(PROGRAM).parts[0].removesuffix(".py")


def imported(tree: ast.AST) -> Iterator[str]:
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (each.name for each in node.names)
        elif isinstance(node, ast.ImportFrom):
            yield "." * node.level + (node.module or "")
            # `from workbench import store` names its layer on the right.
            yield from (f"{node.module}.{each.name}" for each in node.names if node.module == "workbench")


def own(names: Iterator[str]) -> set[str]:
    return {name.split(".")[1] for name in names if name.startswith("workbench.")}


@pytest.mark.parametrize("module", MODULES, ids=lambda path: path.relative_to(PROGRAM).as_posix())
def test_a_folder_imports_only_from_folders_above_it(module: Path) -> None:
    names = list(imported(ast.parse(module.read_text(encoding="utf-8"))))
    assert not [name for name in names if name.startswith(".")], "relative imports hide the layer"
    if module == PROGRAM / "__init__.py":
        return  # the map itself names all layers, lazily
    assert layer(module) in ORDER, f"{module} is in no folder of the listing: add it to ORDER where it belongs"
    below = {name for name in own(iter(names)) if ORDER.index(name) > ORDER.index(layer(module))}
    assert not below, f"{module} imports from below: {below}"


@pytest.mark.parametrize("module", MODULES, ids=lambda path: path.relative_to(PROGRAM).as_posix())
def test_no_import_of_the_own_package_inside_a_function(module: Path) -> None:
    if module.relative_to(PROGRAM).as_posix() in MAY_DEFER:
        return
    tree = ast.parse(module.read_text(encoding="utf-8"))
    functions = (node for node in ast.walk(tree) if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef))
    inside = {name for function in functions for name in own(imported(function))}
    assert not inside, f"{module} imports {inside} inside a function: the code is in the wrong folder"


@pytest.mark.parametrize("module", MODULES, ids=lambda path: path.relative_to(PROGRAM).as_posix())
def test_only_the_widgets_folder_knows_widgets(module: Path) -> None:
    parts = module.relative_to(PROGRAM).parts
    if parts[:2] == ("views", "widgets"):
        return
    names = imported(ast.parse(module.read_text(encoding="utf-8")))
    assert not [name for name in names if name.split(".")[0] in NO_WIDGETS]


def test_the_rule_sees_a_breach() -> None:
    """The reading of imports above finds every way to write one."""
    source = (
        "import workbench.store.open\nfrom workbench import views\ndef f():\n    from workbench.write import table\n"
    )
    assert own(imported(ast.parse(source))) == {"store", "views", "write"}
