"""The flight-test sheet: which points to fly, blanks to write in, and how to hand them back."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.profile.assembly import Learned, card_digest, percent_of_text, stamps
from cardgen.profile.document import Profile
from cardgen.render.boxes import Box, Frame, Run
from cardgen.render.columns import LEADING, NOTE
from cardgen.render.data import suffix
from cardgen.render.fonts import CAP_HEIGHT, printable, width
from cardgen.render.paper import find_paper
from cardgen.render.sheet import (
    BETWEEN,
    Block,
    Marks,
    finished,
    measure_of,
    set_sheet,
    text_block,
)
from cardgen.render.wording import DIGEST_DIGITS, configuration, number, sign
from cardgen.tables.choices import UnitSet
from cardgen.tables.flights import FlightPlan, FlightPoint
from cardgen.tables.printed import decimals, fuel_flow_in
from cardgen.units import to_unit

HEADING_SIZE: Final = 11.0
SETTING_SIZE: Final = 14.0
FIGURE_SIZE: Final = 11.0
LEGS: Final = 4
_BLANK: Final = 31.0  # height of a box that a gloved hand can write in [pt]
_ACROSS: Final = 4
_SQUARE: Final = 11.0

# Common practice, no source.
HOW: Final = (
    "Fly early or late in smooth air, clear of ridges and cloud. Leave out a point if the air "
    "lifts or sinks you: altitude and airspeed must stay put without power or trim changes.",
    "Set the altimeter to 29.92 inHg (1013.25 hPa): it then reads pressure altitude. Fly the "
    "altitude of the point; within 300 ft will do, write what it reads.",
    "Set rpm, then manifold pressure, then lean by the flight manual to the mixture of the point. "
    "Cowl flaps and cabin heat as in cruise, the same for every point.",
    "Wait until airspeed and temperatures have not moved for three minutes, then write.",
    "Write what each gauge reads, uncorrected; the profile knows the errors of the gauges.",
    "Hold a heading, wait until ground speed is steady, write ground speed and track. Turn by "
    "about 90° (four headings) or 120° (three) and do it again; touch neither throttle nor "
    "mixture in between.",
    "One flies and looks out, another writes. Where a placard, a marking, the flight manual or a "
    "temperature says no, leave the point out.",
)
WHEN: Final = (
    "Before the change: baseline. The same points flown before and after tell most, because what "
    "both have in common drops out of the difference.",
    "After the change: follow-up, with the new part run in.",
)


def flight_sheet(profile: Profile, learned: Learned | None, plan: FlightPlan) -> bytes:
    """Return a flight-test sheet as a PDF.

    Parameters
    ----------
    profile : Profile
        The aircraft [-]
    learned : Learned, optional
        A fit that applies to it [-]
    plan : FlightPlan
        The points to fly [-]

    Returns
    -------
    bytes
        The file, read back; the same plan gives the same bytes [-]

    Raises
    ------
    ReleaseError
        It does not fit its paper, or does not carry the words placed on it.
    """
    paper = find_paper(profile.card.paper)
    measure = measure_of(paper)
    blocks = [
        *_instructions(profile, plan, measure),
        *(
            _point(point, place, plan, profile.card.units, measure)
            for place, point in enumerate(plan.points, start=1)
        ),
        *_handing_in(profile.card.units, measure),
    ]
    registration = printable(profile.identity.registration)
    digest = card_digest(profile, learned)
    marks = Marks(
        registration=registration,
        title="Flight-test sheet",
        date=profile.identity.date,
        stamps=stamps(profile, learned),
        head=(configuration(profile.identity),),
        foot=(
            percent_of_text(profile),
            f"Profile {digest[:DIGEST_DIGITS]}. Settings are what the gauges must read.",
        ),
    )
    return finished(
        set_sheet(marks, blocks, paper),
        paper,
        title=f"{registration} flight-test sheet",
        subject=f"Flight points of {registration}, {profile.identity.date}",
        keywords=f"profile-digest {digest}",
    )


def expectation(plan: FlightPlan, units: UnitSet, *, fuel_density: float) -> str:
    """Return what flying the points is expected to do to the tolerances of the card.

    Parameters
    ----------
    plan : FlightPlan
        The points [-]
    units : UnitSet
        Units of the card [-]
    fuel_density : float
        Density of the fuel [kg/m³]

    Returns
    -------
    str
        One sentence, "" where no point can be flown [-]
    """
    if not plan.points:
        return ""
    places = decimals(units)

    def words(tolerance: npt.NDArray[np.float64]) -> str:
        pressure = float(to_unit(tolerance[0], units.pressure))
        flow = float(fuel_flow_in(tolerance[1:2], units.fuel_flow, fuel_density=fuel_density)[0])
        speed = float(to_unit(tolerance[2], units.speed))
        return (
            f"±{pressure:.{places.pressure}f} {sign(units.pressure)}, "
            f"±{flow:.{places.fuel_flow}f} {sign(units.fuel_flow)}, "
            f"±{speed:.1f} {sign(units.speed)}"
        )

    return (
        f"Typical tolerance (95 %) of the card now: {words(plan.before)}. "
        f"Expected with these points: {words(plan.after)}."
    )


def setting_text(point: FlightPoint, units: UnitSet) -> str:
    """Return what is to be set, such as "2350 rpm, 22.5 inHg, Best power"."""
    pressure = number(
        float(to_unit(point.indicated_pressure, units.pressure)), decimals(units).pressure
    )
    return f"{point.indicated_rpm:.0f} rpm, {pressure} {sign(units.pressure)}, {point.mixture}"


def _instructions(profile: Profile, plan: FlightPlan, measure: float) -> Iterator[Block]:
    """Yield what to know before the flight."""
    count = len(plan.points)
    if not count:
        yield text_block(
            "No setting of this card can be flown: every one is forbidden, cautioned against, or "
            "out of reach at 3000 to 10 000 ft.",
            measure=measure,
            face="bold",
            size=HEADING_SIZE,
        )
        return
    points = "point" if count == 1 else "points"
    density = profile.aircraft.engine.fuel_density
    yield text_block(
        f"{count} {points} to fly, chosen because they tell most about this aircraft. "
        + expectation(plan, profile.card.units, fuel_density=density),
        measure=measure,
    )
    yield text_block(
        "Which flight is this?",
        measure=measure,
        face="bold",
        size=HEADING_SIZE,
        keeps_next=True,
        gap=2.0,
    )
    for text in WHEN:
        yield _choice(text, measure)
    yield text_block(
        "How to fly it (common practice)",
        measure=measure,
        face="bold",
        size=HEADING_SIZE,
        keeps_next=True,
        gap=2.0,
    )
    for text in HOW:
        gap = BETWEEN if text is HOW[-1] else 2.0
        yield text_block(text, measure=measure, indent=9.0, gap=gap)


def _choice(text: str, measure: float) -> Block:
    """Return a square to tick with what it means."""
    words = text_block(text, measure=measure - _SQUARE - 6.0)
    square = Frame(0.0, -_SQUARE, _SQUARE, _SQUARE, 0.9)
    boxes = tuple(
        Run(box.x + _SQUARE + 6.0, box.y - 1.0, box.text, box.face, box.size)
        for box in words.boxes
        if isinstance(box, Run)
    )
    return Block(max(words.height, _SQUARE) + 2.0, (square, *boxes), gap=3.0)


def _point(
    point: FlightPoint, place: int, plan: FlightPlan, units: UnitSet, measure: float
) -> Block:
    """Return one point: what to set, and blanks for what comes of it."""
    setting = f"Point {place}: {setting_text(point, units)}"
    altitude = number(float(to_unit(point.pressure_altitude, units.altitude)))
    mass = number(float(to_unit(plan.mass, units.mass, dimension="mass")))
    where = (
        f"Pressure altitude {altitude} {sign(units.altitude)}; about "
        f"{100.0 * point.power_fraction:.0f} % power, reckoned at {mass} {units.mass}"
    )
    boxes: list[Box] = []
    y = 0.0
    for block in (
        text_block(setting, measure=measure, face="bold", size=SETTING_SIZE),
        text_block(where, measure=measure, size=FIGURE_SIZE),
    ):
        boxes += [
            Run(box.x, box.y + y, box.text, box.face, box.size)
            for box in block.boxes
            if isinstance(box, Run)
        ]
        y -= block.height
    y -= 1.0
    speed, temperature = sign(units.speed), sign(units.temperature)
    rows = (
        ("time", f"altimeter {sign(units.altitude)}", f"OAT {temperature}", f"weight {units.mass}"),
        ("rpm", f"MAP {sign(units.pressure)}", f"fuel flow {sign(units.fuel_flow)}", "notes"),
        tuple(f"leg {leg} GS {speed}" for leg in range(1, LEGS + 1)),
        tuple(f"leg {leg} track °" for leg in range(1, LEGS + 1)),
    )
    across = measure / _ACROSS
    for labels in rows:
        for k, label in enumerate(labels):
            boxes.append(Frame(k * across, y - _BLANK, across, _BLANK, 0.8))
            boxes.append(Run(k * across + 3.0, y - CAP_HEIGHT * NOTE - 3.0, label, "regular", NOTE))
        y -= _BLANK
    return Block(-y, tuple(boxes), gap=BETWEEN + 4.0)


def csv_header(units: UnitSet) -> str:
    """Return the header of the points file that the sheet is typed into.

    Parameters
    ----------
    units : UnitSet
        Units of the card, which the sheet asks for too [-]

    Returns
    -------
    str
        Names separated by commas [-]
    """
    names = [
        f"pressure_altitude_{suffix(units.altitude)}",
        f"oat_{suffix(units.temperature)}",
        "rpm",
        f"map_{suffix(units.pressure)}",
        f"fuel_flow_{suffix(units.fuel_flow)}",
        f"weight_{suffix(units.mass)}",
        "mixture",
        "source",
    ]
    for leg in range(1, LEGS + 1):
        names += [f"leg{leg}_gs_{suffix(units.speed)}", f"leg{leg}_track_deg"]
    return ",".join(names)


def _handing_in(units: UnitSet, measure: float) -> Iterator[Block]:
    """Yield how the results get into a fit."""
    yield text_block(
        "Afterwards",
        measure=measure,
        face="bold",
        size=HEADING_SIZE,
        keeps_next=True,
        gap=2.0,
    )
    yield text_block(
        "Type one line per point into a text file that begins with the header below, all on one "
        "line; write flight under source, and leave empty what was not read. Then run cardgen fit "
        "with --points and that file, and cardgen make.",
        measure=measure,
        keeps_next=True,
    )
    names = csv_header(units).split(",")
    # A line is broken at commas only, so that it can be typed as it stands.
    lines = [""]
    for place, name in enumerate(names):
        piece = name if place == len(names) - 1 else f"{name},"
        if lines[-1] and width(lines[-1] + piece, "regular", NOTE) > measure:
            lines.append("")
        lines[-1] += piece
    boxes = tuple(
        Run(0.0, -CAP_HEIGHT * NOTE - LEADING * NOTE * k, line, "regular", NOTE)
        for k, line in enumerate(lines)
    )
    yield Block(LEADING * NOTE * len(lines), boxes)
