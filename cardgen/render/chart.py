"""A chart on the page: axes, lines with their words on them, forbidden ground."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise
from typing import Final

from cardgen.records import dataclass
from cardgen.render.boxes import Box, Frame, Ground, Rule, Run, Tint, Trace
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.fonts import CAP_HEIGHT, Face, printable, width, wrap
from cardgen.render.listing import TITLE
from cardgen.render.wording import number
from cardgen.tables.back import Area, Axis, Chart, Curve, Panel
from cardgen.tables.card import Card

NAME_SIZE: Final = 11.0
LEAST_PANEL: Final = 84.0  # height of the field of a panel [pt]
GREATEST_PANEL: Final = 230.0
LEAST_FIELD: Final = 120.0  # width of the field of a panel [pt]
BETWEEN: Final = 10.0
HATCH_SPACING: Final = 4.0
HATCH: Final = 0.6
_UNDER_NAME: Final = 2.0  # a line gap from the name to the highest figure [pt]
_HALO: Final = 1.5  # white round a word on a line [pt]
_WEIGHTS: Final = {"setting": 1.0, "ceiling": 2.2, "ray": 0.5}
_SPEED_WEIGHT: Final = 1.8  # of what a setting gives, where thin rays are drawn as well


@dataclass(frozen=True, slots=True)
class ChartPart:
    """Some panels of a chart, so many side by side."""

    chart: Chart
    panels: tuple[int, ...]
    across: int
    field: float  # height of each field [pt]


@dataclass(frozen=True, slots=True)
class _Field:
    """Where a panel's field lies, and from numbers to points."""

    x: float
    y: float
    width: float
    height: float
    across: Axis
    up: Axis

    def at(self, point: tuple[float, float]) -> tuple[float, float]:
        """Return a point of the chart on the page."""
        x = (point[0] - self.across.low) / (self.across.high - self.across.low)
        y = (point[1] - self.up.low) / (self.up.high - self.up.low)
        return self.x + x * self.width, self.y + y * self.height


def side_by_side(chart: Chart, measure: float) -> int:
    """Return how many panels stand beside each other: one, or two where there are many."""
    room = (measure - BETWEEN) / 2.0 - _left(chart)
    return 2 if len(chart.panels) > 2 and room >= LEAST_FIELD else 1


def _left(chart: Chart) -> float:
    """Return the room for the figures of the ordinate [pt]."""
    return 4.0 + max(width(number(tick), "regular", NOTE) for tick in chart.up.ticks)


def chart_lines(
    chart: Chart, measure: float, continued: str
) -> tuple[tuple[str, Face, float], ...]:
    """Return title, explanation and where the chart goes on, broken into lines."""
    lines: list[tuple[str, Face, float]] = [
        (line, "bold", TITLE) for line in wrap(chart.title, "bold", size=TITLE, measure=measure)
    ]
    for text, face in ((chart.lead, "regular"), (continued, "bold")):
        if text:
            lines += [
                (line, "bold" if face == "bold" else "regular", NOTE)
                for line in wrap(
                    text, "regular" if face == "regular" else "bold", size=NOTE, measure=measure
                )
            ]
    return tuple(lines)


def _name_lines(chart: Chart, panel: Panel, room: float) -> tuple[str, ...]:
    """Return the name of a panel, broken so that the label of its ordinate stands beside it."""
    label = width(chart.up.label, "regular", NOTE) + 8.0
    return wrap(panel.name, "bold", size=NAME_SIZE, measure=room - label)


def _room(measure: float, across: int) -> float:
    return (measure - BETWEEN * (across - 1)) / across


def panel_height(part: ChartPart, measure: float) -> float:
    """Return the height of a panel with its name and the figures of its abscissa [pt]."""
    room = _room(measure, part.across)
    lines = max(len(_name_lines(part.chart, panel, room)) for panel in part.chart.panels)
    return LEADING * NAME_SIZE * lines + _UNDER_NAME + part.field + LEADING * NOTE + 4.0


