"""A card as a finished PDF: laid out, drawn, and read back against its own numbers."""

from __future__ import annotations

from cardgen.profile.document import Identity
from cardgen.render.edition import Edition
from cardgen.render.fonts import printable
from cardgen.render.layout import lay_out
from cardgen.render.paper import find_paper, impose
from cardgen.tables.card import Card


def typeset(
    card: Card,
    identity: Identity,
    *,
    issue: int,
    replaces: int | None = None,
    paper: str | None = None,
    compress: bool = True,
) -> bytes:
    """Return a card as a PDF.

    Parameters
    ----------
    card : Card
        What it says [-]
    identity : Identity
        Whose it is [-]
    issue : int
        Issue number printed on every page [-]
    replaces : int, optional
        Issue that this one voids [-]
    paper : str, optional
        Name of the paper; by default the one the card asks for [-]
    compress : bool
        Whether page contents are compressed [-]

    Returns
    -------
    bytes
        The file, not yet read back; the same card gives the same bytes [-]

    Raises
    ------
    ReleaseError
        A cell's state and numbers contradict each other, or a row does not fit the paper.
    UsageError
        The paper is unknown.
    """
    # Only a caller that draws pays for loading the PDF library.
    from cardgen.render.pdf import Metadata, draw  # noqa: PLC0415

    chosen = find_paper(paper or card.choices.paper)
    edition = Edition(card, identity, issue, replaces)
    pages = impose(lay_out(edition, chosen), chosen)
    registration = printable(identity.registration)
    metadata = Metadata(
        title=f"{registration} cruise card, issue {issue}",
        subject=f"Supplementary cruise settings of {registration}, {identity.date}",
        keywords=f"profile-digest {card.digest}",
    )
    return draw(pages, metadata, compress=compress)
