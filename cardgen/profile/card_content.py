"""From a profile to the content of its card: the numbers composed, the words of its notes."""

from __future__ import annotations

from cardgen.fit import PARTS
from cardgen.limits.kinds import CATEGORIES, Limit
from cardgen.limits.statement import gauge_notes, state_all
from cardgen.profile.assembly import (
    Learned,
    break_in_text,
    card_digest,
    model_of,
    percent_of_text,
    stamps,
)
from cardgen.profile.document import Profile
from cardgen.tables.back import Supply
from cardgen.tables.card import Card, Section
from cardgen.tables.compose import Words, compose
from cardgen.tables.printed import message_units

CAUTIONS = (
    "Computed settings. Approved flight manual, placards, markings, local rules and licensed "
    "practice come first wherever they say otherwise.",
    "Set by the gauges, then lean by the procedure of the flight manual; watch cylinder-head and "
    "oil temperature, which this card does not know.",
    "Fuel flow and airspeed are for stabilised level flight in smooth air. Plan fuel with the "
    "tolerance added, and check it against the tanks.",
    "Void after any change of engine, propeller, mixture setting or instruments.",
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
            f"{100.0 * covers.power[0] / profile.percent_of.power:.0f} to "
            f"{100.0 * covers.power[1] / profile.percent_of.power:.0f} % power."
        )
    return tuple(lines)
