"""Limits, gauges and the one function that holds a setting against them."""

from cardgen.limits.bars import Bar, Bars, bars, bars_of
from cardgen.limits.check import check
from cardgen.limits.finding import Finding, Findings, Judgement, Verdict
from cardgen.limits.flown import Evidence, Flown
from cardgen.limits.gauges import GaugeError, Gauges
from cardgen.limits.kinds import Limits, Source
from cardgen.limits.nearby import NearbySetting, allowed_nearby
from cardgen.limits.statement import Statement, gauge_notes, statements
from cardgen.limits.wording import MessageUnits

__all__ = [
    "Bar",
    "Bars",
    "Evidence",
    "Finding",
    "Findings",
    "Flown",
    "GaugeError",
    "Gauges",
    "Judgement",
    "Limits",
    "MessageUnits",
    "NearbySetting",
    "Source",
    "Statement",
    "Verdict",
    "allowed_nearby",
    "bars",
    "bars_of",
    "check",
    "gauge_notes",
    "statements",
]
