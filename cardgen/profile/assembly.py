"""From a profile, and a fit where there is one, to what the tables compute with."""

from __future__ import annotations

from cardgen.constants import HORSEPOWER
from cardgen.fit import Knowledge, Subject, knowledge_from_profile
from cardgen.profile.digest import digest_of
from cardgen.profile.document import Profile
from cardgen.records import dataclass
from cardgen.tables.choices import BreakIn, CardChoices
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
