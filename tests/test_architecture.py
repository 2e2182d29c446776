"""Layers, heavy imports, side effects and sizes: what keeps the code as DEVELOPERS.md draws it."""

from __future__ import annotations

import ast
import importlib
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest
from importlinter.application.use_cases import read_user_options
from importlinter.cli import lint_imports

import cardgen

PACKAGE = Path(cardgen.__file__).parent
ROOT = PACKAGE.parent
MODULES = {
    path: ast.parse(path.read_text(encoding="utf-8")) for path in sorted(PACKAGE.rglob("*.py"))
}
EDGE = {"profile", "render", "cli"}

#: 450 lines are a smell. These are longer, each for a reason.
MOST_LINES = 450
LONGER = {
    "units.py": "the table of units is one list",
}

#: Everything that a process without any command may load besides the standard library.
HEAVY = ("numpy", "scipy", "reportlab", "pydantic", "yaml", "pypdf", "click")


def part(path: Path) -> str:
    """Part of the package that a module belongs to."""
    return path.relative_to(PACKAGE).with_suffix("").parts[0]


def imported(tree: ast.Module) -> Iterator[str]:
    """Names of the modules that a module imports anywhere."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            yield node.module


def calls(tree: ast.Module) -> Iterator[str]:
    """Names of the functions and methods that a module calls."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Call):
            if isinstance(node.func, ast.Name):
                yield node.func.id
            elif isinstance(node.func, ast.Attribute):
                yield f".{node.func.attr}"


def importers(library: str) -> set[str]:
    """Modules that import a library, as paths in the package."""
    return {
        path.relative_to(PACKAGE).as_posix()
        for path, tree in MODULES.items()
        if any(name.split(".")[0] == library for name in imported(tree))
    }


def loaded_by(code: str) -> set[str]:
    """Modules that a fresh process has loaded after some code."""
    report = "import sys; print(); print(' '.join(sys.modules))"
    done = subprocess.run(
        [sys.executable, "-c", f"{code}\n{report}"],
        capture_output=True,
        text=True,
        check=True,
        cwd=ROOT,
    )
    return set(done.stdout.splitlines()[-1].split())


# --- Layers -------------------------------------------------------------------------------------


def test_imports_point_downward_only(monkeypatch: pytest.MonkeyPatch) -> None:
    """The layers of pyproject.toml hold; import-linter reads every import in the package."""
    monkeypatch.chdir(ROOT)
    monkeypatch.syspath_prepend(str(ROOT))
    assert lint_imports(config_filename="pyproject.toml", no_cache=True) == 0


def test_every_part_has_its_layer() -> None:
    """A new module outside the layers would be bound by nothing."""
    layers = read_user_options(str(ROOT / "pyproject.toml")).contracts_options[0]["layers"]
    named = {name.strip().split(".")[1] for line in layers for name in line.split("|")}
    parts = {part(path) for path in MODULES} - {"__init__", "__main__"}
    assert parts == named


# --- Heavy imports ------------------------------------------------------------------------------


def test_importing_the_package_loads_nothing_heavy() -> None:
    """Not even numpy: public names are loaded when they are first used."""
    loaded = loaded_by("import cardgen")
    assert not loaded & set(HEAVY)


def test_help_loads_only_click() -> None:
    """The overview imports no command and nothing that computes."""
    loaded = loaded_by("from cardgen.cli.main import run; run(['--help'])")
    assert loaded & set(HEAVY) == {"click"}
    assert {name for name in loaded if name.startswith("cardgen")} == {
        "cardgen",
        "cardgen.cli",
        "cardgen.cli.failure",
        "cardgen.cli.main",
        "cardgen.errors",
        "cardgen.records",
    }


