"""Damage done to files: to their text, to the structure of YAML, and to tables of numbers."""

from __future__ import annotations

import random
import re
from collections.abc import Iterator
from copy import deepcopy
from dataclasses import dataclass
from typing import Any

import yaml

Tree = dict[str, Any] | list[Any] | str

# Pieces that mean something to YAML, to CSV, to JSON, to a unit reader or to a file system.
PIECES = (
    "", ":", ": ", "-", "- ", "{", "}", "[", "]", "&a", "*a", "!x", "|", ">", "%", "@", "`", '"',
    "'", "\n", "\n\n", "\t", "  ", "#", "---\n", "...\n", "?", "<<: ", "~", "null", "nan", "inf",
    "-inf", "-1", "0", "1e999", "-0.0", "1e-320", "0 rpm", "none: x", "not measured", "9 inHg",
    "2400 rpm", "75 %", "../x", "é", "\u202e", "𝄞", "\x85", "\x00", "\ufeff", "，", "２４００", ",",
    ",,", '""', '"a', "\r", "\r\n", "1_000", "0x10", "1,5", "+5", "=1+1", "/etc/passwd", "yes",
)  # fmt: skip

# Numbers that no quantity may be, and spellings that are no number with its unit.
NEVER_A_QUANTITY = (
    "nan {unit}", "inf {unit}", "-inf {unit}", "1e999 {unit}", "{number}", "{unit}",
    "{number} {unit} {unit}", "{number} furlong", "twelve {unit}", "1e400", "{number}{number}",
    "0x10 {unit}", "1_000 {unit}", "-1e12 {unit}", "1e12 {unit}", "{{}}", "[]",
)  # fmt: skip

_LOADER = getattr(yaml, "CBaseLoader", yaml.BaseLoader)
_DUMPER = getattr(yaml, "CSafeDumper", yaml.SafeDumper)
_QUANTITY = re.compile(r"([+-]?[0-9]+(?:\.[0-9]+)?)\s*([^\s0-9.].*)")
_NUMBER = re.compile(r"[+-]?[0-9]+(?:\.[0-9]+)?")


def damaged_text(rng: random.Random, text: str) -> str:
    """Return a text with a few spans lost, doubled, moved, exchanged or replaced.

    Parameters
    ----------
    rng : random.Random
        Source of chance [-]
    text : str
        Sound text [-]

    Returns
    -------
    str
        Perhaps still sound [-]
    """
    for _ in range(rng.choice((1, 1, 1, 2, 3, 6))):
        text = rng.choice((_span, _span, _line, _exchange, _cut, _digit))(rng, text)
    return text


def _span(rng: random.Random, text: str) -> str:
    """Replace a short span by pieces."""
    start = rng.randrange(len(text) + 1)
    piece = "".join(rng.choice(PIECES) for _ in range(rng.choice((0, 1, 1, 2, 4))))
    return text[:start] + piece + text[start + rng.choice((0, 0, 1, 3, 12, 60)) :]


def _line(rng: random.Random, text: str) -> str:
    """Drop, double or indent a line."""
    lines = text.splitlines(keepends=True) or [""]
    place = rng.randrange(len(lines))
    lines[place] = rng.choice(("", lines[place] * 2, "  " + lines[place], lines[place].lstrip()))
    return "".join(lines)


def _exchange(rng: random.Random, text: str) -> str:
    """Exchange two lines."""
    lines = text.splitlines(keepends=True) or [""]
    one, other = rng.randrange(len(lines)), rng.randrange(len(lines))
    lines[one], lines[other] = lines[other], lines[one]
    return "".join(lines)


def _cut(rng: random.Random, text: str) -> str:
    """Break the text off, as an interrupted copy does."""
    return text[: rng.randrange(len(text) + 1)] if rng.random() < 0.3 else text


def _digit(rng: random.Random, text: str) -> str:
    """Exchange one digit for another: the file stays sound, the number is another."""
    places = [place for place, letter in enumerate(text) if letter.isdigit()]
    if not places:
        return text
    place = rng.choice(places)
    return text[:place] + rng.choice("0123456789") + text[place + 1 :]


@dataclass(frozen=True, slots=True)
class Damaged:
    """A tree after damage; `bad` says that nothing may be computed from it."""

    tree: Tree
    bad: bool
    what: str


def parsed(text: str) -> Tree:
    """Return YAML as mappings, lists and the texts of its scalars.

    Parameters
    ----------
    text : str
        YAML [-]

    Returns
    -------
    dict, list or str
        The tree [-]
    """
    tree: Tree = yaml.load(text, _LOADER)
    return tree


def written(tree: Tree) -> str:
    """Return a tree as YAML.

    Parameters
    ----------
    tree : dict, list or str
        The tree [-]

    Returns
    -------
    str
        YAML, keys in their order [-]
    """
    text: str = yaml.dump(tree, Dumper=_DUMPER, sort_keys=False, allow_unicode=True)
    return text


def _places(tree: Tree, path: tuple[str | int, ...] = ()) -> Iterator[tuple[str | int, ...]]:
    """Yield the path of every node below the root."""
    children = (
        tree.items()
        if isinstance(tree, dict)
        else enumerate(tree)
        if isinstance(tree, list)
        else ()
    )
    for step, child in children:
        yield (*path, step)
        yield from _places(child, (*path, step))


