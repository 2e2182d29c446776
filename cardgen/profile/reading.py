"""YAML text as a tree of nodes that know their place; every scalar stays the text it was.

The tree is built from parser events instead of `yaml.compose`: an alias keeps its own line, depth
is bounded before anything recurses, and no implicit type (`no`, `1:30`, `0123`, `1_000`) is ever
resolved. What a profile has no use for and a hostile file lives on is refused: aliases, tags,
several documents, keys that are not text, endless nesting, oversized files.
"""

from __future__ import annotations

import re
import stat
from collections.abc import Iterator, Sequence
from dataclasses import field
from pathlib import Path
from typing import Any, NamedTuple

import yaml

from cardgen.errors import Problem
from cardgen.records import dataclass

LARGEST_FILE = 1_000_000  # bytes; a complete profile is about 10 000
DEEPEST_NESTING = 12  # a complete profile needs 6
MOST_NODES = 10_000  # a complete profile has about 600
_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_KEY = re.compile(r"[^\W\d][\w -]{0,59}")  # so no key is "<<", the merge key of YAML 1.1
_NO_VALUE = frozenset({"~", "null", "Null", "NULL"})  # plain spellings of nothing in YAML 1.1
_NOT_TEXT = re.compile(  # the characters that YAML 1.1 does not print, section 5.1
    "[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]"
)


class Place(NamedTuple):
    """Line and column, counted from 1; 0 where the whole file is meant."""

    line: int
    column: int


@dataclass(slots=True)
class Node:
    """A scalar, list or mapping: its text, its nodes, or its nodes by key, and the keys' places."""

    place: Place
    content: str | list[Node] | dict[str, Node]
    keys: dict[str, Place] = field(default_factory=dict)

    def plain(self) -> object:
        """Return the tree as str, list and dict, for the models."""
        if isinstance(self.content, dict):
            return {key: node.plain() for key, node in self.content.items()}
        if isinstance(self.content, list):
            return [node.plain() for node in self.content]
        return self.content

    def text(self, key: str) -> str | None:
        """Return the text under a key of this mapping, None where there is none."""
        node = self.content.get(key) if isinstance(self.content, dict) else None
        return node.content if node is not None and isinstance(node.content, str) else None

    def place_of(self, path: tuple[str | int, ...], *, of_key: bool) -> Place:
        """Return the place of what a path leads to, as deep as the tree goes.

        Parameters
        ----------
        path : tuple of str or int
            Keys and list positions from this node on [-]
        of_key : bool
            Whether the place of the last key itself is meant, not of its value [-]

        Returns
        -------
        Place
            Line and column [-]
        """
        node, place = self, self.place
        for step in path:
            if isinstance(node.content, dict) and step in node.content:
                key = str(step)
                place = node.keys[key]
                node = node.content[key]
            elif isinstance(node.content, list) and isinstance(step, int):
                node = node.content[step]
                place = node.place
            else:
                return place
        return place if of_key else node.place


def dotted(path: Sequence[str | int]) -> str:
    """Return a path as problems show it: `ratings[2].power`.

    Parameters
    ----------
    path : sequence of str or int
        Keys and places in lists, counted from 0 [-]

    Returns
    -------
    str
        The path, places counted from 1 [-]
    """
    text = ""
    for step in path:
        text += f"[{step + 1}]" if isinstance(step, int) else f".{step}" if text else step
    return text


class Document(NamedTuple):
    """One file as read: its tree, None where there is none, and what is wrong with it."""

    root: Node | None
    problems: tuple[Problem, ...]


class _UnreadableError(Exception):
    """Carries the one problem after which a file cannot be read on."""

    def __init__(self, place: Place, found: str, expected: str = "", *, key: str = "") -> None:
        super().__init__(found)
        self.place, self.found, self.expected, self.key = place, found, expected, key

    def problem(self, shown: str) -> Problem:
        """Return the problem, of a file of that name."""
        return Problem(shown, *self.place, self.key, self.found, self.expected)


_WHOLE_FILE = Place(0, 0)


