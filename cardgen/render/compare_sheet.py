"""The comparison of two configurations as a sheet for the logbook."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Final

import numpy as np

from cardgen.compare import Change, Comparison, rating_note, scale_of, signed
from cardgen.constants import HORSEPOWER
from cardgen.limits.kinds import Rating
from cardgen.profile.document import Identity
from cardgen.records import dataclass
from cardgen.render.boxes import Box, Frame, Rule, Run, Tint
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.fonts import CAP_HEIGHT, Face, printable, width
from cardgen.render.sheet import (
    BETWEEN,
    Block,
    Marks,
    finished,
    full_sheet,
    measure_of,
    set_sheet,
    text_block,
)
from cardgen.render.wording import DIGEST_DIGITS, configuration, number, percent, sign
from cardgen.units import to_unit

VERDICT_SIZE: Final = 12.0
HEADING_SIZE: Final = 11.0
FIGURE_SIZE: Final = 10.0
RPM_PER_TABLE: Final = 3
_ALTITUDE_WIDTH: Final = 46.0
_ROW: Final = LEADING * FIGURE_SIZE
_BAND: Final = 0.92  # grey of every second pair of rows
LARGER: Final = "*"

BASES: Final = {"percent": "the same percent power", "power": "the same power"}


@dataclass(frozen=True, slots=True)
class Compared:
    """One of the two configurations, as a sheet names it.

    Parameters
    ----------
    identity : Identity
        Whose numbers they are [-]
    digest : str
        Digest of everything they come from [-]
    stamps : tuple of str
        Warnings of its card [-]
    """

    identity: Identity
    digest: str
    stamps: tuple[str, ...]


def compare_sheet(comparison: Comparison, old: Compared, new: Compared) -> bytes:
    """Return a comparison as a PDF.

    Parameters
    ----------
    comparison : Comparison
        What differs [-]
    old, new : Compared
        The configurations before and now [-]

    Returns
    -------
    bytes
        The file, read back; the same comparison gives the same bytes [-]

    Raises
    ------
    ReleaseError
        It does not fit its paper, or does not carry the words placed on it.
    """
    paper = full_sheet(comparison.choices.paper)
    measure = measure_of(paper)
    blocks = [
        text_block(comparison.verdict, measure=measure, face="bold", size=VERDICT_SIZE),
        *_sections(comparison, measure),
        *_tables(comparison, measure),
    ]
    registration = printable(new.identity.registration)
    return finished(
        set_sheet(marks_of(comparison, old, new), blocks, paper),
        paper,
        title=f"{registration} comparison of configurations",
        subject=f"Supplementary cruise settings of {registration}, {new.identity.date}",
        keywords=f"profile-digests {old.digest} {new.digest}",
    )


def marks_of(comparison: Comparison, old: Compared, new: Compared) -> Marks:
    """Return what stands on every page of the sheet.

    Parameters
    ----------
    comparison : Comparison
        What differs [-]
    old, new : Compared
        The configurations before and now [-]

    Returns
    -------
    Marks
        Marking of every page [-]
    """
    scale = scale_of(comparison.choices.units)
    before, now = comparison.old_rating, comparison.new_rating
    percent_of = (
        f"Percent power is of {_rating(now)}"
        if _rating(now) == _rating(before)
        else f"Percent power now is of {_rating(now)}, before of {_rating(before)}"
    )
    mark_old, mark_new = old.identity.registration, new.identity.registration
    both = mark_new if mark_old == mark_new else f"{mark_old} and {mark_new}"
    warnings = [
        *(stamp for stamp in old.stamps if stamp in new.stamps),
        *(f"NOW: {stamp}" for stamp in new.stamps if stamp not in old.stamps),
        *(f"BEFORE: {stamp}" for stamp in old.stamps if stamp not in new.stamps),
    ]
    names = ("manifold pressure", "fuel flow", "true airspeed", "range in still air")
    units = ", ".join(f"{name} {sign(unit)}" for name, unit in zip(names, scale.unit, strict=True))
    return Marks(
        registration=both,
        title="What a change of configuration moved",
        date=new.identity.date,
        stamps=tuple(warnings),
        head=(
            f"Before: {configuration(old.identity)}",
            f"Now: {configuration(new.identity)}",
        ),
        foot=(
            percent_of,
            f"Every number is what it is now less what it was before. Units: {units}",
            f"{LARGER} and bold: larger than the 95 % tolerance of the difference",
            f"Profile before {old.digest[:DIGEST_DIGITS]}, now {new.digest[:DIGEST_DIGITS]}",
        ),
    )


def _rating(rating: Rating) -> str:
    return f"{rating.name}: {rating.power / HORSEPOWER:.0f} hp at {rating.rpm:.0f} rpm"


def _sections(comparison: Comparison, measure: float) -> Iterator[Block]:
    """Yield what is told in words."""
    for title, lines in words_of(comparison):
        yield text_block(
            title,
            measure=measure,
            face="bold",
            size=HEADING_SIZE,
            keeps_next=bool(lines),
            gap=1.0,
        )
        for place, line in enumerate(lines, start=1):
            gap = BETWEEN if place == len(lines) else 1.0
            yield text_block(line, measure=measure, indent=12.0, gap=gap)


def words_of(comparison: Comparison) -> tuple[tuple[str, tuple[str, ...]], ...]:
    """Return what is told in words: headings, each with its lines.

    Parameters
    ----------
    comparison : Comparison
        What differs [-]

    Returns
    -------
    tuple of (str, tuple of str)
        Percent power where it changed, limits, gauges, mixtures, settings no longer allowed [-]
    """
    sections: list[tuple[str, tuple[str, ...]]] = []
    note = rating_note(comparison.old_rating, comparison.new_rating)
    if note:
        sections.append(("Percent power", (f"{note}.",)))
    limits = tuple(f"{str(change)[:1].upper()}{str(change)[1:]}" for change in comparison.limits)
    sections.append(("Limits", limits or ("The same as before.",)))
    if comparison.gauges:
        sections.append(("Gauges", comparison.gauges))
    mixtures = (
        *(f"{name}: before only, not compared" for name in comparison.only_old),
        *(f"{name}: now only, not compared" for name in comparison.only_new),
    )
    if mixtures:
        sections.append(("Mixtures", mixtures))
    lost = tuple(_lost(comparison))
    if lost:
        sections.append(("Allowed before, not allowed now", lost))
    return tuple(sections)


def _lost(comparison: Comparison) -> Iterator[str]:
    """Yield the settings that are no longer allowed, rows of altitudes drawn together."""
    choices = comparison.choices
    unit = choices.units.altitude
    for change in comparison.changes:
        if change.basis != "percent":
            continue
        shape = change.lost.shape
        for mass, power, temperature, rpm in np.ndindex(shape[0], shape[1], shape[3], shape[4]):
            column = change.lost[mass, power, :, temperature, rpm]
            words = change.new.status[mass, power, :, temperature, rpm]
            for word in dict.fromkeys(words[column]):
                at = [
                    number(float(to_unit(choices.altitude[k], unit)))
                    for k in np.flatnonzero(column & (words == word))
                ]
                yield (
                    f"{choices.rpm[rpm]:.0f} rpm, {percent(choices.power_fraction[power])}, "
                    f"{change.mixture}{_where(comparison, mass, temperature)}, at "
                    f"{', '.join(at)} {sign(unit)}: {str(word).replace('_', ' ')}"
                )


def _where(comparison: Comparison, mass: int, temperature: int) -> str:
    """Return the mass, and the temperature where there are several, to add to a heading."""
    choices = comparison.choices
    unit = choices.units.mass
    amount = float(to_unit(choices.mass[mass], unit, dimension="mass"))
    text = f", {amount:.0f} {unit}"
    if choices.altitude_kind == "pressure" and len(choices.isa_deviation) > 1:
        text += f", ISA {choices.isa_deviation[temperature]:+.0f} °C"
    return text


def _tables(comparison: Comparison, measure: float) -> Iterator[Block]:
    """Yield a table for each basis, mixture, mass, temperature and power."""
    rpm = range(len(comparison.choices.rpm))
    several = len({change.basis for change in comparison.changes}) > 1
    for change in comparison.changes:
        shape = change.compared.shape
        for mass, temperature, power in np.ndindex(shape[0], shape[3], shape[1]):
            title = f"{percent(comparison.choices.power_fraction[power])} power, {change.mixture}"
            if several:
                title += f", at {BASES[change.basis]}"
                if change.basis == "power":
                    title += f" as {percent(comparison.choices.power_fraction[power])} was before"
            title += _where(comparison, mass, temperature)
            for first in range(0, len(rpm), RPM_PER_TABLE):
                yield _table(
                    comparison,
                    change,
                    (mass, power, temperature),
                    rpm=rpm[first : first + RPM_PER_TABLE],
                    title=title,
                    measure=measure,
                )


def _table(
    comparison: Comparison,
    change: Change,
    at: tuple[int, int, int],
    *,
    rpm: Sequence[int],
    title: str,
    measure: float,
) -> Block:
    """Return one table: altitudes down, rpm across, four differences in each cell."""
    mass, power, temperature = at
    choices = comparison.choices
    scale = scale_of(choices.units)
    boxes: list[Box] = [_run(title, 0.0, 0.0, "bold", HEADING_SIZE)]
    y = -LEADING * HEADING_SIZE - 2.0
    group = (measure - _ALTITUDE_WIDTH) / RPM_PER_TABLE
    column = (group - 10.0) / 4.0
    kind = "DA" if choices.altitude_kind == "density" else "PA"
    boxes.append(_run(f"{kind} {sign(choices.units.altitude)}", 4.0, y - _ROW, "bold", NOTE))
    for place, index in enumerate(rpm):
        left = _ALTITUDE_WIDTH + group * place
        label = f"{choices.rpm[index]:.0f} rpm"
        middle = left + 0.5 * (group - width(label, "bold", FIGURE_SIZE))
        boxes.append(_run(label, middle, y, "bold", FIGURE_SIZE))
        for k, unit in enumerate(scale.unit):
            right = left + 6.0 + column * (k + 1)
            boxes.append(
                _run(sign(unit), right - width(sign(unit), "bold", NOTE), y - _ROW, "bold", NOTE)
            )
    y -= 2.0 * _ROW
    top = y
    for row, altitude in enumerate(choices.altitude):
        if row // 2 % 2:
            boxes.append(Tint(0.0, y - _ROW, measure, _ROW, _BAND))
        text = number(float(to_unit(altitude, choices.units.altitude)))
        at_right = _ALTITUDE_WIDTH - 8.0 - width(text, "bold", FIGURE_SIZE)
        boxes.append(_run(text, at_right, y, "bold", FIGURE_SIZE))
        for place, index in enumerate(rpm):
            left = _ALTITUDE_WIDTH + group * place
            cell = (mass, power, row, temperature, index)
            boxes += _cell(change, cell, scale.factor, scale.places, left=left, y=y, group=group)
        y -= _ROW
    for place in range(len(rpm)):
        x = _ALTITUDE_WIDTH + group * place
        boxes.append(Rule(x, top + 2.0 * _ROW, x, y, thickness=0.4))
    boxes.append(Rule(0.0, top, measure, top, thickness=0.6))
    boxes.append(Frame(0.0, y, measure, top + 2.0 * _ROW - y, 0.6))
    shown = change.compared[mass, power, :, temperature, :][:, list(rpm)]
    tolerance = change.tolerance[mass, power, :, temperature, :][:, list(rpm)][shown]
    if tolerance.size:
        largest = ", ".join(
            f"±{value * factor:.{places}f} {sign(unit)}"
            for value, factor, places, unit in zip(
                tolerance.max(axis=0), scale.factor, scale.places, scale.unit, strict=True
            )
        )
        note = f"Tolerance of these differences (95 %, largest): {largest}"
    else:
        note = "No setting here gives the power asked both before and now."
    boxes.append(_run(note, 0.0, y - 2.0, "regular", NOTE))
    return Block(LEADING * NOTE + 2.0 - y, tuple(boxes))


def _run(text: str, x: float, top: float, face: Face, size: float) -> Run:
    """Return a text in a row that begins at a height."""
    return Run(x, top - CAP_HEIGHT * size - 0.25 * size, text, face, size)


def _cell(
    change: Change,
    cell: tuple[int, int, int, int, int],
    factors: tuple[float, ...],
    places: tuple[int, ...],
    *,
    left: float,
    y: float,
    group: float,
) -> Iterator[Box]:
    """Yield the differences of one setting, or why there are none."""
    words = cell_words(change, cell)
    if words:
        at = left + 0.5 * (group - width(words, "regular", NOTE))
        yield _run(words, at, y, "regular", NOTE)
        return
    column = (group - 10.0) / 4.0
    star = width(LARGER, "bold", FIGURE_SIZE)
    for k, (factor, place) in enumerate(zip(factors, places, strict=True)):
        larger = bool(change.significant[(*cell, k)])
        face: Face = "bold" if larger else "regular"
        text = signed(float(change.difference[(*cell, k)]) * factor, place)
        right = left + 6.0 + column * (k + 1) - star
        yield _run(text, right - width(text, face, FIGURE_SIZE), y, face, FIGURE_SIZE)
        if larger:
            yield _run(LARGER, right, y, "bold", FIGURE_SIZE)


def cell_words(change: Change, cell: tuple[int, int, int, int, int]) -> str:
    """Return why a setting has no differences, "" where it has.

    Parameters
    ----------
    change : Change
        Settings before and after [-]
    cell : tuple of int
        Mass, power, altitude, temperature and rpm index [-]

    Returns
    -------
    str
        The limit that forbids it now, or what keeps it from the power asked [-]
    """
    status = str(change.new.status[cell])
    solved = not np.isnan(change.new.values[cell]).any()
    if status != "ok" and solved:
        return f"forbidden: {status.replace('_', ' ')}"
    if change.compared[cell]:
        return ""
    if not solved:
        return "no answer now"
    if np.isnan(change.old.values[cell]).any():
        return "no answer before"
    full = [
        word
        for word, side in (("before", change.old), ("now", change.new))
        if side.solution.point.full_throttle[cell]
    ]
    return f"full throttle {' and '.join(full)}"
