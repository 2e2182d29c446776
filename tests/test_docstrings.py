"""Docstrings of the physics: arguments as in the signature, a unit at the end of every entry."""

from __future__ import annotations

import importlib
import inspect
import re
from collections.abc import Callable, Iterator
from dataclasses import is_dataclass
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

import cardgen

PACKAGE = Path(cardgen.__file__).parent

# The physics, where every argument is a quantity and every entry ends in its unit.
PHYSICS = {
    "units",
    "constants",
    "atmosphere",
    "airspeed",
    "curves",
    "roots",
    "engine",
    "propeller",
    "airframe",
    "aircraft",
    "cruise",
    "fit",
    "tables",
}
# Elsewhere arguments are limits, profiles, pages or options: their names must be right where they
# are stated.
OTHER = {"limits", "profile", "compare", "render", "cli"}

UNIT_AT_END = re.compile(r"\[[^\[\]]+\]$")
SECTION = re.compile(r"^(?P<name>[A-Z][A-Za-z ]+)\n-{3,}$", re.MULTILINE)


def _module_names(parts: set[str]) -> list[str]:
    """Return the dotted names of the modules of some parts, found without importing them."""
    names = []
    for path in sorted(PACKAGE.rglob("*.py")):
        inside = path.relative_to(PACKAGE).with_suffix("").parts
        if inside[0] in parts:
            kept = inside[:-1] if inside[-1] == "__init__" else inside
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


def _misnamed(name: str, function: Callable[..., Any], body: str) -> list[str]:
    """Return what is wrong with the names in a Parameters section."""
    documented = [
        argument.strip().lstrip("*")
        for heading, _ in _entries(body)
        for argument in heading.partition(" : ")[0].split(",")
    ]
    takes = list(inspect.signature(function).parameters)
    return [] if documented == takes else [f"{name}: documents {documented}, takes {takes}"]


def _defects(name: str, function: Callable[..., Any]) -> list[str]:
    """Return what is wrong with the docstring of one function of the physics."""
    docstring = inspect.getdoc(function)
    if not docstring:
        return [f"{name}: no docstring"]
    signature = inspect.signature(function)
    sections = _sections(docstring)
    defects = _misnamed(name, function, sections.get("Parameters", ""))

    parameters = _entries(sections.get("Parameters", ""))
    returns = _entries(sections.get("Returns", "") or sections.get("Yields", ""))
    if not returns and signature.return_annotation not in {None, "None", "NoReturn"}:
        defects.append(f"{name}: returns something that has no Returns section")

    for heading, description in (*parameters, *returns):
        if not UNIT_AT_END.search(description):
            defects.append(f"{name}: {heading!r} does not end in a [unit]: {description!r}")
    return defects


@pytest.mark.parametrize("module_name", _module_names(PHYSICS))
def test_every_public_function_states_its_arguments_and_units(module_name: str) -> None:
    """A number without a unit is how wrong numbers start; each entry ends in [unit] or [-]."""
    module = importlib.import_module(module_name)
    defects = [d for name, f in _public_functions(module) for d in _defects(name, f)]
    assert not defects, "\n".join([module_name, *defects])


@pytest.mark.parametrize("module_name", _module_names(PHYSICS))
def test_every_field_of_a_public_dataclass_is_stated(module_name: str) -> None:
    """What holds numbers says what they are: where fields are listed, all are, each in its unit."""
    defects = []
    for name, thing in vars(importlib.import_module(module_name)).items():
        if name.startswith("_") or not is_dataclass(thing) or thing.__module__ != module_name:
            continue
        body = _sections(inspect.getdoc(thing) or "").get("Parameters")
        if body is None:
            continue
        defects += _misnamed(name, thing, body)
        defects += [
            f"{name}: {heading!r} does not end in a [unit]: {description!r}"
            for heading, description in _entries(body)
            if not UNIT_AT_END.search(description)
        ]
    assert not defects, "\n".join([module_name, *defects])


@pytest.mark.parametrize("module_name", _module_names(OTHER))
def test_names_in_docstrings_are_those_of_the_signature(module_name: str) -> None:
    """Outside the physics a Parameters section may be left out, but not be wrong."""
    defects = []
    for name, function in _public_functions(importlib.import_module(module_name)):
        docstring = inspect.getdoc(function)
        if not docstring:
            defects.append(f"{name}: no docstring")
            continue
        body = _sections(docstring).get("Parameters")
        if body is not None:
            defects += _misnamed(name, function, body)
    assert not defects, "\n".join([module_name, *defects])


def test_every_module_is_looked_at() -> None:
    """The tests above must not pass because they looked at nothing, or missed a new module."""
    assert {"cardgen.atmosphere", "cardgen.cruise", "cardgen.units"} <= set(_module_names(PHYSICS))
    atmosphere = importlib.import_module("cardgen.atmosphere")
    assert "standard_pressure" in dict(_public_functions(atmosphere))
    parts = {path.stem for path in PACKAGE.iterdir() if path.name[0] not in "_."}
    assert parts - {"py", "errors", "records"} == PHYSICS | OTHER


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
