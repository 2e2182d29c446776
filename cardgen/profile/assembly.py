"""From a profile, and a fit where there is one, to what the tables compute with."""

from __future__ import annotations

from dataclasses import dataclass

from cardgen.constants import HORSEPOWER
from cardgen.fit import PARTS, Knowledge, Subject, knowledge_from_profile
from cardgen.limits.kinds import CATEGORIES, Limit
from cardgen.limits.statement import gauge_notes, state_all
from cardgen.profile.digest import digest_of
from cardgen.profile.document import Profile
from cardgen.tables.back import Supply
from cardgen.tables.card import Card, Section
from cardgen.tables.choices import BreakIn, CardChoices
from cardgen.tables.compose import Words, compose
from cardgen.tables.printed import message_units
from cardgen.tables.solution import Model
from cardgen.units import to_unit

DEMO_STAMP = "DEMONSTRATION DATA, NOT FOR FLIGHT"
NOT_FITTED_STAMP = "NOT FITTED: planning estimate only"


@dataclass(frozen=True, slots=True)
class Learned:
    """A fit as far as it applies to a profile.

    Parameters
    ----------
    knowledge : Knowledge
        Parameters with their covariance [-]
    digest : str
        Digest of what was learned [-]
    note : str
        Which evidence it comes from, in words [-]
    replaced : tuple of str
        Parts that were replaced since, whose parameters are back at their priors [-]
    """

    knowledge: Knowledge
    digest: str
    note: str
    replaced: tuple[str, ...] = ()


def subject_of(profile: Profile) -> Subject:
    """Return what a fit of a profile is about.

    Parameters
    ----------
    profile : Profile
        The profile [-]

    Returns
    -------
    Subject
        Its aircraft and mixtures, not fitted [-]
    """
    return Subject(profile.aircraft, profile.mixtures)


def model_of(profile: Profile, learned: Learned | None = None) -> Model:
    """Return what the tables compute with.

    Parameters
    ----------
    profile : Profile
        The profile [-]
    learned : Learned, optional
        A fit that applies to it [-]

    Returns
    -------
    Model
        Aircraft, parameters, limits and gauges [-]
    """
    subject = subject_of(profile)
    return Model(
        subject=subject,
        knowledge=knowledge_from_profile(subject) if learned is None else learned.knowledge,
        limits=profile.limits,
        gauges=profile.gauges,
        percent_of=profile.percent_of,
        relative_humidity=profile.card.relative_humidity,
    )


def card_of(profile: Profile, learned: Learned | None = None) -> Card:
    """Return the content of a profile's card.

    Parameters
    ----------
    profile : Profile
        The profile [-]
    learned : Learned, optional
        A fit that applies to it [-]

    Returns
    -------
    Card
        Computed, rounded and worded [-]
    """
    words = Words(
        percent_of=percent_of_text(profile),
        stamps=stamps(profile, learned),
        sections=_sections(profile, learned),
        digest=card_digest(profile, learned),
    )
    supply = None
    if profile.fuel is not None:
        supply = Supply(profile.fuel.usable, profile.fuel.reserve, profile.winds)
    return compose(model_of(profile, learned), profile.card, words=words, supply=supply)


def card_digest(profile: Profile, learned: Learned | None) -> str:
    """Return the digest of everything that the numbers of a card come from.

    Parameters
    ----------
    profile : Profile
        The profile [-]
    learned : Learned, optional
        A fit that applies to it [-]

    Returns
    -------
    str
        SHA-256, 64 hexadecimal digits [-]
    """
    return digest_of([profile.digest, learned.digest if learned else ""])


def stamps(profile: Profile, learned: Learned | None) -> tuple[str, ...]:
    """Return the warnings that stand large on every page.

    Parameters
    ----------
    profile : Profile
        The profile [-]
    learned : Learned, optional
        A fit that applies to it [-]

    Returns
    -------
    tuple of str
        None for a real aircraft that is fitted as it flies [-]
    """
    found = [DEMO_STAMP] if profile.identity.demo else []
    if learned is None or not learned.knowledge.fitted:
        found.append(NOT_FITTED_STAMP)
    elif learned.replaced:
        found.append(f"NOT FLOWN SINCE THE CHANGE of {' and '.join(learned.replaced)}")
    if profile.card.break_in is not None:
        found.append(f"BREAK-IN: {break_in_text(profile.card.break_in, profile.card)}")
    return tuple(found)