def read_document(path: Path, *, shown: str) -> Document:
    """Read one YAML file into a tree.

    Parameters
    ----------
    path : Path
        The file [-]
    shown : str
        How problems name it [-]

    Returns
    -------
    Document
        Tree and problems; a file with problems may still have a tree [-]
    """
    try:
        text = _read_text(path)
    except _UnreadableError as error:
        return Document(None, (error.problem(shown),))
    return read_tree(text, shown=shown)


def read_tree(text: str, *, shown: str) -> Document:
    """Read the text of one YAML file into a tree.

    Parameters
    ----------
    text : str
        The text [-]
    shown : str
        How problems name the file [-]

    Returns
    -------
    Document
        Tree and problems; a text with problems may still have a tree [-]
    """
    builder = _Builder(shown)
    root = None
    try:
        root = builder.build(text)
    except _UnreadableError as error:
        builder.problems.append(error.problem(shown))
    return Document(root, tuple(builder.problems))


def read_text(path: Path, *, shown: str, kind: str, largest: int = LARGEST_FILE) -> str | Problem:
    """Read the text of a file of sane size, kind and encoding.

    Parameters
    ----------
    path : Path
        The file [-]
    shown : str
        How the problem names it [-]
    kind : str
        What kind of file is expected, with its article [-]
    largest : int
        Size beyond which it is refused [bytes]

    Returns
    -------
    str or Problem
        The text, or why it cannot be read [-]
    """
    try:
        return _read_text(path, kind=kind, largest=largest)
    except _UnreadableError as error:
        return error.problem(shown)


def _read_text(path: Path, *, kind: str = "a YAML file", largest: int = LARGEST_FILE) -> str:
    """Return the text of a file of sane size, kind and encoding."""
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise _UnreadableError(_WHOLE_FILE, "is a folder", kind)
        if not stat.S_ISREG(status.st_mode):
            raise _UnreadableError(_WHOLE_FILE, "is not a regular file", kind)
        with path.open("rb") as stream:
            data = stream.read(largest + 1)
    except FileNotFoundError:
        raise _UnreadableError(
            _WHOLE_FILE, "does not exist", kind.replace("a ", "an existing ", 1)
        ) from None
    except ValueError:  # a null character in the path
        raise _UnreadableError(_WHOLE_FILE, "is not a file name") from None
    except OSError as error:
        reason = (error.strerror or "unknown error").lower()
        raise _UnreadableError(_WHOLE_FILE, f"cannot be read: {reason}") from None
    if len(data) > largest:
        raise _UnreadableError(
            _WHOLE_FILE,
            f"is larger than {largest} bytes",
            f"a file of at most {largest // 1_000_000} MB",
        )
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        place = _place_at(data[: error.start].decode("utf-8-sig"))
        raise _UnreadableError(
            place, f"byte 0x{data[error.start]:02X} is not UTF-8 text", "a file saved as UTF-8"
        ) from None


def _place_at(before: str) -> Place:
    """Return the place just after a text that begins the file."""
    return Place(before.count("\n") + 1, len(before) - before.rfind("\n"))


def _place(mark: Any) -> Place:
    """Return the place of a parser's mark, which counts from 0."""
    return Place(mark.line + 1, mark.column + 1)