def test_checking_a_setting_loads_neither_scipy_nor_reportlab() -> None:
    """A check is asked in the cockpit: it starts at once."""
    loaded = loaded_by(
        "from cardgen.cli.main import run; run(['check', 'profiles/aircraft/specimen.yaml', "
        "'--map', '23', '--rpm', '2300', '--altitude', '6000', '--no-fit'])"
    )
    assert "cardgen.cruise" in loaded
    assert not loaded & {"scipy", "reportlab", "pypdf"}


def test_scipy_is_used_in_fit_only() -> None:
    """The path from a setting to a number has no scipy on it."""
    assert {name.split("/")[0] for name in importers("scipy")} <= {"fit"}


def test_one_module_draws() -> None:
    """Only one module knows reportlab, so that pages are measured and placed without it."""
    assert importers("reportlab") == {"render/pdf.py"}


# --- Side effects -------------------------------------------------------------------------------


def test_nothing_below_the_command_line_speaks() -> None:
    """Below cli/ values are returned or errors raised: no print, no logging, no click."""
    speaking = {
        path.relative_to(PACKAGE).as_posix()
        for path, tree in MODULES.items()
        if part(path) not in {"cli", "__main__"}
        and (
            {"print", "input"} & set(calls(tree))
            or {name.split(".")[0] for name in imported(tree)} & {"logging", "click", "warnings"}
        )
    }
    assert not speaking


def test_files_are_touched_at_the_edge_only() -> None:
    """Only profile/, render/ and cli/ open files; the physics is handed numbers."""
    opening = {"open", ".open", ".read_text", ".write_text", ".read_bytes", ".write_bytes"}
    touching = {
        path.relative_to(PACKAGE).as_posix()
        for path, tree in MODULES.items()
        if part(path) not in EDGE and opening & set(calls(tree))
    }
    assert not touching


# --- Size and names -----------------------------------------------------------------------------


def test_modules_stay_short() -> None:
    """One noun per module; the longer ones are listed with their reason, and only they."""
    long = {
        path.relative_to(PACKAGE).as_posix()
        for path in MODULES
        if len(path.read_text(encoding="utf-8").splitlines()) > MOST_LINES
    }
    assert long == LONGER.keys()


def test_no_module_is_a_drawer_for_odds_and_ends() -> None:
    """Names of modules are nouns of the trade."""
    assert not {path.stem for path in MODULES} & {"utils", "util", "helpers", "common", "base"}


@pytest.mark.parametrize(
    "name",
    [
        "cardgen",
        "cardgen.compare",
        "cardgen.engine",
        "cardgen.fit",
        "cardgen.limits",
        "cardgen.profile",
        "cardgen.propeller",
    ],
)
def test_public_names_exist_and_are_sorted(name: str) -> None:
    """`__all__` says what others may use: every name is there, once, in order."""
    module = importlib.import_module(name)
    listed = list(module.__all__)
    assert len(set(listed)) == len(listed)
    assert listed == sorted(listed, key=_isort_order)
    for public in listed:
        assert getattr(module, public) is not None


@pytest.mark.parametrize(
    "name", ["cardgen.engine", "cardgen.fit", "cardgen.limits", "cardgen.propeller"]
)
def test_everything_a_part_gathers_is_public(name: str) -> None:
    """A part's `__init__` imports what it offers, and offers what it imports."""
    module = importlib.import_module(name)
    tree = MODULES[Path(str(module.__file__))]
    gathered = {
        alias.asname or alias.name
        for node in tree.body
        if isinstance(node, ast.ImportFrom) and node.module != "__future__"
        for alias in node.names
    }
    assert gathered == set(module.__all__)


def test_unknown_public_name_is_an_attribute_error() -> None:
    """Lazy names must not hide a misspelling."""
    with pytest.raises(AttributeError, match="no attribute 'solve_cruse'"):
        _ = cardgen.solve_cruse


def _isort_order(name: str) -> tuple[int, str]:
    """Constants, then classes, then the rest, as the linter sorts them."""
    if name.isupper():
        return 0, name
    return (1, name) if name[0].isupper() else (2, name)
