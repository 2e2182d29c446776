"""Pages, screens and data of a card; the PDF libraries load only when a PDF is made or read."""

from cardgen.render.data import content_digest, to_csv, to_json
from cardgen.render.edition import Edition
from cardgen.render.finishing import FORMATS, finish
from cardgen.render.html import to_html
from cardgen.render.html_readback import read_back_html
from cardgen.render.paper import PAPERS, find_paper
from cardgen.render.readback import read_back
from cardgen.render.release import Fingerprint, Outcome, release_card
from cardgen.render.typesetting import typeset
from cardgen.render.words import page_texts

__all__ = [
    "FORMATS",
    "PAPERS",
    "Edition",
    "Fingerprint",
    "Outcome",
    "content_digest",
    "find_paper",
    "finish",
    "page_texts",
    "read_back",
    "read_back_html",
    "release_card",
    "to_csv",
    "to_html",
    "to_json",
    "typeset",
]
