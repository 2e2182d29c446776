"""Settings held against every limit of an aircraft."""

from __future__ import annotations

from typing import Final

from cardgen.limits.case import Case, Judge, Words, modelled
from cardgen.limits.finding import Findings, Judgement, Verdict
from cardgen.limits.flight import OF_FLIGHT
from cardgen.limits.flown import Flown, true_spans
from cardgen.limits.gauges import Gauges
from cardgen.limits.judge import constant
from cardgen.limits.kinds import CATEGORIES, Category, Limits
from cardgen.limits.model_findings import BESIDE_LIMITS
from cardgen.limits.setting import OF_SETTING
from cardgen.limits.statement import CATEGORY_WORDS
from cardgen.limits.wording import MessageUnits

_JUDGES: Final[dict[Category, Judge]] = {**OF_SETTING, **OF_FLIGHT}
_TRADE_UNITS: Final = MessageUnits()


def check(
    limits: Limits, gauges: Gauges, flown: Flown, *, units: MessageUnits = _TRADE_UNITS
) -> Findings:
    """Hold settings against every limit.

    Parameters
    ----------
    limits : Limits
        What the sources state [-]
    gauges : Gauges
        The aircraft's gauges [-]
    flown : Flown
        The settings and what the model gives for them [-]
    units : MessageUnits
        Units of the messages and of the margins in findings [-]

    Returns
    -------
    Findings
        A judgement for every limit and every category that nobody stated [-]

    Notes
    -----
    An indicated value is allowed only if every true value that it may stand for is allowed. Of
    several sources for one limit the most restrictive is applied at each setting. A category
    without any limit is *unknown* unless a source says that it does not apply.
    """
    spans = true_spans(gauges, flown)
    case = Case(limits, gauges, flown, spans, units, flown.shape)
    judgements: list[Judgement] = []
    not_stated: list[str] = []
    for category in CATEGORIES:
        found = list(_JUDGES[category](case))
        if not found:
            found = [_unstated(case, category)]
            if not any(none.category == category for none in limits.stated_none):
                not_stated.append(_missing_words(case, category))
        judgements += found
    for judge in BESIDE_LIMITS:
        judgements += judge(case)
    return Findings(tuple(judgements), tuple(not_stated), case.shape)


def _missing_words(case: Case, category: Category) -> str:
    """Return in words what the profile is silent on."""
    words = CATEGORY_WORDS[category]
    return f"{words} for mixture {case.flown.mixture}" if category == "leaning" else words


def _always(text: str) -> Words:
    """Return words that are the same at every setting."""
    return lambda _index, _margin: text


def _unstated(case: Case, category: Category) -> Judgement:
    """Return the judgement of a category without limits: unknown, or stated not to apply."""
    words = CATEGORY_WORDS[category]
    for none in case.limits.stated_none:
        if none.category == category:
            text = f"{words}: none" + (f'; as written: "{none.wording}"' if none.wording else "")
            return modelled(
                case,
                category,
                text,
                judged=constant(case.shape, Verdict.INSIDE),
                measure="share",
                words=_always(text),
                source=str(none.source),
            )
    missing = f"{_missing_words(case, category)}: not stated in the profile, so not checked"
    return modelled(
        case,
        category,
        missing,
        judged=constant(case.shape, Verdict.UNKNOWN),
        measure="share",
        words=_always(f"{missing}; look it up in the approved flight manual"),
        unstated=True,
    )