def break_in_text(band: BreakIn, choices: CardChoices) -> str:
    """Return what an operator keeps to while a fresh engine is run in.

    Parameters
    ----------
    band : BreakIn
        The power band and ceiling [-]
    choices : CardChoices
        The card that they narrow [-]

    Returns
    -------
    str
        Part of a sentence [-]
    """
    unit = choices.units.altitude
    ceiling = float(to_unit(band.greatest_altitude, unit))
    return (
        f"{100.0 * band.least_power_fraction:.4g} to {100.0 * band.greatest_power_fraction:.4g} % "
        f"power, at or below {ceiling:.0f} {unit} {choices.altitude_kind} altitude"
    )


def percent_of_text(profile: Profile) -> str:
    """Return what percent power is of.

    Parameters
    ----------
    profile : Profile
        The profile [-]

    Returns
    -------
    str
        One sentence [-]
    """
    rating = profile.percent_of
    power = rating.power / HORSEPOWER
    return f"Percent power is of {rating.name}: {power:.0f} hp at {rating.rpm:.0f} rpm"


def _sections(profile: Profile, learned: Learned | None) -> tuple[Section, ...]:
    """Return what a card says of limits, gauges, evidence and cautions."""
    units = message_units(profile.card.units)
    limits: list[str] = []
    for category in CATEGORIES:
        stated: tuple[Limit, ...] = getattr(profile.limits, category)
        for name in dict.fromkeys(limit.name for limit in stated):
            text, source = state_all([limit for limit in stated if limit.name == name], units)
            limits.append(f"{text[:1].upper()}{text[1:]} ({source})")
    limits.extend(
        f"{none.category.replace('_', ' ').capitalize()}: none ({none.source})"
        for none in profile.limits.stated_none
    )
    band = profile.card.break_in
    if band is not None:
        limits.append(
            f"Break-in, by choice of the operator: {break_in_text(band, profile.card)} "
            f"({band.source})"
        )
    return (
        Section("Limits applied", tuple(limits)),
        Section("Gauges", _gauge_lines(profile)),
        Section("Evidence", _evidence_lines(profile, learned)),
        Section("Cautions", CAUTIONS),
    )


CAUTIONS = (
    "Computed settings. Approved flight manual, placards, markings, local rules and licensed "
    "practice come first wherever they say otherwise.",
    "Set by the gauges, then lean by the procedure of the flight manual; watch cylinder-head and "
    "oil temperature, which this card does not know.",
    "Fuel flow and airspeed are for stabilised level flight in smooth air. Plan fuel with the "
    "tolerance added, and check it against the tanks.",
    "Void after any change of engine, propeller, mixture setting or instruments.",
)


def _gauge_lines(profile: Profile) -> tuple[str, ...]:
    """Return what a card must say of the gauges."""
    gauges = profile.gauges
    lines = ["Rpm and manifold pressure are what the gauges of this aircraft must read."]
    lines.extend(gauge_notes(gauges, message_units(profile.card.units)))
    if gauges.fuel_flow_factor != 1.0:
        lines.append(
            "Fuel flow is true flow; the fuel-flow gauge reads "
            f"{1.0 / gauges.fuel_flow_factor:.3f} of it"
        )
    return tuple(lines)


def _evidence_lines(profile: Profile, learned: Learned | None) -> tuple[str, ...]:
    """Return where the numbers come from."""
    if learned is None or not learned.knowledge.fitted:
        return (
            "No fit: engine, propeller and airframe are as their data sheets and typical values "
            "say. The tolerance printed is that of such values.",
        )
    lines = [learned.note]
    if learned.replaced:
        kept = [part for part in PARTS if part in learned.knowledge.fitted]
        lines.append(
            f"Replaced since the evidence was taken: {', '.join(learned.replaced)}, now at typical "
            f"values. Kept from it: {', '.join(kept)}."
        )
    covers = model_of(profile, learned).knowledge.covers
    if covers is not None:
        lines.append(
            f"The evidence covers {covers.rpm[0]:.0f}-{covers.rpm[1]:.0f} rpm and "
            f"{covers.power[0] / profile.percent_of.power:.0%}-"
            f"{covers.power[1] / profile.percent_of.power:.0%} power."
        )
    return tuple(lines)


def part_digests(profile: Profile, learned: Learned | None) -> dict[str, str]:
    """Return the digest of each thing whose change makes another card.

    Parameters
    ----------
    profile : Profile
        The profile [-]
    learned : Learned, optional
        A fit that applies to it [-]

    Returns
    -------
    dict
        Digest by name: the parts of the profile, and the fit [-]
    """
    return {**profile.part_digests, "fit": learned.digest if learned else ""}
