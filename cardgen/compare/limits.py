"""Limits of two aircraft side by side: what appeared, moved, vanished or is no longer stated."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, Literal

from cardgen.limits import Limits, MessageUnits
from cardgen.limits.gauges import Gauges
from cardgen.limits.kinds import CATEGORIES, Category, Limit
from cardgen.limits.statement import CATEGORY_WORDS, gauge_notes, state_all
from cardgen.records import dataclass

Kind = Literal["appeared", "moved", "vanished", "new source", "no longer stated", "now stated"]

KINDS: Final[dict[Kind, str]] = {
    "appeared": "holds now, did not hold before",
    "moved": "holds with other numbers or words",
    "vanished": "held before, does not hold now",
    "new source": "holds as before, by another source",
    "no longer stated": "was known before, is stated nowhere now: not checked",
    "now stated": "was stated nowhere before, is known now",
}
"""What can become of a limit, and what that means."""


@dataclass(frozen=True, slots=True)
class LimitChange:
    """What became of one limit; texts and sources are "" on the side that does not have it."""

    kind: Kind
    category: Category
    name: str
    old: str
    new: str
    old_source: str
    new_source: str

    def __str__(self) -> str:
        """Return the change in words."""
        old = f"{self.old} ({self.old_source})" if self.old_source else self.old
        new = f"{self.new} ({self.new_source})" if self.new_source else self.new
        if not self.old or not self.new:
            return f"{self.name} {self.kind}: {old or new}"
        return f"{self.name} {self.kind}: before {old}; now {new}"


def compare_limits(old: Limits, new: Limits, *, units: MessageUnits) -> tuple[LimitChange, ...]:
    """Return how the limits of two aircraft differ.

    Parameters
    ----------
    old, new : Limits
        Limits before and after [-]
    units : MessageUnits
        Units of the words [-]

    Returns
    -------
    tuple of LimitChange
        Kind by kind, in the order in which limits are judged; none where all are the same [-]
    """
    found: list[LimitChange] = []
    for category in CATEGORIES:
        before, after = _grouped(old, category), _grouped(new, category)
        for key in dict.fromkeys((*before, *after)):
            change = _one(category, before.get(key, ()), after.get(key, ()), units)
            if change is not None:
                found.append(change)
        found.extend(_knowing(category, old, new))
    return tuple(found)


def _grouped(limits: Limits, category: Category) -> dict[str, tuple[Limit, ...]]:
    """Return the limits of a category by name, each as all its sources state it."""
    stated: tuple[Limit, ...] = getattr(limits, category)
    groups: dict[str, tuple[Limit, ...]] = {}
    for limit in stated:
        key = limit.name.strip().casefold()
        groups[key] = (*groups.get(key, ()), limit)
    return groups


def _one(
    category: Category, old: Sequence[Limit], new: Sequence[Limit], units: MessageUnits
) -> LimitChange | None:
    """Return what became of one limit, None where nothing did."""
    name = (new or old)[0].name
    before, before_source = state_all(old, units) if old else ("", "")
    after, after_source = state_all(new, units) if new else ("", "")
    if not old or not new:
        kind: Kind = "vanished" if old else "appeared"
    elif _numbers(old) != _numbers(new):
        kind = "moved"
    elif before_source != after_source:
        kind = "new source"
    else:
        return None
    return LimitChange(kind, category, name, before, after, before_source, after_source)


def _numbers(group: Sequence[Limit]) -> list[tuple[object, ...]]:
    """Return what a limit demands, so without its source."""
    return [
        tuple(getattr(limit, field) for field in limit.__dataclass_fields__ if field != "source")
        for limit in group
    ]


def _knowing(category: Category, old: Limits, new: Limits) -> list[LimitChange]:
    """Return whether a kind of limit became known, or stopped being so."""
    sides = []
    for limits in (old, new):
        none = [item for item in limits.stated_none if item.category == category]
        known = bool(none or getattr(limits, category))
        sides.append((known, none[0].wording if none else "", str(none[0].source) if none else ""))
    (known_before, before, before_source), (known_now, now, now_source) = sides
    if known_before == known_now:
        return []
    name = CATEGORY_WORDS[category]
    unstated = "stated nowhere: look it up in the approved flight manual"
    if known_before:
        return [
            LimitChange(
                "no longer stated",
                category,
                name,
                before or "stated",
                unstated,
                before_source,
                now_source,
            )
        ]
    return [
        LimitChange("now stated", category, name, "stated nowhere", now or "stated", "", now_source)
    ]


def compare_gauges(old: Gauges, new: Gauges, *, units: MessageUnits) -> tuple[str, ...]:
    """Return how the gauges behind two cards differ.

    Parameters
    ----------
    old, new : Gauges
        Gauges before and after [-]
    units : MessageUnits
        Units of the words [-]

    Returns
    -------
    tuple of str
        None where they are the same [-]
    """
    if old == new:
        return ()
    found = []
    for before, after in zip(gauge_notes(old, units), gauge_notes(new, units), strict=True):
        if before != after:
            found.append(f"before: {before}; now: {after}")
    return tuple(found) or (
        "The errors of the gauges were measured anew; limits and settings move with them.",
    )
