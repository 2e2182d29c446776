"""Finished files of an edition, each read back before anybody gets to see it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Final

from cardgen.errors import UsageError
from cardgen.render.data import to_csv, to_json
from cardgen.render.edition import Edition
from cardgen.render.html import to_html
from cardgen.render.html_readback import read_back_html
from cardgen.render.readback import read_back
from cardgen.render.typesetting import typeset


def _pdf(edition: Edition, paper: str | None) -> bytes:
    pdf = typeset(
        edition.card,
        edition.identity,
        issue=edition.issue,
        replaces=edition.replaces,
        paper=paper,
    )
    read_back(pdf, edition)
    return pdf


def _html(edition: Edition, paper: str | None) -> bytes:
    del paper  # a screen has none
    page = to_html(edition)
    read_back_html(page, edition)
    return page


FORMATS: Final[dict[str, Callable[[Edition, str | None], bytes]]] = {
    "pdf": _pdf,
    "html": _html,
    "csv": lambda edition, paper: to_csv(edition),
    "json": lambda edition, paper: to_json(edition),
}
"""What a card can be released as; csv and json are the very texts the pages print."""


def finish(
    edition: Edition, *, formats: Sequence[str] = ("pdf",), paper: str | None = None
) -> dict[str, bytes]:
    """Return the finished files of an edition, read back.

    Parameters
    ----------
    edition : Edition
        What is being released [-]
    formats : sequence of str
        Keys of `FORMATS` [-]
    paper : str, optional
        Name of the paper; by default the one the card asks for [-]

    Returns
    -------
    dict
        Content by file suffix [-]

    Raises
    ------
    UsageError
        A format or the paper is unknown.
    ReleaseError
        A finished file does not carry exactly the numbers of the card.
    """
    for name in formats:
        if name not in FORMATS:
            raise UsageError(f"unknown format {name!r}; expected some of {', '.join(FORMATS)}")
    return {name: FORMATS[name](edition, paper) for name in formats}
