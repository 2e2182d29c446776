"""One case: settings, gauges and limits brought together, and their judgements with words."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

import numpy as np

from cardgen.limits.finding import FindingName, FloatArray, Index, Judgement
from cardgen.limits.flown import Flown, Span, Spans
from cardgen.limits.gauges import Floats, Gauges
from cardgen.limits.judge import Judged
from cardgen.limits.kinds import Limit, Limits
from cardgen.limits.statement import state_all
from cardgen.limits.wording import (
    Measure,
    MessageUnits,
    amount,
    distance,
    in_unit,
    reading,
    unit_of,
)
from cardgen.records import dataclass

Words = Callable[[Index, float], str]
"""Part of a message that depends on the setting: its index and its margin."""


@dataclass(frozen=True, slots=True)
class Case:
    """Everything that judging a set of settings needs."""

    limits: Limits
    gauges: Gauges
    flown: Flown
    spans: Spans
    units: MessageUnits
    shape: tuple[int, ...]

    def full(self, value: Floats) -> FloatArray:
        """Return a number of the settings at full shape."""
        return np.broadcast_to(np.asarray(value, dtype=np.float64), self.shape)

    def rpm_words(self, index: Index) -> str:
        """Return the tachometer reading at one index and what it may stand for."""
        return self._reading(self.flown.indicated_rpm, self.spans.rpm, "rpm", index)

    def pressure_words(self, index: Index) -> str:
        """Return the manifold-pressure reading at one index and what it may stand for."""
        return self._reading(
            self.flown.indicated_manifold_pressure,
            self.spans.manifold_pressure,
            "pressure",
            index,
        )

    def amount(self, value: Floats, measure: Measure, index: Index) -> str:
        """Return a number of the settings at one index as text with its unit."""
        return amount(float(self.full(value)[index]), measure, units=self.units)

    def model_words(self, name: str, span: Span, measure: Measure, index: Index) -> str:
        """Return a number of the model at one index with its tolerance."""
        likely, high = float(span.likely[index]), float(span.high[index])
        text = f"{name} {amount(likely, measure, units=self.units)}"
        if high > likely:
            text += f" may be {amount(high, measure, units=self.units)}"
        return text

    def _reading(self, indicated: Floats, span: Span, measure: Measure, index: Index) -> str:
        return reading(
            float(self.full(indicated)[index]),
            float(span.low[index]),
            float(span.high[index]),
            measure=measure,
            units=self.units,
        )


Judge = Callable[[Case], Iterator[Judgement]]
"""What judges one category: nothing where the profile states no limit in it."""


def stated(
    case: Case,
    limit: FindingName,
    group: Sequence[Limit],
    *,
    judged: Judged,
    measure: Measure,
    words: Words,
    statement: str = "",
    note: str = "",
) -> Judgement:
    """Return the judgement of a limit that one or more sources state.

    Parameters
    ----------
    case : Case
        The settings [-]
    limit : FindingName
        Stable name of its kind [-]
    group : sequence of Limit
        The limit as each of its sources states it [-]
    judged : tuple of ndarray
        Verdict and margin [-]
    measure : str
        What the margin measures [-]
    words : callable
        What to say of one setting, ahead of the limit's own wording [-]
    statement : str
        The limit in words where the members' own words do not add up to it [-]
    note : str
        What the limit comes to on the gauges, for a card's legend [-]

    Returns
    -------
    Judgement
        With a message that ends in the statement and the wording of its sources [-]
    """
    combined, source = state_all(group, case.units)
    statement = statement or combined
    quoted = tuple(dict.fromkeys(f'"{each.wording}"' for each in group if each.wording))
    tail = f"; as written: {' / '.join(quoted)}" if quoted else ""
    margin = judged[1]

    def describe(index: Index) -> str:
        said = words(index, float(margin[index]))
        return f"{said}; {statement}{tail}" if said else ""

    return Judgement(
        limit=limit,
        name=group[0].name,
        statement=f"{statement}: {note}" if note else statement,
        source=source,
        verdict=judged[0],
        margin=margin,
        unit=unit_of(measure, case.units),
        to_unit=lambda value: in_unit(value, _step(measure), units=case.units),
        describe=describe,
    )


def modelled(
    case: Case,
    limit: FindingName,
    statement: str,
    *,
    judged: Judged,
    measure: Measure,
    words: Words,
    source: str = "",
    unstated: bool = False,
) -> Judgement:
    """Return the judgement of something the model or the profile's silence says.

    Parameters
    ----------
    case : Case
        The settings [-]
    limit : FindingName
        Stable name of its kind [-]
    statement : str
        What holds wherever it applies, for a card's legend [-]
    judged : tuple of ndarray
        Verdict and margin [-]
    measure : str
        What the margin measures [-]
    words : callable
        Message for one setting, "" where there is nothing to say [-]
    source : str
        Who says so [-]
    unstated : bool
        The profile states no limit of this kind [-]

    Returns
    -------
    Judgement
        The judgement [-]
    """
    margin = judged[1]
    return Judgement(
        limit=limit,
        name="",
        statement=statement,
        source=source,
        verdict=judged[0],
        margin=margin,
        unit=unit_of(measure, case.units),
        to_unit=lambda value: in_unit(value, _step(measure), units=case.units),
        describe=lambda index: words(index, float(margin[index])),
        unstated=unstated,
    )


def _step(measure: Measure) -> Measure:
    """Return the measure of a difference: a margin in temperature has no zero to shift."""
    return "temperature step" if measure == "temperature" else measure


def beyond(case: Case, margin: float, measure: Measure, *, scale: float) -> str:
    """Return where a value lies against a range, such as "40 rpm inside the limits".

    Parameters
    ----------
    case : Case
        The settings [-]
    margin : float
        Room to the nearer end, negative beyond it [SI]
    measure : str
        What is measured [-]
    scale : float
        Size of the limit: what differs from it by less than rounding is on it [SI]

    Returns
    -------
    str
        Part of a sentence [-]
    """
    if np.isnan(margin):
        return "cannot be compared"
    size = distance(margin, _step(measure), units=case.units, scale=scale)
    if not size:
        return "on the limit"
    return f"{size} {'inside' if margin > 0.0 else 'beyond'} the limit"
