"""Docstrings of the physics: arguments as in the signature, a unit at the end of every entry."""

from __future__ import annotations

import importlib
import inspect
import re
from collections.abc import Callable, Iterator
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

import cardgen

PACKAGE = Path(cardgen.__file__).parent

# Commands and pages have options and boxes, not physical quantities.
OTHER_LAYERS = {"cli", "render"}

UNIT_AT_END = re.compile(r"\[[^\[\]]+\]$")
SECTION = re.compile(r"^(?P<name>[A-Z][A-Za-z ]+)\n-{3,}$", re.MULTILINE)


def _module_names() -> list[str]:
    """Return the dotted names of the physics modules, found without importing them."""
    names = []
    for path in sorted(PACKAGE.rglob("*.py")):
        parts = path.relative_to(PACKAGE).with_suffix("").parts
        if parts[0] not in OTHER_LAYERS:
            kept = parts[:-1] if parts[-1] == "__init__" else parts
            names.append(".".join(("cardgen", *kept)))
    return names


def _public_functions(module: ModuleType) -> Iterator[tuple[str, Callable[..., Any]]]:
    """Yield the public functions that a module defines itself."""
    for name, thing in vars(module).items():
        function = inspect.unwrap(thing) if callable(thing) else thing
        if (
            not name.startswith("_")
            and inspect.isfunction(function)
            and function.__module__ == module.__name__
        ):
            yield name, function


def _sections(docstring: str) -> dict[str, str]:
    """Return the body of each section of a numpydoc docstring."""
    headings = list(SECTION.finditer(docstring))
    starts = [heading.start() for heading in headings] + [len(docstring)]
    return {
        heading["name"]: docstring[heading.end() : end].strip("\n")
        for heading, end in zip(headings, starts[1:], strict=True)
    }


def _entries(body: str) -> list[tuple[str, str]]:
    """Return heading and description of each entry of a section."""
    entries: list[tuple[str, list[str]]] = []
    for line in body.splitlines():
        if line and not line.startswith(" "):
            entries.append((line, []))
        elif line.strip() and entries:
            entries[-1][1].append(line.strip())
    return [(heading, " ".join(lines)) for heading, lines in entries]


def _defects(name: str, function: Callable[..., Any]) -> list[str]:
    """Return what is wrong with the docstring of one function."""
    docstring = inspect.getdoc(function)
    if not docstring:
        return [f"{name}: no docstring"]
    defects = []
    signature = inspect.signature(function)
    sections = _sections(docstring)

    parameters = _entries(sections.get("Parameters", ""))
    documented = [
        argument.strip().lstrip("*")
        for heading, _ in parameters
        for argument in heading.partition(" : ")[0].split(",")
    ]
    if documented != list(signature.parameters):
        defects.append(f"{name}: documents {documented}, takes {list(signature.parameters)}")

    returns = _entries(sections.get("Returns", "") or sections.get("Yields", ""))
    if not returns and signature.return_annotation not in {None, "None", "NoReturn"}:
        defects.append(f"{name}: returns something that has no Returns section")

    for heading, description in (*parameters, *returns):
        if not UNIT_AT_END.search(description):
            defects.append(f"{name}: {heading!r} does not end in a [unit]: {description!r}")
    return defects


@pytest.mark.parametrize("module_name", _module_names())
def test_every_public_function_states_its_arguments_and_units(module_name: str) -> None:
    """A number without a unit is how wrong numbers start; each entry ends in [unit] or [-]."""
    module = importlib.import_module(module_name)
    defects = [d for name, f in _public_functions(module) for d in _defects(name, f)]
    assert not defects, "\n".join([module_name, *defects])


def test_physics_modules_are_found() -> None:
    """The test above must not pass because it looked at nothing."""
    assert {"cardgen.atmosphere", "cardgen.airspeed", "cardgen.units"} <= set(_module_names())
    atmosphere = importlib.import_module("cardgen.atmosphere")
    assert "standard_pressure" in dict(_public_functions(atmosphere))


def _without_unit(speed: float) -> float:
    """Return twice the speed.

    Parameters
    ----------
    speed : float
        Speed [m/s]

    Returns
    -------
    float
        Twice that
    """
    return 2.0 * speed


def _renamed(velocity: float) -> float:
    """Return twice the speed.

    Parameters
    ----------
    speed : float
        Speed [m/s]

    Returns
    -------
    float
        Twice that [m/s]
    """
    return 2.0 * velocity


def _silent(speed: float) -> float:
    """Return twice the speed."""
    return 2.0 * speed


@pytest.mark.parametrize(
    ("function", "words"),
    [
        (_without_unit, "does not end in a [unit]"),
        (_renamed, "documents ['speed'], takes ['velocity']"),
        (_silent, "no Returns section"),
    ],
)
def test_defective_docstring_is_noticed(function: Callable[..., Any], words: str) -> None:
    """The check itself is checked on docstrings with one fault each."""
    assert any(words in defect for defect in _defects(function.__name__, function))
