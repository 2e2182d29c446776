"""What must agree between the keys and the files of one profile, and be physically plausible.

Each check looks only at what could be read, so that one mistake does not hide another.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Any

from cardgen.constants import (
    GAS_CONSTANT_DRY_AIR,
    HEAT_CAPACITY_RATIO,
    SEA_LEVEL_TEMPERATURE,
)
from cardgen.profile.aircraft_file import AircraftFile
from cardgen.profile.engine_file import EngineFile
from cardgen.profile.limit_sections import LimitsSection, RatingSection
from cardgen.profile.parsing import ProfileFile
from cardgen.profile.propeller_file import PropellerFile

_LEAST_MEAN_PRESSURE, _GREATEST_MEAN_PRESSURE = 4.0e5, 16.0e5
"""Brake mean effective pressures [Pa] that unsupercharged petrol engines stay within; a rating
outside them is a mistyped power, rpm or displacement. Common practice, no source."""

_NOT_A_NATIONALITY = "Q"
"""No nationality mark begins so: marks come from radio call signs (ICAO Annex 7, section 3), whose
Q series is given to no state (ITU Radio Regulations, appendix 42). Both from memory."""

Files = Sequence[ProfileFile[Any] | None]


def check_engine(file: ProfileFile[EngineFile]) -> None:
    """Report ratings that contradict each other or the engine's size.

    Parameters
    ----------
    file : ProfileFile
        The engine file, which takes the problems [-]
    """
    ratings: list[RatingSection] = file.get("ratings") or []
    names = [rating.name for rating in ratings]
    wanted = file.get("full_throttle_rating")
    if ratings and wanted is not None and wanted not in names:
        file.report(("full_throttle_rating",), f"no rating is named {wanted!r}", _one_of(names))
    _report_repeated(file, "ratings", names)
    displacement = file.get("displacement")
    if displacement is None:
        return
    for index, rating in enumerate(ratings):
        # A four-stroke engine fills its displacement with one power stroke every other revolution.
        pressure = 2.0 * rating.power / (displacement * rating.rpm / 60.0)
        if not _LEAST_MEAN_PRESSURE <= pressure <= _GREATEST_MEAN_PRESSURE:
            file.report(
                ("ratings", index, "power"),
                "power, rpm and displacement give a mean effective pressure "
                f"of {pressure / 1e5:.1f} bar",
                "4 to 16 bar; check all three",
            )


def check_propeller(file: ProfileFile[PropellerFile]) -> None:
    """Report blades and stations out of proportion to the diameter.

    Parameters
    ----------
    file : ProfileFile
        The propeller file, which takes the problems [-]
    """
    diameter, stops, blade = file.get("diameter"), file.get("stops"), file.get("blade")
    if diameter is None:
        return
    if stops is not None and stops.station is not None:
        share = 2.0 * stops.station / diameter
        if not 0.35 <= share <= 0.95:
            file.report(
                ("stops", "station"),
                f"the station is at {share:.0%} of the tip radius",
                "35 % to 95 % of it",
            )
    for index, station in enumerate((blade and blade.stations) or ()):
        if station.chord > 0.25 * diameter:
            file.report(
                ("blade", "stations", index, "chord"),
                f"the chord is {station.chord / diameter:.0%} of the diameter",
                "at most 25 % of it",
            )


def check_aircraft(file: ProfileFile[AircraftFile]) -> None:
    """Report what disagrees within the aircraft file.

    Parameters
    ----------
    file : ProfileFile
        The aircraft file, which takes the problems [-]
    """
    airframe, card, mixtures = file.get("airframe"), file.get("card"), file.get("mixtures")
    names = [mixture.name for mixture in mixtures or ()]
    _report_repeated(file, "mixtures", names)
    if card is not None and names:
        for index, name in enumerate(card.mixtures or ()):
            if name not in names:
                file.report(("card", "mixtures", index), _unknown_mixture(name), _one_of(names))
    if card is not None and airframe is not None:
        for index, mass in enumerate(card.masses or ()):
            if mass > airframe.gross_mass:
                file.report(
                    ("card", "masses", index),
                    "the mass is above airframe.gross_mass",
                    "at most the gross mass",
                )
    identity = file.get("identity")
    if file.get("demo") and identity is not None:
        mark = identity.registration
        if not mark.upper().startswith(_NOT_A_NATIONALITY):
            file.report(
                ("identity", "registration"),
                f"{mark!r} could be somebody's registration, and demo is yes",
                f"an invented one that begins with {_NOT_A_NATIONALITY}, as no state's does",
            )


def check_together(
    aircraft: ProfileFile[AircraftFile],
    *,
    engine: ProfileFile[EngineFile] | None,
    propeller: ProfileFile[PropellerFile] | None,
) -> None:
    """Report what disagrees between the files.

    Parameters
    ----------
    aircraft, engine, propeller : ProfileFile
        The files, each of which takes its own problems; None where one could not be found [-]
    """
    files = (engine, propeller, aircraft)
    _check_percent_of(aircraft, engine)
    _check_leaning(aircraft, files)
    _check_greatest_rpm(files)
    _check_airspeeds(files)
    if engine is not None and propeller is not None:
        _check_tip_speed(engine, propeller)


def _check_percent_of(
    aircraft: ProfileFile[AircraftFile], engine: ProfileFile[EngineFile] | None
) -> None:
    """Report a denominator of percent power that no file rates."""
    wanted, ratings = aircraft.get("percent_of"), engine.get("ratings") if engine else None
    if wanted is None or ratings is None:
        return
    names = [rating.name for rating in ratings]
    names += [entry.name for _, entry in _entries((aircraft,), "ratings")]
    if wanted not in names:
        aircraft.report(("percent_of",), f"no rating is named {wanted!r}", _one_of(names))


def _check_leaning(aircraft: ProfileFile[AircraftFile], files: Files) -> None:
    """Report leaning limits of mixtures that do not exist: they would silently never apply."""
    names = [mixture.name for mixture in aircraft.get("mixtures") or ()]
    if not names:
        return
    for (file, path), entry in _entries(files, "leaning"):
        if entry.mixture not in names:
            file.report((*path, "mixture"), _unknown_mixture(entry.mixture), _one_of(names))


def _check_greatest_rpm(files: Files) -> None:
    """Report continuous ratings above the greatest continuous rpm of the same or another file."""
    limits = [entry.greatest for _, entry in _entries(files, "rpm_range") if entry.greatest]
    if not limits:
        return
    greatest = min(limits)
    engine = files[0]
    stated = [
        ((engine, ("ratings", index)), rating)
        for index, rating in enumerate((engine.get("ratings") if engine else None) or ())
    ]
    for (file, path), rating in [*stated, *_entries(files, "ratings")]:
        if file is not None and rating.time_limit is None and rating.rpm > greatest:
            file.report(
                (*path, "rpm"),
                f"the continuous rating {rating.name!r} turns faster than rpm_range allows",
                f"at most {greatest:g} rpm, or a time_limit",
            )


def _check_airspeeds(files: Files) -> None:
    """Report a V_NO that is not below V_NE."""
    entries = list(_entries(files, "airspeed"))
    never = [entry.calibrated_airspeed for _, entry in entries if entry.kind == "V_NE"]
    for (file, path), entry in entries:
        if entry.kind == "V_NO" and never and entry.calibrated_airspeed >= min(never):
            file.report((*path, "calibrated_airspeed"), "V_NO is not below V_NE", "less than V_NE")


def _check_tip_speed(
    engine: ProfileFile[EngineFile], propeller: ProfileFile[PropellerFile]
) -> None:
    """Report blade tips faster than sound at rated rpm, standing still at sea level."""
    diameter, gear_ratio = propeller.get("diameter"), engine.get("gear_ratio")
    ratings = engine.get("ratings") or ()
    if diameter is None or gear_ratio is None or not ratings:
        return
    rpm = max(rating.rpm for rating in ratings)
    sound = math.sqrt(HEAT_CAPACITY_RATIO * GAS_CONSTANT_DRY_AIR * SEA_LEVEL_TEMPERATURE)
    mach = math.pi * diameter * gear_ratio * rpm / 60.0 / sound
    if mach >= 1.0:
        propeller.report(
            ("diameter",),
            f"the blade tips would move at Mach {mach:.2f} at {rpm:g} rpm of the engine",
            "less than Mach 1; check diameter, gear_ratio and ratings",
        )


def _entries(
    files: Files, category: str
) -> Iterator[tuple[tuple[ProfileFile[Any], tuple[str | int, ...]], Any]]:
    """Yield the limits of a category in all files, each with its file and path."""
    for file in files:
        limits: LimitsSection | None = file.get("limits") if file else None
        entries = getattr(limits, category, None)
        if file is not None and isinstance(entries, list):
            for index, entry in enumerate(entries):
                yield (file, ("limits", category, index)), entry


def _report_repeated(file: ProfileFile[Any], key: str, names: Sequence[str]) -> None:
    """Report names that stand twice in a list whose entries are called by name."""
    for index, name in enumerate(names):
        if name in names[:index]:
            file.report((key, index, "name"), f"{name!r} is named twice", "each name once")


def _unknown_mixture(name: str) -> str:
    """Return the complaint about a mixture that the profile does not have."""
    return f"no mixture is named {name!r}"


def _one_of(names: Sequence[str]) -> str:
    """Return the names to choose from."""
    return "one of " + ", ".join(names)