def _at(tree: Any, path: tuple[str | int, ...]) -> Any:
    for step in path:
        tree = tree[step]
    return tree


def damaged_tree(rng: random.Random, tree: Tree) -> Damaged:
    """Damage one node of a tree, which is changed in place.

    Parameters
    ----------
    rng : random.Random
        Source of chance [-]
    tree : dict, list or str
        A sound tree of its own [-]

    Returns
    -------
    Damaged
        The tree, and whether it is certain to be bad [-]
    """
    places = list(_places(tree))
    path = rng.choice(places)
    parent, step, node = _at(tree, path[:-1]), path[-1], _at(tree, path)
    quantity = _QUANTITY.fullmatch(node) if isinstance(node, str) else None
    number = _NUMBER.fullmatch(node) if isinstance(node, str) else None
    where = ".".join(map(str, path))
    if quantity and rng.random() < 0.35:
        pattern = rng.choice(NEVER_A_QUANTITY)
        parent[step] = pattern.format(number=quantity[1], unit=quantity[2])
        # A date or a figure's number looks like a quantity to us; only keyed units are certain.
        return Damaged(tree, _is_unit(quantity[2]), f"{where} = {parent[step]!r}")
    if (quantity or number) and rng.random() < 0.7:
        # Another number of the same unit, often still plausible: what is computed must hold.
        old = float(quantity[1] if quantity else node)
        new = old * rng.choice((0.0, -1.0, 0.5, 0.9, 1.1, 2.0, 10.0, rng.uniform(0.3, 3.0)))
        parent[step] = f"{new:.6g} {quantity[2]}" if quantity else f"{new:.6g}"
        return Damaged(tree, False, f"{where} = {parent[step]!r}")
    kind = rng.randrange(7)
    if kind == 0:
        del parent[step]
    elif kind == 1 and isinstance(parent, dict):
        parent[f"{step}x"] = parent.pop(step)
        return Damaged(tree, True, f"{where} renamed")
    elif kind == 2 and isinstance(parent, list):
        parent.insert(step, node)
    elif kind == 3:
        parent[step] = deepcopy(_at(tree, rng.choice(places))) if rng.random() < 0.5 else []
    elif kind == 4:
        parent[step] = rng.choice(PIECES)
    elif kind == 5:
        parent[step] = {"value": node}
        return Damaged(tree, True, f"{where} wrapped")
    else:
        parent[step] = [node]
    return Damaged(tree, False, f"{where} damaged, kind {kind}")


def jittered(rng: random.Random, tree: Tree) -> Tree:
    """Change one quantity of a tree by at most a third, in place.

    Parameters
    ----------
    rng : random.Random
        Source of chance [-]
    tree : dict, list or str
        A tree of its own [-]

    Returns
    -------
    dict, list or str
        The same tree [-]
    """
    quantities = [
        path
        for path in _places(tree)
        if isinstance(node := _at(tree, path), str)
        and (found := _QUANTITY.fullmatch(node))
        and _is_unit(found[2])
    ]
    path = rng.choice(quantities)
    found = _QUANTITY.fullmatch(_at(tree, path))
    if found is not None:
        number = float(found[1]) * rng.choice((rng.uniform(0.67, 1.33), rng.uniform(0.95, 1.05)))
        _at(tree, path[:-1])[path[-1]] = f"{number:.5g} {found[2]}"
    return tree


# The units that the demonstration aircraft is written in.
_UNITS = frozenset(
    {"rpm", "inHg", "ft", "ft2", "in", "in2", "in3", "kt", "hp", "lb", "degC", "degF", "deg"}
    | {"gal", "%", "lb/gal", "min"}
)


def _is_unit(text: str) -> bool:
    return text in _UNITS


def damaged_table(rng: random.Random, text: str) -> Damaged:
    """Damage one cell of a comma-separated file.

    Parameters
    ----------
    rng : random.Random
        Source of chance [-]
    text : str
        A header and rows of plain cells [-]

    Returns
    -------
    Damaged
        Its text, and whether it is certain to be bad [-]
    """
    rows = [line.split(",") for line in text.splitlines() if line and not line.startswith("#")]
    place, column = rng.randrange(1, len(rows)), rng.randrange(len(rows[0]))
    cell = rows[place][column]
    number = _NUMBER.fullmatch(cell) is not None
    kind = rng.randrange(6)
    bad = False
    if kind == 0 and number:
        rows[place][column] = rng.choice(
            ("nan", "inf", "-inf", "1e999", "x", "1_000", "2 4", "--5")
        )
        bad = True
    elif kind == 1:
        rows[place][column] = ""
    elif kind == 2:
        rows[0][column] += rng.choice(("x", "_", "_ft", " "))
    elif kind == 3 and number:
        rows[place][column] = f"{float(cell) * rng.choice((-1.0, 0.0, 0.5, 1.5, 100.0, 1e9)):.6g}"
    elif kind == 4:
        rows[place].append("1")
    else:
        rows[place][column] = rng.choice(PIECES).replace("\n", " ")
    what = f"row {place}, column {rows[0][column]}: {rows[place][column]!r}, kind {kind}"
    return Damaged("\n".join(map(",".join, rows)) + "\n", bad, what)
