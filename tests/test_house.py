"""The house rules that a machine can hold: lint, types, size of things, what stands at the top level."""

from __future__ import annotations

import ast
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
MODULES = sorted((ROOT / "workbench").rglob("*.py"))
README = (ROOT / "README.md").read_text(encoding="utf-8")
OPEN_COMMAND = "python3 -m venv .venv && .venv/bin/pip install . && .venv/bin/workbench open sample_runs/rings_autumn"
TEST_COMMAND = "python3 -m venv .venv && .venv/bin/pip install -e '.[test]' && .venv/bin/pytest"


def run(*command: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)


def tracked() -> list[str]:
    listing = run("git", "ls-files", "-z")
    if listing.returncode:
        pytest.skip("not in a git checkout, so there is no list of what belongs to the project")
    return [name for name in listing.stdout.split("\0") if name]


def test_lint() -> None:
    found = run(sys.executable, "-m", "ruff", "check", "--no-cache", ".")
    assert found.returncode == 0, found.stdout


def test_types() -> None:
    found = run(sys.executable, "-m", "mypy")
    assert found.returncode == 0, found.stdout


def test_top_level() -> None:
    top = {name.split("/")[0] for name in tracked()}
    visible = {name for name in top if not name.startswith(".")}
    assert visible == {"README.md", "DEVELOPERS.md", "pyproject.toml", "workbench", "notebooks", "tests", "sample_runs"}


def test_every_dependency_has_its_reason_beside_it() -> None:
    text = (ROOT / "pyproject.toml").read_text(encoding="utf-8")
    project = tomllib.loads(text)["project"]
    wanted = [
        *project["dependencies"],
        *(each for extra in project["optional-dependencies"].values() for each in extra),
    ]
    lines = [line for line in text.splitlines() if re.match(r'\s*"[a-z]', line) and re.search(r"[>=<]", line)]
    for package in wanted:
        line = next(line for line in lines if f'"{package}"' in line)
        assert re.search(r"#\s*\w", line), f"no reason beside {package}"


@pytest.mark.parametrize("module", MODULES, ids=lambda path: path.relative_to(ROOT).as_posix())
def test_modules_and_functions_stay_small(module: Path) -> None:
    text = module.read_text(encoding="utf-8")
    assert text.count("\n") <= 400
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            body = node.body[1:] if ast.get_docstring(node) is not None else node.body
            lines = (body[-1].end_lineno or 0) - body[0].lineno + 1 if body else 0
            assert lines <= 60, f"{node.name} has {lines} lines"


@pytest.mark.parametrize("command", [OPEN_COMMAND, TEST_COMMAND])
def test_readme_commands_are_single_lines(command: str) -> None:
    assert README.splitlines().count(command) == 1


def test_ci_runs_the_very_test_command_of_the_readme() -> None:
    assert TEST_COMMAND in (ROOT / ".ci" / "run").read_text(encoding="utf-8").splitlines()


def test_readme_names_files_that_exist() -> None:
    for text in (README, (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")):
        for target in re.findall(r"\]\((?!https?:)([^)#]+)\)", text):
            assert (ROOT / target).exists(), target


def test_notebooks_carry_outputs_only_where_they_are_compared() -> None:
    import nbformat

    books = sorted((ROOT / "notebooks").glob("*.ipynb"))
    assert books
    for path in books:
        for cell in nbformat.read(path, as_version=4).cells:
            if cell.cell_type == "code" and "nbval-check-output" not in cell.metadata.get("tags", []):
                assert not cell.outputs, f"{path.name}: an output that nothing compares"


def test_nothing_of_one_machine_in_the_project() -> None:
    for name in tracked():
        path = ROOT / name
        if path.suffix in {".py", ".md", ".toml", ".ipynb", ".csv"} and path.is_file():
            text = path.read_text(encoding="utf-8", errors="replace")
            assert not re.search(r"/(?:home|root|Users)/\w+/|/" + r"work/\w", text), name
