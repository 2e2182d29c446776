"""The keys of the three kinds of file: finding one by its path, and listing them all."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Annotated, Any, Literal, get_args, get_origin

from pydantic import Tag
from pydantic.fields import FieldInfo

from cardgen.profile.aircraft_file import AircraftFile
from cardgen.profile.engine_file import EngineFile
from cardgen.profile.propeller_file import PropellerFile
from cardgen.profile.section import Section
from cardgen.profile.values import Value
from cardgen.records import dataclass

Kind = Literal["aircraft", "engine", "propeller"]
FILES: dict[Kind, type[Section]] = {
    "aircraft": AircraftFile,
    "engine": EngineFile,
    "propeller": PropellerFile,
}


@dataclass(frozen=True, slots=True)
class Key:
    """One key of a file: a row of the table of keys in the README.

    `path` has `[]` after a key that holds a list; `value` says what may be written.
    """

    path: str
    value: str
    required: bool
    description: str


def sections_in(annotation: Any, *, tag: str | None = None) -> Iterator[type[Section]]:
    """Yield the sections that a key may hold, itself or in a list.

    Parameters
    ----------
    annotation : type
        Type of the key [-]
    tag : str, optional
        Shape that was written, where the key has several [-]

    Yields
    ------
    type
        Class of the section [-]
    """
    if isinstance(annotation, type) and issubclass(annotation, Section):
        yield annotation
        return
    arguments = get_args(annotation)
    if get_origin(annotation) is Annotated:
        tags = [entry.tag for entry in arguments[1:] if isinstance(entry, Tag)]
        if tag is not None and tags and tag not in tags:
            return
        arguments = arguments[:1]
    for argument in arguments:
        yield from sections_in(argument, tag=tag)


def section_at(file: type[Section], path: Sequence[str | int]) -> type[Section] | None:
    """Return the section that a validator's path leads to.

    Parameters
    ----------
    file : type
        Class of the file [-]
    path : sequence of str or int
        Keys, places in lists, and shapes in angle brackets [-]

    Returns
    -------
    type or None
        Class of the section, None where the path leads to none [-]
    """
    section: type[Section] | None = file
    annotation: Any = file
    for step in path:
        if isinstance(step, int):
            continue
        if step.startswith("<"):
            section = next(sections_in(annotation, tag=step), None)
        elif section is None or step not in section.model_fields:
            return None
        else:
            annotation = section.model_fields[step].annotation
            section = next(sections_in(annotation), None)
    return section


def _value_in(annotation: Any, metadata: Sequence[Any]) -> str:
    """Return in words what may be written for a key, "" for sections."""
    words = [entry.words for entry in metadata if isinstance(entry, Value)]
    if get_origin(annotation) is Annotated:
        inner, *rest = get_args(annotation)
        return " ".join(words) or _value_in(inner, rest)
    parts = [_value_in(argument, ()) for argument in get_args(annotation)]
    return "; or ".join(words + [part for part in dict.fromkeys(parts) if part])


_Definition = tuple[type[Any], str]


def _defined_in(section: type[Section], name: str) -> _Definition:
    """Return the section that defines a key, which may be a base of this one, and the key."""
    bases = (base for base in reversed(section.__mro__) if issubclass(base, Section))
    return next(base for base in bases if name in base.model_fields), name


def _shapes_in(annotation: Any, *, in_list: bool = False) -> Iterator[tuple[bool, Any]]:
    """Yield each section that a key may hold, and whether it is an entry of a list."""
    if isinstance(annotation, type) and issubclass(annotation, Section):
        yield in_list, annotation
    in_list = in_list or get_origin(annotation) is list
    for argument in get_args(annotation):
        yield from _shapes_in(argument, in_list=in_list)


def _holds_list(annotation: Any) -> bool:
    """Return whether a key may hold a list."""
    return get_origin(annotation) is list or any(map(_holds_list, get_args(annotation)))


def list_keys(kind: Kind) -> tuple[Key, ...]:
    """Return the keys of one kind of file, in the order of the file.

    Parameters
    ----------
    kind : {"aircraft", "engine", "propeller"}
        Kind of file [-]

    Returns
    -------
    tuple of Key
        The keys, those within a section after the section's own; sections and keys that stand in
        several places are listed at the first of them [-]
    """
    return tuple(_keys_of(FILES[kind], "", seen=set()))


def _keys_of(section: type[Section], prefix: str, *, seen: set[_Definition]) -> Iterator[Key]:
    """Yield the keys of a section and of those within it, each definition once."""
    for name, info in section.model_fields.items():
        path = f"{prefix}{name}" + ("[]" if _holds_list(info.annotation) else "")
        if (definition := _defined_in(section, name)) in seen:
            continue
        seen.add(definition)
        yield Key(path, value_words(info), info.is_required(), info.description or "")
        for in_list, inner in _shapes_in(info.annotation):
            yield from _keys_of(inner, f"{prefix}{name}" + ("[]." if in_list else "."), seen=seen)


def value_words(info: FieldInfo) -> str:
    """Return what may be written for a key.

    Parameters
    ----------
    info : FieldInfo
        The key [-]

    Returns
    -------
    str
        Its value in words [-]
    """
    words = _value_in(info.annotation, info.metadata)
    shapes = ["list" if in_list else "mapping" for in_list, _ in _shapes_in(info.annotation)]
    if shapes:
        return "; or ".join(dict.fromkeys([*shapes, *filter(None, [words])]))
    return f"list, each {words}" if _holds_list(info.annotation) else words
