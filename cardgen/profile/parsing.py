"""One file of a profile: its tree held against its model, every complaint put into its place."""

from __future__ import annotations

import difflib
from collections.abc import Mapping, Sequence
from dataclasses import field
from pathlib import Path
from typing import Any, Generic, Literal, TypeVar

from pydantic import ValidationError

from cardgen.errors import Problem
from cardgen.profile.keys import FILES, Kind, section_at, value_words
from cardgen.profile.reading import Node, dotted, read_document
from cardgen.profile.section import Section
from cardgen.profile.values import shown as shown_value
from cardgen.records import dataclass

MOST_PROBLEMS = 50
"""Problems reported per file; whoever has more is better served by the first of them."""

FileT = TypeVar("FileT", bound=Section)


@dataclass(slots=True)
class ProfileFile(Generic[FileT]):
    """One file as far as it could be read.

    `content` is the model's reading of the file, with the keys that are wrong left out; it is whole
    if there are no `problems`, and None where nothing could be read. `other_kind` is set, and
    nothing else looked at, where the file says that it is one of another kind.
    """

    shown: str
    root: Node | None = None
    content: FileT | None = None
    problems: list[Problem] = field(default_factory=list)
    other_kind: str | None = None

    def get(self, key: str) -> Any:
        """Return a top-level value, None where it is wrong or missing."""
        return getattr(self.content, key, None)

    def report(
        self,
        path: Sequence[str | int],
        found: str,
        expected: str = "",
        *,
        of_key: bool = False,
    ) -> None:
        """Add a problem at a path within the file."""
        steps = tuple(path)
        line, column = self.root.place_of(steps, of_key=of_key) if self.root else (0, 0)
        problem = Problem(self.shown, line, column, dotted(steps), found, expected)
        if problem not in self.problems:
            self.problems.append(problem)


def parse_file(
    path: Path, model: type[FileT], *, kind: Kind | Literal["fit"], shown: str
) -> ProfileFile[FileT]:
    """Read one file and hold it against the model of its kind.

    Parameters
    ----------
    path : Path
        The file [-]
    model : type
        The model, `FILES[kind]` [-]
    kind : {"aircraft", "engine", "propeller", "fit"}
        Kind of file expected [-]
    shown : str
        How problems name the file [-]

    Returns
    -------
    ProfileFile
        What could be read, and what is wrong [-]
    """
    document = read_document(path, shown=shown)
    file: ProfileFile[FileT] = ProfileFile(shown, document.root, None, list(document.problems))
    if document.root is None:
        return file
    stated = document.root.text("kind")
    if stated in FILES and stated != kind:
        file.other_kind = stated
        return file
    plain = document.root.plain()
    try:
        file.content = model.model_validate(plain)
    except ValidationError as error:
        broken = _report_all(file, model, error)
        file.content = _without(model, plain, broken)
    if len(file.problems) > MOST_PROBLEMS:
        more = len(file.problems) - MOST_PROBLEMS
        file.problems[MOST_PROBLEMS:] = [Problem(shown, 0, 0, "", f"has {more} more problems")]
    return file


def _without(model: type[FileT], plain: object, broken: set[str]) -> FileT | None:
    """Return a file's content without its broken top-level keys, for the checks between keys."""
    if not isinstance(plain, dict):
        return None
    content = model.model_construct()
    for key, value in plain.items():
        if key in model.model_fields and key not in broken:
            model.__pydantic_validator__.validate_assignment(content, key, value)
    return content


def _report_all(file: ProfileFile[FileT], model: type[FileT], error: ValidationError) -> set[str]:
    """Report everything a validator found; return the top-level keys that are broken."""
    broken: set[str] = set()
    for fault in error.errors(include_url=False):
        raw: tuple[str | int, ...] = fault["loc"]
        path = tuple(step for step in raw if not str(step).startswith("<"))
        broken.update(str(step) for step in path[:1])
        context: Mapping[str, Any] = fault.get("ctx", {})
        match fault["type"]:
            case "extra_forbidden":
                _report_unknown_key(file, path, section_at(model, raw[:-1]))
            case "missing":
                _report_missing_key(file, path, section_at(model, raw[:-1]))
            case "too_long" | "too_short":
                bound = (
                    f"at most {context['max_length']}"
                    if fault["type"] == "too_long"
                    else f"at least {context['min_length']}"
                )
                file.report(path, f"the list has {context['actual_length']} entries", bound)
            case "list_type":
                file.report(path, _stands_here(fault["input"]), "a list")
            case "model_type" | "model_attributes_type" | "dict_type":
                section = section_at(model, raw)
                keys = ", ".join(section.model_fields) if section else "known here"
                file.report(path, _stands_here(fault["input"]), f"a mapping with keys among {keys}")
            case "cardgen":
                file.report(
                    (*path, *context.get("at", ())),
                    context["found"],
                    context["expected"],
                )
            case "wrong_shape":
                file.report(path, _stands_here(fault["input"]), fault["msg"])
            case _:
                file.report(path, fault["msg"])
    return broken


def _report_missing_key(
    file: ProfileFile[FileT], path: tuple[str | int, ...], section: type[Section] | None
) -> None:
    """Report a required key that is not there, with what it is for."""
    info = section.model_fields.get(str(path[-1])) if section else None
    meaning = f" ({info.description})" if info else ""
    file.report(path, f"is missing{meaning}", value_words(info) if info else "")


def _stands_here(value: object) -> str:
    """Return the complaint about a value of the wrong shape."""
    return "has no value" if value == "" else f"{shown_value(value)} stands here"


def _report_unknown_key(
    file: ProfileFile[FileT], path: tuple[str | int, ...], section: type[Section] | None
) -> None:
    """Report a key that the section does not have, with the nearest one that it has."""
    known = list(section.model_fields) if section else []
    near = difflib.get_close_matches(str(path[-1])[:60], known, n=1, cutoff=0.6)
    found = "unknown key" + (f" (did you mean {near[0]}?)" if near else "")
    file.report(path, found, "one of " + ", ".join(known), of_key=True)