class _Builder:
    """Builds the tree of one file and collects what is wrong on the way."""

    def __init__(self, shown: str) -> None:
        self.shown = shown
        self.problems: list[Problem] = []
        self.path: list[str | int] = []  # steps down to the node under construction
        self.nodes = 0

    def report(self, place: Place, key: str, found: str, expected: str = "") -> None:
        """Add a problem."""
        self.problems.append(Problem(self.shown, place.line, place.column, key, found, expected))

    def build(self, text: str) -> Node:
        """Return the tree of the only document in a text."""
        if (odd := _NOT_TEXT.search(text)) is not None:
            raise _UnreadableError(
                _place_at(text[: odd.start()]),
                f"control character U+{ord(odd[0]):04X} in the text",
                "printable text only",
            )
        loader = _LOADER(text)
        try:
            events = _events(loader)
            root = None
            for event in events:
                if isinstance(event, yaml.DocumentStartEvent):
                    if root is not None:
                        raise _UnreadableError(
                            _place(event.start_mark),
                            "a second document begins here",
                            "one document per file",
                        )
                    root = self.node(next(events), events)
        except yaml.MarkedYAMLError as error:
            raise _syntax_problem(error, text) from None
        finally:
            loader.dispose()
        if root is None or root.content == "":
            raise _UnreadableError(_WHOLE_FILE, "is empty", "a profile such as `cardgen new` makes")
        return root

    def node(self, event: Any, events: Iterator[Any], *, depth: int = 0) -> Node:
        """Return the node that an event begins."""
        place = _place(event.start_mark)
        self.nodes += 1
        if self.nodes > MOST_NODES:
            raise _UnreadableError(place, f"more than {MOST_NODES} values in one file")
        if depth > DEEPEST_NESTING:
            raise _UnreadableError(place, f"nested more than {DEEPEST_NESTING} levels deep")
        key = dotted(self.path)
        if isinstance(event, yaml.AliasEvent):
            raise _UnreadableError(
                place, f"alias *{event.anchor} is not allowed", "the value written out", key=key
            )
        if event.tag is not None:
            self.report(place, key, f"tag {event.tag} is not allowed", "the value without a tag")
        if isinstance(event, yaml.ScalarEvent):
            # A plain "null" would otherwise be printed on a card as somebody's serial number.
            nothing = event.implicit[0] and event.value in _NO_VALUE
            return Node(place, "" if nothing else event.value)
        if isinstance(event, yaml.SequenceStartEvent):
            return Node(place, self.items(events, depth=depth))
        return self.mapping(place, events, depth=depth)

    def items(self, events: Iterator[Any], *, depth: int) -> list[Node]:
        """Return the nodes of a list."""
        nodes: list[Node] = []
        while not isinstance(event := next(events), yaml.SequenceEndEvent):
            self.path.append(len(nodes))
            nodes.append(self.node(event, events, depth=depth + 1))
            self.path.pop()
        return nodes

    def mapping(self, place: Place, events: Iterator[Any], *, depth: int) -> Node:
        """Return a mapping with the places of its keys; of two equal keys the first is kept."""
        content: dict[str, Node] = {}
        node = Node(place, content)
        while not isinstance(event := next(events), yaml.MappingEndEvent):
            key_node = self.node(event, events, depth=depth + 1)
            key = key_node.content if isinstance(key_node.content, str) else ""
            if not _KEY.fullmatch(key):
                found = f"{key[:20]!r} is not a key" if key else "a key is not text"
                self.report(key_node.place, dotted(self.path), found, "a word as the key")
                key = ""
            self.path.append(key)
            value = self.node(next(events), events, depth=depth + 1)
            if key in content:
                first = node.keys[key].line
                self.report(
                    key_node.place, dotted(self.path), f"is given twice, first in line {first}"
                )
            elif key:
                content[key], node.keys[key] = value, key_node.place
            self.path.pop()
        return node


def _events(loader: Any) -> Iterator[Any]:
    """Yield the parser's events as they are read, so that a bound can stop it early."""
    while loader.check_event():
        yield loader.get_event()


def _syntax_problem(error: yaml.MarkedYAMLError, text: str) -> _UnreadableError:
    """Return a parser's complaint as a problem with its place."""
    mark = error.problem_mark or error.context_mark
    if mark is None:
        return _UnreadableError(_WHOLE_FILE, "is not YAML")
    place = _place(mark)
    line = text.splitlines()[mark.line] if mark.line < len(text.splitlines()) else ""
    if "\t" in line[: len(line) - len(line.lstrip())]:
        column = line.index("\t") + 1
        return _UnreadableError(
            Place(place.line, column), "the line is indented with a tab", "spaces"
        )
    reason = " ".join(part for part in (error.context, error.problem) if part)
    return _UnreadableError(place, f"is not YAML: {reason}", "YAML as `cardgen new` writes it")
