"""Placed things: what layout makes and drawing takes, in points from the lower left corner."""

from __future__ import annotations

import math
from dataclasses import replace

from cardgen.records import dataclass
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


@dataclass(frozen=True, slots=True)
class Trace:
    """A black line through points; `dash` is lengths on and off, empty for a solid line."""

    points: tuple[tuple[float, float], ...]
    thickness: float
    dash: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Ground:
    """Polygons filled together with rising diagonal lines."""

    pieces: tuple[tuple[tuple[float, float], ...], ...]
    spacing: float
    thickness: float


Box = Run | Rule | Tint | Frame | Hatch | Trace | Ground


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
    if isinstance(box, Trace):
        return replace(box, points=_shifted(box.points, dx, dy))
    if isinstance(box, Ground):
        return replace(box, pieces=tuple(_shifted(piece, dx, dy) for piece in box.pieces))
    if isinstance(box, Rule):
        return replace(box, x=box.x + dx, y=box.y + dy, to_x=box.to_x + dx, to_y=box.to_y + dy)
    return replace(box, x=box.x + dx, y=box.y + dy)


def _shifted(
    points: tuple[tuple[float, float], ...], dx: float, dy: float
) -> tuple[tuple[float, float], ...]:
    return tuple((x + dx, y + dy) for x, y in points)


def hatching(box: Ground) -> tuple[tuple[float, float, float, float], ...]:
    """Return the diagonal lines that fill a ground, not yet clipped to it.

    Parameters
    ----------
    box : Ground
        What is filled [-]

    Returns
    -------
    tuple of (float, float, float, float)
        Both ends of each line [pt]
    """
    xs = [x for piece in box.pieces for x, _ in piece]
    ys = [y for piece in box.pieces for _, y in piece]
    left, right, low, high = min(xs), max(xs), min(ys), max(ys)
    step = box.spacing * 2.0**0.5
    # Lines lie on multiples of the step, so that neighbouring grounds are hatched as one.
    first, last = math.floor((left - high) / step), math.ceil((right - low) / step)
    return tuple((k * step + low, low, k * step + high, high) for k in range(first, last + 1))
