"""What all sections of a profile share: strictness, sources, and keys of more than one shape."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Annotated, Any

from pydantic import BaseModel, ConfigDict, Discriminator, Field

from cardgen.limits.kinds import Source
from cardgen.profile.values import Words, wrong


class Section(BaseModel):
    """A mapping of known keys and no others."""

    model_config = ConfigDict(extra="forbid", defer_build=True)


class SourceSection(Section):
    """Where something is written down."""

    document: Words = Field(description="Title of the document")
    section: Words | None = Field(None, description="Section, page or figure")
    revision: Words | None = Field(None, description="Revision, or date of issue")

    def source(self) -> Source:
        """Return the citation."""
        return Source(self.document, self.section or "", self.revision or "")


WRONG_SHAPE = "wrong_shape"
"""Type of the error that `by_shape` makes, whose message says what was expected."""


def by_shape(**words: str) -> Discriminator:
    """Return the rule that tells the shapes of a key apart before either is read.

    Parameters
    ----------
    **words : str
        By shape, one of `text`, `list` and `mapping`: what is expected in that shape [-]

    Returns
    -------
    Discriminator
        Chooses the tag `<text>`, `<list>` or `<mapping>`, which are no keys [-]
    """
    shapes = {"text": str, "list": list, "mapping": dict}

    def shape(value: Any) -> str | None:
        return next((f"<{name}>" for name in words if isinstance(value, shapes[name])), None)

    return Discriminator(
        shape, custom_error_type=WRONG_SHAPE, custom_error_message=" or ".join(words.values())
    )


def require_one(section: Section, keys: Sequence[str]) -> None:
    """Refuse a section that does not state exactly one of some keys.

    Parameters
    ----------
    section : Section
        The section, read [-]
    keys : sequence of str
        The keys that exclude each other [-]
    """
    stated = [key for key in keys if getattr(section, key) is not None]
    if not stated:
        raise wrong(f"none of {', '.join(keys)} is given", "exactly one of them")
    if len(stated) > 1:
        raise wrong(
            f"{' and '.join(stated)} exclude each other",
            "exactly one of " + ", ".join(keys),
            at=(stated[1],),
        )


def require_increasing(values: Sequence[float], *, at: Sequence[str | int], leaf: str) -> None:
    """Refuse points that do not increase.

    Parameters
    ----------
    values : sequence of float
        What must increase, point by point [-]
    at : sequence of str or int
        Path of the list of points within the section [-]
    leaf : str
        Key of the value within a point, "" where the point is the value [-]
    """
    for index in range(1, len(values)):
        if values[index] <= values[index - 1]:
            path = (*at, index, leaf) if leaf else (*at, index)
            raise wrong("does not exceed the one before it", "values that increase", at=path)


def require_order(section: Section, low: str, high: str) -> None:
    """Refuse a range whose stated ends are reversed or equal.

    Parameters
    ----------
    section : Section
        The section, read [-]
    low, high : str
        The keys of the two ends [-]
    """
    least, greatest = getattr(section, low), getattr(section, high)
    if least is not None and greatest is not None and least >= greatest:
        raise wrong(f"{high} is not above {low}", f"{low} below {high}", at=(high,))


Sourced = Annotated[SourceSection, Field(description="Document, section and revision")]