def chart_height(part: ChartPart, *, measure: float, continued: str) -> float:
    """Return the height of a part of a chart [pt].

    Parameters
    ----------
    part : ChartPart
        The part [-]
    measure : float
        Room across [pt]
    continued : str
        Where the chart goes on, "" where it is whole [-]

    Returns
    -------
    float
        Height with title, panels and the name of the abscissa [pt]
    """
    lines = sum(LEADING * size for _, _, size in chart_lines(part.chart, measure, continued))
    rows = -(-len(part.panels) // part.across)
    return lines + 4.0 + rows * panel_height(part, measure) + LEADING * NOTE


def place_chart(
    part: ChartPart, card: Card, *, x: float, top: float, measure: float, continued: str
) -> list[Box]:
    """Return the boxes of a part of a chart.

    Parameters
    ----------
    part : ChartPart
        The part [-]
    card : Card
        The card, for the letters of reasons [-]
    x, top : float
        Upper left corner [pt]
    measure : float
        Room across [pt]
    continued : str
        Where the chart goes on, "" where it is whole [-]

    Returns
    -------
    list of Box
        Lines and grounds under the words that stand on them [-]
    """
    boxes: list[Box] = []
    y = top
    for text, face, size in chart_lines(part.chart, measure, continued):
        y -= LEADING * size
        boxes.append(Run(x, y + 0.2 * size, text, face, size))
    return boxes + place_panels(part, card, x=x, top=y - 4.0, measure=measure)


def place_panels(part: ChartPart, card: Card, *, x: float, top: float, measure: float) -> list[Box]:
    """Return the boxes of the panels of a part and the name of their abscissa.

    Parameters
    ----------
    part : ChartPart
        The part [-]
    card : Card
        The card, for the letters of reasons [-]
    x, top : float
        Upper left corner [pt]
    measure : float
        Room across [pt]

    Returns
    -------
    list of Box
        Panel after panel [-]
    """
    boxes: list[Box] = []
    y = top
    each = _room(measure, part.across)
    height = panel_height(part, measure)
    for k, index in enumerate(part.panels):
        column, row = k % part.across, k // part.across
        boxes += _panel(
            part.chart,
            part.chart.panels[index],
            card,
            left=x + column * (each + BETWEEN),
            low=y - (row + 1) * height + LEADING * NOTE + 4.0,
            room=each,
            field=part.field,
        )
    y -= height * -(-len(part.panels) // part.across) + LEADING * NOTE
    label = part.chart.across.label
    under = (len(part.panels) - 1) % part.across  # the last panel, which may leave its row short
    end = x + under * (each + BETWEEN) + each
    boxes.append(Run(end - width(label, "regular", NOTE), y + 2.0, label, "regular", NOTE))
    return boxes


def _panel(
    chart: Chart,
    panel: Panel,
    card: Card,
    *,
    left: float,
    low: float,
    room: float,
    field: float,
) -> list[Box]:
    """Return one panel: ground, grid, lines, then every word on white."""
    figures = _left(chart)
    place = _Field(left + figures, low, room - figures, field, chart.across, chart.up)
    lines = _name_lines(chart, panel, room)
    y = low + field + _UNDER_NAME + 3.0
    boxes: list[Box] = [
        Run(left, y + LEADING * NAME_SIZE * (len(lines) - 1 - k), line, "bold", NAME_SIZE)
        for k, line in enumerate(lines)
    ]
    after = left + width(lines[-1], "bold", NAME_SIZE) + 8.0
    boxes.append(Run(after, y, chart.up.label, "regular", NOTE))
    for area in panel.areas:
        pieces = _clipped_pieces(place, area)
        if pieces:
            boxes.append(Ground(pieces, HATCH_SPACING, HATCH))
    boxes += _grid(place)
    taken: list[_Space] = []
    words: list[Box] = []
    grounds = [(area, _clipped_pieces(place, area)) for area in panel.areas]
    for area, pieces in grounds:
        words += _letter(card.reasons[area.reason].letter, pieces, taken)
    rays = any(curve.kind == "ray" for curve in panel.curves)
    for curve in panel.curves:
        weight = _WEIGHTS[curve.kind]
        if rays and curve.kind == "setting":
            weight = _SPEED_WEIGHT
        pieces_of_line = tuple(_clipped_line(place, curve))
        word = _word(place, curve, pieces_of_line, taken, rays=rays)
        if word or curve.kind == "ceiling":  # a line that says nothing would only mislead
            boxes += [Trace(points, weight) for points in pieces_of_line]
            words += word
    boxes.append(Frame(place.x, place.y, place.width, place.height, 0.8))
    return [*boxes, *words, *_figures(place)]


def _grid(place: _Field) -> list[Box]:
    """Return thin lines at the figures, so that a value is followed with the eye alone."""
    boxes: list[Box] = []
    for tick in place.across.ticks:
        x, _ = place.at((tick, place.up.low))
        boxes.append(Rule(x, place.y, x, place.y + place.height, 0.2))
    for tick in place.up.ticks:
        _, y = place.at((place.across.low, tick))
        boxes.append(Rule(place.x, y, place.x + place.width, y, 0.2))
    return boxes


def _figures(place: _Field) -> list[Box]:
    """Return the figures of both axes; those that would touch are left out."""
    boxes: list[Box] = []
    free = place.y - LEADING * NOTE
    for tick in place.up.ticks:
        _, y = place.at((place.across.low, tick))
        base = min(max(y - 0.35 * NOTE, place.y), place.y + place.height - CAP_HEIGHT * NOTE)
        if base < free + LEADING * NOTE:
            continue
        free = base
        text = number(tick)
        boxes.append(Run(place.x - 3.0 - width(text, "regular", NOTE), base, text, "regular", NOTE))
    for start, text in _abscissa(place):
        boxes.append(Run(start, place.y - LEADING * NOTE, text, "regular", NOTE))
    return boxes


def _abscissa(place: _Field) -> list[tuple[float, str]]:
    """Return where the figures of the abscissa start: every one, or every second, third, ..."""
    ticks = place.across.ticks
    for stride in range(1, len(ticks) + 1):
        found: list[tuple[float, str]] = []
        end = place.x - 100.0
        for tick in ticks[::stride]:
            x, _ = place.at((tick, place.up.low))
            text = number(tick)
            run = width(text, "regular", NOTE)
            start = min(max(x - 0.5 * run, place.x), place.x + place.width - run)
            if start < end + 4.0:
                break
            found.append((start, text))
            end = start + run
        else:
            return found
    return []


# ------------------------------------------------------------------------------------ lines, words

Space = tuple[float, float, float, float]  # left, low, right, high
_Space = Space


def _clipped_pieces(place: _Field, area: Area) -> tuple[tuple[tuple[float, float], ...], ...]:
    """Return the pieces of an area on the page, cut off below and above the field."""
    low, high = place.y, place.y + place.height
    pieces = []
    for piece in area.pieces:
        ring = tuple((x, min(max(y, low), high)) for x, y in map(place.at, piece))
        if max(y for _, y in ring) - min(y for _, y in ring) > 0.3:
            pieces.append(ring)
    return tuple(pieces)


def _clipped_line(place: _Field, curve: Curve) -> Iterator[tuple[tuple[float, float], ...]]:
    """Return the stretches of a line that lie within the field."""
    low, high = place.y, place.y + place.height
    stretch: list[tuple[float, float]] = []
    for one, other in pairwise(map(place.at, curve.points)):
        cut = _cut(one, other, low, high)
        if cut is None:
            if len(stretch) > 1:
                yield tuple(stretch)
            stretch = []
            continue
        if stretch and stretch[-1] != cut[0]:
            yield tuple(stretch)
            stretch = []
        stretch = [*stretch, cut[1]] if stretch else [*cut]
    if len(stretch) > 1:
        yield tuple(stretch)


def _cut(
    one: tuple[float, float], other: tuple[float, float], low: float, high: float
) -> tuple[tuple[float, float], tuple[float, float]] | None:
    """Return a straight stretch cut off below and above, None where nothing of it is between."""

    def onto(y: float) -> tuple[float, float]:
        share = (y - one[1]) / (other[1] - one[1])
        return one[0] + share * (other[0] - one[0]), y

    if max(one[1], other[1]) < low or min(one[1], other[1]) > high:
        return None
    ends = []
    for end in (one, other):
        if end[1] < low:
            ends.append(onto(low))
        elif end[1] > high:
            ends.append(onto(high))
        else:
            ends.append(end)
    return (ends[0], ends[1]) if ends[0] != ends[1] else None


def _free(space: Space, taken: Sequence[Space]) -> bool:
    return all(
        space[2] <= other[0] or other[2] <= space[0] or space[3] <= other[1] or other[3] <= space[1]
        for other in taken
    )


def _on_white(text: str, x: float, y: float, face: Face) -> list[Box]:
    """Return a word with the white it stands on."""
    return [
        Tint(
            x - _HALO,
            y - _HALO,
            width(text, face, NOTE) + 2.0 * _HALO,
            CAP_HEIGHT * NOTE + 2.0 * _HALO,
            1.0,
        ),
        Run(x, y, text, face, NOTE),
    ]


def _space(text: str, x: float, y: float, face: Face) -> Space:
    """Return the room of a word, a line gap round it."""
    return (
        x - 2.0 * _HALO,
        y - 0.3 * NOTE,
        x + width(text, face, NOTE) + 2.0 * _HALO,
        y + LEADING * NOTE - 0.3 * NOTE + 1.0,
    )


def _word(
    place: _Field,
    curve: Curve,
    stretches: Sequence[tuple[tuple[float, float], ...]],
    taken: list[Space],
    *,
    rays: bool,
) -> list[Box]:
    """Return the words of a line on the line itself, at the first place along it that is free."""
    face: Face = "regular" if curve.kind == "ray" else "bold"
    text = printable(curve.label)
    points = [point for stretch in stretches for point in _spaced(stretch)]
    if curve.kind in {"ceiling", "ray"}:
        points.reverse()
    if rays and curve.kind == "setting":
        points.sort(key=lambda point: abs(point[0] - place.x - 0.5 * place.width))
    long = width(text, face, NOTE)
    for x, y in points:
        start, base = x - 0.5 * long, y - 0.5 * CAP_HEIGHT * NOTE
        if curve.kind == "ceiling":  # above the line there is nothing
            start, base = x + 2.0, y + 3.0
        space = _space(text, start, base, face)
        inside = (
            start >= place.x + 2.0
            and start + long <= place.x + place.width - 2.0
            and base >= place.y + 2.0
            and base + CAP_HEIGHT * NOTE <= place.y + place.height - 2.0
        )
        if inside and _free(space, taken):
            taken.append(space)
            return _on_white(text, start, base, face)
    return []


def _spaced(stretch: tuple[tuple[float, float], ...]) -> Iterator[tuple[float, float]]:
    """Yield places along a line, some points apart."""
    for one, other in pairwise(stretch):
        count = max(1, int(abs(other[0] - one[0]) // 6.0))
        for k in range(count):
            share = (k + 0.5) / count
            yield one[0] + share * (other[0] - one[0]), one[1] + share * (other[1] - one[1])


def _letter(
    letter: str, pieces: Sequence[tuple[tuple[float, float], ...]], taken: list[Space]
) -> list[Box]:
    """Return the letter of forbidden ground, in the largest piece that has room for it."""
    if not pieces:
        return []

    def size(piece: tuple[tuple[float, float], ...]) -> float:
        ys = [y for _, y in piece]
        return max(ys) - min(ys)

    for piece in sorted(pieces, key=size, reverse=True):
        x = sum(point[0] for point in piece) / len(piece) - 0.5 * width(letter, "bold", NOTE)
        y = sum(point[1] for point in piece) / len(piece) - 0.5 * CAP_HEIGHT * NOTE
        space = _space(letter, x, y, "bold")
        if _free(space, taken):
            taken.append(space)
            return _on_white(letter, x, y, "bold")
    return []
