"""What is being released: a card, whose it is, and which issue."""

from __future__ import annotations

from dataclasses import dataclass

from cardgen.profile.document import Identity
from cardgen.tables.card import Card


@dataclass(frozen=True, slots=True, eq=False)
class Edition:
    """One issue of one card; `replaces` is the issue it voids.

    Compared and hashed by identity, because a card holds arrays: widths measured once for an
    edition are remembered while its pages are planned.
    """

    card: Card
    identity: Identity
    issue: int
    replaces: int | None = None
