"""Placed things: what layout makes and drawing takes, in points from the lower left corner."""

from __future__ import annotations

from dataclasses import dataclass, replace

from cardgen.render.fonts import Face, width


@dataclass(frozen=True, slots=True)
class Run:
    """One text, its baseline starting at (x, y)."""

    x: float
    y: float
    text: str
    face: Face
    size: float

    @property
    def right(self) -> float:
        """Where the text ends [pt]."""
        return self.x + width(self.text, self.face, self.size)


@dataclass(frozen=True, slots=True)
class Rule:
    """A straight black line of a given thickness."""

    x: float
    y: float
    to_x: float
    to_y: float
    thickness: float


@dataclass(frozen=True, slots=True)
class Tint:
    """A filled rectangle, 0 black to 1 white; drawn in the order placed."""

    x: float
    y: float
    width: float
    height: float
    grey: float


@dataclass(frozen=True, slots=True)
class Frame:
    """The outline of a rectangle."""

    x: float
    y: float
    width: float
    height: float
    thickness: float


@dataclass(frozen=True, slots=True)
class Hatch:
    """A rectangle filled with rising diagonal lines and outlined."""

    x: float
    y: float
    width: float
    height: float
    spacing: float
    thickness: float


Box = Run | Rule | Tint | Frame | Hatch


@dataclass(frozen=True, slots=True)
class Page:
    """A sheet with everything on it, in drawing order."""

    width: float
    height: float
    boxes: tuple[Box, ...]

    @property
    def runs(self) -> tuple[Run, ...]:
        """The texts in drawing order, which is reading order."""
        return tuple(box for box in self.boxes if isinstance(box, Run))


def moved(box: Box, *, dx: float, dy: float) -> Box:
    """Return the box moved.

    Parameters
    ----------
    box : Box
        What to move [-]
    dx, dy : float
        Rightwards and upwards [pt]

    Returns
    -------
    Box
        A copy in its new place [-]
    """
    if isinstance(box, Rule):
        return replace(box, x=box.x + dx, y=box.y + dy, to_x=box.to_x + dx, to_y=box.to_y + dy)
    return replace(box, x=box.x + dx, y=box.y + dy)
