"""Rules of the house that no single package can hold by itself."""

from __future__ import annotations

import ast
import os
import subprocess
import sys
from pathlib import Path

import pytest

import cuebook

ROOT = Path(__file__).resolve().parent.parent
TOP_LEVEL = {
    "pyproject.toml",
    "README.md",
    "DEVELOPERS.md",
    "cuebook",
    "tests",
    "seed_cues",
    "docs",
}
LONGEST_MODULE_LINES = 450


def list_tracked_files() -> list[str]:
    """Return the paths git tracks, relative to the root."""
    listed = subprocess.run(
        ["git", "ls-files"], cwd=ROOT, check=True, capture_output=True, text=True
    )
    return listed.stdout.split("\n")[:-1]


def test_top_level_holds_what_was_agreed() -> None:
    """The top level has the seven agreed entries and hidden files, nothing else."""
    seen = {path.split("/")[0] for path in list_tracked_files()}
    assert {name for name in seen if not name.startswith(".")} == TOP_LEVEL


def test_the_licence_and_changelog_are_in_docs() -> None:
    """A reader finds the licence and what changed under docs/."""
    assert (ROOT / "docs" / "LICENCE.txt").is_file()
    assert (ROOT / "docs" / "CHANGELOG.md").is_file()


def test_no_module_grows_past_one_sitting() -> None:
    """Every module can be read in one sitting."""
    long = [
        path
        for path in list_tracked_files()
        if path.endswith(".py")
        and "/migrations/" not in path
        and len((ROOT / path).read_text(encoding="utf-8").splitlines()) > LONGEST_MODULE_LINES
    ]
    assert long == []


def test_every_test_states_its_promise() -> None:
    """Each test function has a docstring that says what it promises."""
    silent = []
    for path in sorted((ROOT / "tests").rglob("test_*.py")):
        tree = ast.parse(path.read_text(encoding="utf-8"))
        silent += [
            f"{path.name}:{node.name}"
            for node in ast.walk(tree)
            if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
            and node.name.startswith("test_")
            and not ast.get_docstring(node)
        ]
    assert silent == []


def test_the_installed_package_is_tested_where_the_build_asks_for_it() -> None:
    """On the build server the wheel is under test, not the checkout."""
    if os.environ.get("CUEBOOK_EXPECT_INSTALLED"):
        assert "site-packages" in Path(cuebook.__file__).parts
    else:
        assert Path(cuebook.__file__).is_file()


PURE = ("vocabulary", "library", "practice", "recordings", "metrics", "evidence")
SCREEN_FREE = (*PURE, "store", "jobs", "cli")


@pytest.mark.parametrize(
    ("packages", "banned"),
    [
        (PURE, ("textual", "sqlmodel", "sqlalchemy", "alembic", "click", "sqlite3")),
        (SCREEN_FREE, ("textual",)),
    ],
)
def test_packages_load_nothing_above_them(
    packages: tuple[str, ...], banned: tuple[str, ...]
) -> None:
    """A fresh interpreter that loads every module of a layer loads no banned library."""
    script = (
        "import importlib, pkgutil, sys, cuebook\n"
        f"for name in {packages!r}:\n"
        "    package = importlib.import_module('cuebook.' + name)\n"
        "    for module in pkgutil.walk_packages(package.__path__, package.__name__ + '.'):\n"
        "        if '.migrations.' not in module.name:\n"
        "            importlib.import_module(module.name)\n"
        f"print(sorted(set({banned!r}) & set(sys.modules)))\n"
    )
    loaded = subprocess.run(
        [sys.executable, "-P", "-c", script], check=True, capture_output=True, text=True
    )
    assert loaded.stdout.strip() == "[]"


def test_help_loads_no_heavy_library() -> None:
    """Asking for help stays light: no tables, no frames, no screens."""
    script = (
        "import sys\n"
        "from cuebook.cli.main import run\n"
        "run(['--help'])\n"
        "heavy = {'pandas', 'numpy', 'scipy', 'sqlmodel', 'sqlalchemy', 'textual', 'alembic'}\n"
        "print(sorted(heavy & set(sys.modules)), file=sys.stderr)\n"
    )
    shown = subprocess.run(
        [sys.executable, "-P", "-c", script], check=True, capture_output=True, text=True
    )
    assert "Commands" in shown.stdout
    assert shown.stderr.strip() == "[]"
