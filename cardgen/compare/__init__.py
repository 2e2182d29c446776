"""Compare: two configurations of an aircraft, cell by cell, limit by limit."""

from __future__ import annotations

from collections.abc import Collection

from cardgen.compare.limits import LimitChange, compare_gauges, compare_limits
from cardgen.compare.settings import (
    QUANTITIES,
    Basis,
    Change,
    Side,
    bases,
    compare_settings,
)
from cardgen.compare.verdict import NAMES, Scale, rating_note, scale_of, signed, verdict
from cardgen.fit import Part
from cardgen.limits.kinds import Rating
from cardgen.records import dataclass
from cardgen.tables.choices import CardChoices
from cardgen.tables.printed import message_units
from cardgen.tables.solution import Model

__all__ = [
    "NAMES",
    "QUANTITIES",
    "Basis",
    "Change",
    "Comparison",
    "LimitChange",
    "Scale",
    "Side",
    "compare",
    "rating_note",
    "scale_of",
    "signed",
]


@dataclass(frozen=True, slots=True)
class Comparison:
    """Everything that differs between two configurations.

    Parameters
    ----------
    verdict : str
        One sentence [-]
    choices : CardChoices
        Settings compared, and the units they are told in [-]
    old_rating, new_rating : Rating
        What percent power is of [-]
    changes : tuple of Change
        Settings, basis by basis and mixture by mixture [-]
    limits : tuple of LimitChange
        Limits that differ [-]
    gauges : tuple of str
        Gauges that differ, in words [-]
    only_old, only_new : tuple of str
        Mixtures that one of them lacks [-]
    """

    verdict: str
    choices: CardChoices
    old_rating: Rating
    new_rating: Rating
    changes: tuple[Change, ...]
    limits: tuple[LimitChange, ...]
    gauges: tuple[str, ...]
    only_old: tuple[str, ...]
    only_new: tuple[str, ...]


def compare(
    old: Model, new: Model, *, choices: CardChoices, unchanged: Collection[Part]
) -> Comparison:
    """Compare two configurations.

    Parameters
    ----------
    old, new : Model
        The aircraft before and after [-]
    choices : CardChoices
        Settings to compare, those of the newer card [-]
    unchanged : collection of str
        Parts that are the same in both [-]

    Returns
    -------
    Comparison
        Settings, limits, and the verdict [-]
    """
    changes = tuple(
        change
        for basis in bases(old, new)
        for change in compare_settings(old, new, choices=choices, basis=basis, unchanged=unchanged)
    )
    units = message_units(choices.units)
    limits = compare_limits(old.limits, new.limits, units=units)
    before = {mixture.name.casefold(): mixture.name for mixture in old.subject.mixtures}
    now = {mixture.name.casefold(): mixture.name for mixture in new.subject.mixtures}
    return Comparison(
        verdict=verdict(
            changes,
            scale=scale_of(choices.units),
            old_rating=old.percent_of,
            new_rating=new.percent_of,
            limits_changed=len(limits),
            lost=sum(int(change.lost.sum()) for change in changes if change.basis == "percent"),
        ),
        choices=choices,
        old_rating=old.percent_of,
        new_rating=new.percent_of,
        changes=changes,
        limits=limits,
        gauges=compare_gauges(old.gauges, new.gauges, units=units),
        only_old=tuple(name for key, name in before.items() if key not in now),
        only_new=tuple(name for key, name in now.items() if key not in before),
    )
