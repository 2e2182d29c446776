"""A card in every format asked for, each read back before anyone sees it."""

from __future__ import annotations

from collections.abc import Sequence

from cardgen.profile.document import Identity
from cardgen.render.edition import Edition
from cardgen.tables.card import Card


def produce(
    card: Card,
    identity: Identity,
    *,
    issue: int,
    replaces: int | None,
    formats: Sequence[str],
) -> dict[str, bytes]:
    """Return the finished files of a card.

    Parameters
    ----------
    card : Card
        What it says [-]
    identity : Identity
        Whose it is [-]
    issue : int
        Its issue number [-]
    replaces : int, optional
        The issue it voids [-]
    formats : sequence of str
        Any of pdf, html, csv, json [-]

    Returns
    -------
    dict
        Content by format [-]

    Raises
    ------
    ReleaseError
        A finished page does not carry the computed numbers.
    """
    edition = Edition(card, identity, issue, replaces)
    files: dict[str, bytes] = {}
    for name in formats:
        match name:
            case "pdf":
                from cardgen.render.readback import read_back  # noqa: PLC0415 - loads pypdf
                from cardgen.render.typesetting import typeset  # noqa: PLC0415

                files[name] = typeset(card, identity, issue=issue, replaces=replaces)
                read_back(files[name], edition)
            case "html":
                from cardgen.render.html import to_html  # noqa: PLC0415
                from cardgen.render.html_readback import read_back_html  # noqa: PLC0415

                files[name] = to_html(edition)
                read_back_html(files[name], edition)
            case "csv":
                from cardgen.render.data import to_csv  # noqa: PLC0415

                files[name] = to_csv(edition)
            case "json":
                from cardgen.render.data import to_json  # noqa: PLC0415

                files[name] = to_json(edition)
            case _:
                raise ValueError(f"{name!r} is no format of a card")
    return files
