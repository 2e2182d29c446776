"""Findings: what holding settings against limits came to, limit by limit and over all."""

from __future__ import annotations

from collections.abc import Callable
from enum import IntEnum
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from cardgen.limits.kinds import Category
from cardgen.records import dataclass

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
VerdictArray = NDArray[np.int8]
Index = tuple[int, ...]
VerdictWord = Literal["inside", "caution", "unknown", "outside"]

FindingName = (
    Category
    | Literal[
        "leaning_at_best_power",
        "governing_range",
        "full_throttle",
        "gauge_calibration",
        "evidence",
        "break_in",
        "solution",
        "over_square",
    ]
)
"""The `limit` field of a finding. Stable: other programs read it."""


class Verdict(IntEnum):
    """What one limit says of one setting; the greater of two wins.

    A broken limit wins over everything, and what nobody stated is never taken for allowed.
    """

    INSIDE = 0
    CAUTION = 1
    UNKNOWN = 2
    OUTSIDE = 3

    @property
    def word(self) -> VerdictWord:
        """Return the word printed and written to JSON."""
        return _WORDS[self]


_WORDS: dict[Verdict, VerdictWord] = {
    Verdict.INSIDE: "inside",
    Verdict.CAUTION: "caution",
    Verdict.UNKNOWN: "unknown",
    Verdict.OUTSIDE: "outside",
}


@dataclass(frozen=True, slots=True)
class Finding:
    """What one limit says of one setting.

    `margin` is the room left in `unit`, negative where the limit is broken and None where the limit
    has no measure here, `unit` then being ""; `source` is "" where a finding comes from the model.
    """

    limit: FindingName
    verdict: VerdictWord
    message: str
    source: str
    margin: float | None
    unit: str


@dataclass(frozen=True, slots=True)
class Judgement:
    """What one limit says of every setting.

    Parameters
    ----------
    limit : FindingName
        Stable name of the kind of limit [-]
    name : str
        What the profile calls this limit, "" for findings of the model [-]
    statement : str
        The limit in words, the same at every setting [-]
    source : str
        Who states it [-]
    verdict : ndarray of int8
        A `Verdict` for each setting [-]
    margin : ndarray
        Room left, in SI of the limit's own quantity; NaN or inf where it has no measure [SI]
    unit : str
        Unit that findings give the margin in [-]
    to_unit : callable
        Turns margins into that unit [-]
    describe : callable
        Message for the setting at one index; "" where there is nothing to say [-]
    unstated : bool
        The profile states no limit of this kind [-]
    """

    limit: FindingName
    name: str
    statement: str
    source: str
    verdict: VerdictArray
    margin: FloatArray
    unit: str
    to_unit: Callable[[float], float]
    describe: Callable[[Index], str]
    unstated: bool = False


@dataclass(frozen=True, slots=True)
class Findings:
    """The judgement of every limit, in the stable order of kinds and of the profile.

    `not_stated` names in words what nobody stated, so that it could not be checked.
    """

    judgements: tuple[Judgement, ...]
    not_stated: tuple[str, ...]
    shape: tuple[int, ...]

    @property
    def verdict(self) -> VerdictArray:
        """Return the overall verdict of each setting, a `Verdict` as int8."""
        worst = np.full(self.shape, Verdict.INSIDE, dtype=np.int8)
        for judgement in self.judgements:
            np.maximum(worst, judgement.verdict, out=worst)
        return worst

    def at(self, index: Index = ()) -> tuple[Finding, ...]:
        """Return the findings for one setting, worst first, otherwise in stable order.

        Parameters
        ----------
        index : tuple of int
            Place of the setting in the arrays; () for a single setting [-]

        Returns
        -------
        tuple of Finding
            One per limit that has something to say [-]
        """
        found: list[tuple[Verdict, Finding]] = []
        for judgement in self.judgements:
            message = judgement.describe(index)
            if not message:
                continue
            verdict = Verdict(int(judgement.verdict[index]))
            margin = float(judgement.margin[index])
            measured = bool(np.isfinite(margin))
            finding = Finding(
                limit=judgement.limit,
                verdict=verdict.word,
                message=message,
                source=judgement.source,
                margin=judgement.to_unit(margin) if measured else None,
                unit=judgement.unit if measured else "",
            )
            found.append((verdict, finding))
        return tuple(finding for _, finding in sorted(found, key=lambda pair: -pair[0]))

    def verdict_at(self, index: Index = ()) -> VerdictWord:
        """Return the overall verdict of one setting as a word.

        Parameters
        ----------
        index : tuple of int
            Place of the setting in the arrays; () for a single setting [-]

        Returns
        -------
        str
            inside, caution, unknown or outside [-]
        """
        return Verdict(max((int(j.verdict[index]) for j in self.judgements), default=0)).word
