"""From the path of an aircraft file to a checked profile, or to every problem of all its files."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from cardgen.aircraft import Aircraft
from cardgen.errors import DataError
from cardgen.limits.gauges import UNMEASURED_GAUGES
from cardgen.limits.kinds import Limits, Rating
from cardgen.profile.aircraft_file import AircraftFile
from cardgen.profile.checks import (
    check_aircraft,
    check_engine,
    check_propeller,
    check_together,
)
from cardgen.profile.digest import digest_numbers, digest_parts
from cardgen.profile.document import FuelSupply, Identity, PartIdentity, Profile
from cardgen.profile.engine_file import EngineFile
from cardgen.profile.keys import Kind
from cardgen.profile.limit_sections import merge_limits
from cardgen.profile.parsing import ProfileFile, parse_file
from cardgen.profile.propeller_file import PropellerFile
from cardgen.profile.references import parse_part, resolve


def load_profile(
    path: str | os.PathLike[str], *, instead: Mapping[Kind, str | os.PathLike[str]] | None = None
) -> Profile:
    """Read an aircraft file and the part files it names.

    Parameters
    ----------
    path : path-like
        The aircraft file [-]
    instead : mapping, optional
        Part files by kind, engine or propeller, that are read instead of those it names; what the
        aircraft file says of the serial number of such a part does not apply [-]

    Returns
    -------
    Profile
        The aircraft, its limits, gauges and card choices [-]

    Raises
    ------
    DataError
        Something is wrong; it carries every problem of all the files.
    """
    shown = os.fspath(path)
    file = Path(shown)
    aircraft = parse_file(file, AircraftFile, kind="aircraft", shown=shown)
    if aircraft.other_kind:
        aircraft.report(
            ("kind",), f"is a file of kind {aircraft.other_kind}", "a file of kind aircraft"
        )
    others = {kind: os.fspath(part) for kind, part in (instead or {}).items()}
    engine = parse_part(
        aircraft, file, kind="engine", model=EngineFile, instead=others.get("engine")
    )
    propeller = parse_part(
        aircraft, file, kind="propeller", model=PropellerFile, instead=others.get("propeller")
    )
    evidence = [
        resolve(aircraft, file, key=("evidence", index), reference=reference)
        for index, reference in enumerate(aircraft.get("evidence") or ())
    ]
    check_aircraft(aircraft)
    if engine is not None:
        check_engine(engine)
    if propeller is not None:
        check_propeller(propeller)
    check_together(aircraft, engine=engine, propeller=propeller)
    problems = [
        problem
        for part in (aircraft, engine, propeller)
        if part
        for problem in sorted(part.problems)
    ]
    if problems or engine is None or propeller is None:
        raise DataError(problems)
    kept = tuple(path for path in evidence if path)
    return _profile(file, aircraft, engine, propeller, evidence=kept, instead=others)


def _profile(
    path: Path,
    aircraft_file: ProfileFile[AircraftFile],
    engine_file: ProfileFile[EngineFile],
    propeller_file: ProfileFile[PropellerFile],
    *,
    evidence: tuple[Path, ...],
    instead: Mapping[Kind, str],
) -> Profile:
    """Return the profile that sound files describe."""
    aircraft, engine, propeller = (
        aircraft_file.content,
        engine_file.content,
        propeller_file.content,
    )
    assert aircraft is not None
    assert engine is not None
    assert propeller is not None
    limits = merge_limits(
        (engine.limits, propeller.limits, aircraft.limits),
        ratings=[rating.limit() for rating in engine.ratings],
    )
    identity = _identity(aircraft, engine_file, propeller_file, instead)
    mixtures = tuple(section.mixture() for section in aircraft.mixtures)
    card = aircraft.card.choices(
        gross_mass=aircraft.airframe.gross_mass, mixtures=tuple(m.name for m in mixtures)
    )
    fuel = FuelSupply(aircraft.fuel.usable, aircraft.fuel.reserve) if aircraft.fuel else None
    percent_of = _rating(limits, aircraft.percent_of)
    gauges = aircraft.instruments.gauges() if aircraft.instruments else UNMEASURED_GAUGES
    whole = Aircraft(engine.engine(), propeller.propeller(), aircraft.airframe.airframe())
    winds = tuple(aircraft.card.winds)
    parts = digest_parts(
        {
            "engine": whole.engine,
            "propeller": whole.propeller,
            "airframe": whole.airframe,
            "mixtures": mixtures,
            "limits": limits,
            "gauges": gauges,
            "card": (card, percent_of, fuel, winds),
            "identity": identity,
        }
    )
    return Profile(
        path=path,
        name=path.stem,
        identity=identity,
        aircraft=whole,
        gross_mass=aircraft.airframe.gross_mass,
        percent_of=percent_of,
        mixtures=mixtures,
        as_flown=tuple(m.name for m in aircraft.mixtures if m.setting == "as_flown"),
        limits=limits,
        gauges=gauges,
        card=card,
        fuel=fuel,
        winds=winds,
        evidence=evidence,
        digest=digest_numbers(parts),
        part_digests=parts,
    )


def _identity(
    aircraft: AircraftFile,
    engine: ProfileFile[EngineFile],
    propeller: ProfileFile[PropellerFile],
    instead: Mapping[Kind, str],
) -> Identity:
    """Return what a card says about whose it is."""
    stated = aircraft.identity

    def part(kind: Kind, file: ProfileFile[Any], serial: str | None, named: str) -> PartIdentity:
        if kind in instead:
            return PartIdentity(file.get("model"), "", instead[kind])
        return PartIdentity(file.get("model"), serial or "", named)

    return Identity(
        registration=stated.registration,
        aircraft_type=stated.type,
        serial=stated.serial or "",
        operator=stated.operator or "",
        engine=part("engine", engine, stated.engine_serial, aircraft.engine),
        propeller=part("propeller", propeller, stated.propeller_serial, aircraft.propeller),
        approvals=tuple(stated.approvals),
        handbook=stated.handbook.source(),
        date=aircraft.date,
        demo=aircraft.demo,
    )


def _rating(limits: Limits, name: str) -> Rating:
    """Return the rating of a name; the checks saw to it that there is one."""
    return next(rating for rating in limits.ratings if rating.name == name)
