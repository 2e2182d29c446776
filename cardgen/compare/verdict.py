"""A comparison in words: what moved most, and whether by more than is known."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import numpy.typing as npt

from cardgen.compare.settings import QUANTITIES, Change
from cardgen.constants import HORSEPOWER
from cardgen.limits.kinds import Rating
from cardgen.records import dataclass
from cardgen.tables.choices import UnitSet
from cardgen.tables.printed import decimals
from cardgen.units import to_unit

FloatArray = npt.NDArray[np.float64]

NAMES: Final = ("manifold pressure", "fuel flow", "true airspeed", "range per volume of fuel")
"""`QUANTITIES` in words."""

_DISTANCES: Final = {"kt": "nm", "mph": "mi", "km/h": "km"}
_TIE: Final = 1.05  # a quantity moved more than an earlier one only if by so much more


@dataclass(frozen=True, slots=True)
class Scale:
    """How differences are printed, in the order of `QUANTITIES`.

    Parameters
    ----------
    factor : tuple of float
        What a difference [SI] is multiplied with [-]
    unit : tuple of str
        The unit that gives [-]
    places : tuple of int
        Decimal places: one finer than a card's, so that small differences are seen [-]
    """

    factor: tuple[float, float, float, float]
    unit: tuple[str, str, str, str]
    places: tuple[int, int, int, int]


def scale_of(units: UnitSet) -> Scale:
    """Return how differences are printed in the units of a card.

    Parameters
    ----------
    units : UnitSet
        Units of a card [-]

    Returns
    -------
    Scale
        Factors, units and decimal places [-]
    """
    pressure = float(to_unit(1.0, units.pressure))
    flow = float(to_unit(1.0, units.fuel_flow))
    speed = float(to_unit(1.0, units.speed))
    volume = units.fuel_flow.removesuffix("/h")
    distance = _DISTANCES.get(units.speed, units.speed)
    places = decimals(units)
    return Scale(
        factor=(pressure, flow, speed, speed / flow),
        unit=(units.pressure, units.fuel_flow, units.speed, f"{distance}/{volume}"),
        places=(places.pressure + 1, places.fuel_flow + 1, 1, 2),
    )


def verdict(
    changes: Sequence[Change],
    *,
    scale: Scale,
    old_rating: Rating,
    new_rating: Rating,
    limits_changed: int,
    lost: int,
) -> str:
    """Return a comparison in one sentence.

    Parameters
    ----------
    changes : sequence of Change
        Settings before and after [-]
    scale : Scale
        How differences are printed [-]
    old_rating, new_rating : Rating
        What percent power is of [-]
    limits_changed : int
        How many limits changed [-]
    lost : int
        How many settings were allowed before and are not now [-]

    Returns
    -------
    str
        What percent means, if that changed, what moved most and whether that is significant [-]
    """
    text = _moved_most([c for c in changes if c.basis == "percent"], scale)
    same_power = [c for c in changes if c.basis == "power"]
    if same_power:
        # A rating that changed makes two comparisons; each has its own greatest move.
        again = _moved_most(same_power, scale)
        text = f"At the same percent: {_lower(text)}; at the same power: {_lower(again)}"
    note = rating_note(old_rating, new_rating)
    if note:
        text = f"{note}. {text}"
    if limits_changed:
        limits = "1 limit" if limits_changed == 1 else f"{limits_changed} limits"
        text = f"{text}; {limits} changed"
    if lost:
        text += f"; {lost} {'setting' if lost == 1 else 'settings'} allowed before "
        text += f"{'is' if lost == 1 else 'are'} not allowed now"
    return f"{text}."


def rating_note(old: Rating, new: Rating) -> str:
    """Return that percent power means something else now, "" where it does not.

    Parameters
    ----------
    old, new : Rating
        What percent power is of [-]

    Returns
    -------
    str
        Part of a sentence [-]
    """
    if np.isclose(old.power, new.power, rtol=1e-9):
        return ""
    before, after = old.power / HORSEPOWER, new.power / HORSEPOWER
    return (
        f"A percent is another power now: 100 % is {after:.0f} hp ({new.name}), "
        f"it was {before:.0f} hp ({old.name})"
    )


def _moved_most(changes: Sequence[Change], scale: Scale) -> str:
    """Return what moved most against its tolerance."""
    taken = [change for change in changes if change.compared.any()]
    if not taken:
        return "No setting gives the power asked both before and now: nothing can be compared"
    difference = np.concatenate([change.difference[change.compared] for change in taken])
    tolerance = np.concatenate([change.tolerance[change.compared] for change in taken])
    steps = np.max(np.abs(difference), axis=0) * scale.factor * 10.0 ** np.array(scale.places)
    if np.all(steps < 0.5):
        return "No setting moved by as much as a printed step"
    ratio = np.max(np.abs(difference) / tolerance, axis=0)
    place = 0
    for other in range(1, len(QUANTITIES)):
        if ratio[other] > _TIE * ratio[place]:
            place = other
    factor, unit, places = scale.factor[place], scale.unit[place], scale.places[place]
    moved = difference[:, place] * factor
    span = _span(float(moved.min()), float(moved.max()), places, unit)
    beyond = np.abs(difference[:, place]) > tolerance[:, place]
    most = int(np.argmax(np.abs(difference[:, place]) / tolerance[:, place]))
    within = f"±{tolerance[most, place] * factor:.{places}f} {unit}"
    count, whole = int(beyond.sum()), len(beyond)
    how = (
        f"not significant, everywhere within its tolerance (such as {within})"
        if not count
        else f"significant, everywhere more than its tolerance (such as {within})"
        if count == whole
        else f"significant in {count} of {whole} settings, where it is more than its tolerance "
        f"(such as {within})"
    )
    return f"{NAMES[place].capitalize()} moved most, by {span}: {how}"


def _lower(sentence: str) -> str:
    """Return a sentence to go on with."""
    return sentence[:1].lower() + sentence[1:]


def _span(least: float, greatest: float, places: int, unit: str) -> str:
    """Return a range of differences in words."""
    low, high = signed(least, places), signed(greatest, places)
    return f"{low} {unit}" if low == high else f"{low} to {high} {unit}"


def signed(value: float, places: int) -> str:
    """Return a difference with its sign, a true minus, and no sign for zero.

    Parameters
    ----------
    value : float
        The difference [-]
    places : int
        Decimal places [-]

    Returns
    -------
    str
        Such as "+0.3" [-]
    """
    text = f"{value:+.{places}f}"
    if float(text) == 0.0:
        return text[1:]
    return text.replace("-", "\N{MINUS SIGN}")
