"""A typeset card says what the card says, the same way every time, and nothing else passes."""

from __future__ import annotations

import os
import random
import re
import subprocess
import sys
from dataclasses import replace
from io import BytesIO
from typing import Any

import numpy as np
import pytest
from card_factory import Sketch, make_card, make_identity
from pypdf import PdfReader
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

from cardgen.errors import ReleaseError, UsageError
from cardgen.render.edition import Edition
from cardgen.render.fonts import FACES, printable, width, wrap
from cardgen.render.html import to_html
from cardgen.render.html_readback import read_back_html
from cardgen.render.paper import PAPERS, find_paper
from cardgen.render.produce import produce
from cardgen.render.readback import read_back
from cardgen.render.typesetting import typeset
from cardgen.render.words import page_texts, read_words
from cardgen.tables.card import Card, CellState, Reason, Section

RANDOM_CARDS = int(os.environ.get("CARDGEN_RANDOM_CARDS", "12"))


def random_sketch(seed: int) -> Sketch:
    rng = random.Random(seed)
    long = rng.random() < 0.5
    return Sketch(
        altitudes=rng.randint(1, 12),
        rpm=rng.randint(1, 6),
        temperatures=rng.randint(1, 3),
        kind=rng.choice(["density", "pressure"]),
        tables=rng.randint(1, 4),
        reasons=rng.randint(0, 4),
        metric=rng.random() < 0.5,
        long=long,
        fitted=rng.random() < 0.5,
        stamps=rng.random() < 0.5,
        seed=seed,
        back=rng.random() < 0.7,
        second=not long and rng.random() < 0.5,
    )


def edition_of(sketch: Sketch, *, issue: int = 2, replaces: int | None = 1) -> Edition:
    identity = replace(make_identity(long=sketch.long), demo=sketch.stamps)
    return Edition(make_card(sketch), identity, issue, replaces)


def pdf_of(edition: Edition, *, paper: str | None = None, compress: bool = True) -> bytes:
    return typeset(
        edition.card,
        edition.identity,
        issue=edition.issue,
        replaces=edition.replaces,
        paper=paper,
        compress=compress,
    )


def with_cell(card: Card, at: tuple[int, int, int], **arrays: float) -> Card:
    """Return the card with one cell of its first table changed."""
    table = card.tables[0]
    changed = {}
    for name, value in arrays.items():
        array = getattr(table, name).copy()
        array[at] = value
        changed[name] = array
    return replace(card, tables=(replace(table, **changed), *card.tables[1:]))


@pytest.mark.parametrize("seed", range(RANDOM_CARDS))
def test_every_card_reads_back_as_itself(seed: int) -> None:
    edition = edition_of(random_sketch(seed))
    for paper in ("half-letter", "a5", "a4"):
        read_back(pdf_of(edition, paper=paper), edition)


def test_largest_card_reads_back_on_every_paper_even_a_pocket_one() -> None:
    sketch = Sketch(altitudes=12, rpm=6, temperatures=3, kind="pressure", tables=1, metric=True)
    for paper in PAPERS:
        edition = edition_of(sketch)
        read_back(pdf_of(edition, paper=paper), edition)


def test_same_card_gives_same_bytes_within_and_between_processes() -> None:
    edition = edition_of(Sketch())
    first = pdf_of(edition)
    typeset(make_card(Sketch(altitudes=12, long=True)), make_identity(long=True), issue=9)
    assert pdf_of(edition_of(Sketch())) == first
    code = (
        "import hashlib, sys; sys.path.insert(0, 'tests')\n"
        "from test_render_pdf import Sketch, edition_of, pdf_of\n"
        "print(hashlib.sha256(pdf_of(edition_of(Sketch()))).hexdigest())"
    )
    hashes = {
        subprocess.run(
            [sys.executable, "-c", code],
            env=os.environ | {"PYTHONHASHSEED": seed, "PYTHONPATH": os.pathsep.join(sys.path)},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    }
    assert len(hashes) == 1


def test_file_names_its_card_and_profile_and_reads_no_clock() -> None:
    edition = edition_of(Sketch())
    metadata = PdfReader(BytesIO(pdf_of(edition))).metadata
    assert metadata is not None
    assert metadata.title == "ZZ-DEMO cruise card, issue 2"
    assert edition.card.digest in str(metadata["/Keywords"])
    assert "Supplementary" in str(metadata.subject)
    assert str(metadata["/CreationDate"]).startswith("D:2000")


def test_fonts_are_embedded() -> None:
    reader = PdfReader(BytesIO(pdf_of(edition_of(Sketch()))))
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].values():  # type: ignore[index]
            descriptor = font.get_object().get("/FontDescriptor")
            name = str(font.get_object()["/BaseFont"])
            if descriptor is None:  # the library names one standard face that no text uses
                assert name == "/Helvetica"
            else:
                assert "/FontFile2" in descriptor.get_object(), name


def test_every_changed_digit_in_a_finished_page_is_caught() -> None:
    """Corrupts digits of the page contents themselves, one at a time."""
    edition = edition_of(Sketch(altitudes=3, rpm=3, tables=1))
    good = pdf_of(edition, compress=False)
    read_back(good, edition)
    places = [
        match.start(1) + k
        for match in re.finditer(rb"\(([^()]*)\) Tj", good)
        for k, byte in enumerate(match.group(1))
        if 48 <= byte <= 57
    ]
    assert len(places) > 100
    for place in places[:: max(1, len(places) // 60)]:
        bad = bytearray(good)
        bad[place] = 48 + (bad[place] - 47) % 10
        with pytest.raises(ReleaseError, match="read-back"):
            read_back(bytes(bad), edition)


@pytest.mark.parametrize(
    ("name", "step"),
    [("manifold_pressure", 0.1), ("fuel_flow", 0.1), ("true_airspeed", 1.0)],
)
def test_page_of_another_number_is_caught_and_the_cell_named(name: str, step: float) -> None:
    edition = edition_of(Sketch(reasons=0))
    table = edition.card.tables[0]
    at = (1, 0, 2)
    assert table.state[at] == CellState.VALUE
    other = with_cell(edition.card, at, **{name: float(getattr(table, name)[at]) + step})
    with pytest.raises(ReleaseError, match=r"2000.*2300 rpm"):
        read_back(pdf_of(replace(edition, card=other)), edition)


def test_page_of_another_state_is_caught() -> None:
    edition = edition_of(Sketch())
    other = with_cell(edition.card, (1, 0, 2), state=CellState.OUT_OF_REACH)
    with pytest.raises(ReleaseError, match=r"2000.*2300 rpm"):
        read_back(pdf_of(replace(edition, card=other)), edition)


def test_forbidden_cell_never_carries_its_number() -> None:
    card = with_cell(
        make_card(Sketch(reasons=1)),
        (0, 0, 0),
        state=CellState.FORBIDDEN,
        reason=0,
        manifold_pressure=29.9,
        fuel_flow=19.9,
        true_airspeed=199.0,
    )
    text = "\n".join(page_texts(typeset(card, make_identity(), issue=1)))
    assert "29.9" not in text
    assert "19.9" not in text
    assert "199" not in text


def test_every_reason_on_a_page_is_explained_and_cited_on_that_page() -> None:
    edition = edition_of(Sketch(altitudes=12, rpm=6, tables=3, reasons=4))
    for text in page_texts(pdf_of(edition)):
        lines = text.split("\n")
        joined = " ".join(lines)
        for reason in edition.card.reasons:
            if lines.count(reason.letter):
                assert reason.text in joined
                assert reason.source in joined


def test_legend_explains_only_marks_that_occur() -> None:
    card = make_card(Sketch(altitudes=2, rpm=2, tables=1, reasons=0))
    table = card.tables[0]
    plain = replace(
        table,
        state=np.zeros_like(table.state),
        manifold_pressure=np.full(table.state.shape, 22.0),
        fuel_flow=np.full(table.state.shape, 11.0),
        true_airspeed=np.full(table.state.shape, 140.0),
    )
    text = page_texts(typeset(replace(card, tables=(plain,)), make_identity(), issue=1))[0]
    for word in ("Forbidden", "Full throttle", "Out of reach", "Outside the evidence"):
        assert word not in text


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        ({"state": CellState.VALUE, "fuel_flow": np.nan}, "holds none"),
        ({"state": CellState.FORBIDDEN, "reason": -1}, "without a reason"),
        ({"state": CellState.FORBIDDEN, "reason": 7}, "without a reason"),
        ({"state": 9}, "no known state"),
    ],
)
def test_cell_that_contradicts_itself_is_not_typeset(cell: dict[str, float], words: str) -> None:
    card = with_cell(make_card(Sketch()), (0, 0, 0), **cell)
    with pytest.raises(ReleaseError, match=words):
        typeset(card, make_identity(), issue=1)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"percent_of": " "}, "percent power"),
        ({"digest": "abc"}, "digest"),
        ({"tables": ()}, "no table"),
        ({"reasons": (Reason("A", "one", ""), Reason("A", "two", ""))}, "share a letter"),
        ({"reasons": (Reason("7", "one", ""), Reason("B", "two", ""))}, "than a letter"),
    ],
)
def test_card_without_its_marking_is_not_typeset(change: dict[str, Any], words: str) -> None:
    with pytest.raises(ReleaseError, match=words):
        typeset(replace(make_card(Sketch()), **change), make_identity(), issue=1)


@pytest.mark.parametrize("field", ["registration", "date"])
def test_card_of_nobody_or_of_no_date_is_not_typeset(field: str) -> None:
    with pytest.raises(ReleaseError, match=field):
        typeset(make_card(Sketch()), replace(make_identity(), **{field: ""}), issue=1)


def test_stamps_cannot_be_switched_off() -> None:
    card = replace(make_card(Sketch(fitted=False)), stamps=())
    for text in page_texts(typeset(card, make_identity(), issue=1)):
        assert "DEMONSTRATION DATA, NOT FOR FLIGHT" in text
        assert "NOT FITTED: PLANNING ESTIMATE ONLY" in text


def test_long_registration_stays_within_the_page() -> None:
    edition = edition_of(Sketch())
    for length in (12, 24, 60):
        identity = replace(edition.identity, registration="Z" * length)
        long = replace(edition, identity=identity)
        for paper in PAPERS:
            pdf = pdf_of(long, paper=paper)
            read_back(pdf, long)
            for page in read_words(pdf):
                assert len({(word.x, word.y) for word in page}) == len(page)


def test_finished_files_are_read_back_before_they_are_returned(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    edition = edition_of(Sketch())
    formats = ("pdf", "html", "csv", "json")

    def produced(*formats: str) -> dict[str, bytes]:
        return produce(edition.card, edition.identity, issue=2, replaces=1, formats=formats)

    assert list(produced(*formats)) == list(formats)
    other = replace(edition, card=with_cell(edition.card, (1, 0, 2), manifold_pressure=11.1))
    wrong_pdf, wrong_html = pdf_of(other), to_html(other)
    monkeypatch.setattr("cardgen.render.typesetting.typeset", lambda *_, **__: wrong_pdf)
    monkeypatch.setattr("cardgen.render.html.to_html", lambda _: wrong_html)
    for name in ("pdf", "html"):
        with pytest.raises(ReleaseError, match="read-back"):
            produced(name)


def test_number_that_was_not_rounded_before_does_not_pass_read_back() -> None:
    """The page rounds nothing: what it would round, it must not print."""
    edition = edition_of(Sketch(reasons=0))
    card = with_cell(edition.card, (1, 0, 1), manifold_pressure=23.87)
    unrounded = replace(edition, card=card)
    with pytest.raises(ReleaseError, match="manifold pressure"):
        read_back(pdf_of(unrounded), unrounded)


@pytest.mark.parametrize("field", ["registration", "issue", "replaces", "digest", "stamps"])
def test_wrong_marking_is_caught(field: str) -> None:
    edition = edition_of(Sketch())
    wrong = {
        "registration": replace(
            edition, identity=replace(edition.identity, registration="ZZ-OTHER")
        ),
        "issue": replace(edition, issue=3),
        "replaces": replace(edition, replaces=None),
        "digest": replace(edition, card=replace(edition.card, digest="0" * 64)),
        "stamps": replace(
            edition,
            identity=replace(edition.identity, demo=False),
            card=replace(edition.card, stamps=()),
        ),
    }[field]
    with pytest.raises(ReleaseError, match="does not say"):
        read_back(pdf_of(wrong), edition)


def test_missing_page_is_caught() -> None:
    from pypdf import PdfWriter  # noqa: PLC0415

    edition = edition_of(Sketch())
    writer = PdfWriter()
    for page in PdfReader(BytesIO(pdf_of(edition))).pages[:-1]:
        writer.add_page(page)
    short = BytesIO()
    writer.write(short)
    with pytest.raises(ReleaseError):
        read_back(short.getvalue(), edition)


def test_wording_that_looks_like_part_of_a_table_does_not_confuse_read_back() -> None:
    card = make_card(Sketch(altitudes=12, rpm=6, reasons=2))
    first = replace(card.reasons[0], text="Continued operation barred from 2000 to 2250\nrpm")
    words = Section("rpm", ("rpm", "2100", "Continued on and off", "65 %", "DA ft", "0", "FT"))
    odd = replace(card, reasons=(first, card.reasons[1]), sections=(words,), notes=("rpm 2100",))
    edition = Edition(odd, make_identity(), 1)
    read_back(pdf_of(edition), edition)
    read_back_html(to_html(edition), edition)


def test_file_that_is_no_pdf_is_refused() -> None:
    with pytest.raises(ReleaseError):
        read_back(b"%PDF-1.4 nonsense", edition_of(Sketch()))


def test_table_cut_over_pages_says_where_it_goes_on() -> None:
    edition = edition_of(Sketch(altitudes=12, rpm=6, tables=1, reasons=4))
    texts = page_texts(pdf_of(edition))
    assert "Continued on page 3." in texts[0]  # page 2 is the back of the sheet
    assert "Continued from page 1." in texts[2]


def test_two_tables_share_a_page_where_they_fit() -> None:
    sketch = Sketch(altitudes=4, rpm=3, tables=2, reasons=0, stamps=False)
    texts = page_texts(pdf_of(edition_of(sketch)))
    assert len(texts) == 2
    assert "Best power" in texts[0]
    assert "Lean of peak" in texts[0]


def test_two_up_sheet_carries_two_pages() -> None:
    edition = edition_of(Sketch())
    single = pdf_of(edition, paper="a5")
    double = pdf_of(edition, paper="a4")
    pages = len(page_texts(single))
    assert len(page_texts(double)) == pages
    assert len(PdfReader(BytesIO(double)).pages) == (pages + 1) // 2


def test_unknown_paper_is_refused_with_the_known_ones() -> None:
    with pytest.raises(UsageError, match="half-letter"):
        find_paper("foolscap")


def test_widths_agree_with_the_pdf_library() -> None:
    """Reference: reportlab's own TrueType reader."""
    text = "0123456789.−°±≥ AVWfi(),;/%ÄéŁ"
    for face, path in FACES.items():
        pdfmetrics.registerFont(TTFont(f"Check-{face}", str(path)))
        expected = pdfmetrics.stringWidth(text, f"Check-{face}", 10.0)
        assert width(text, face, 10.0) == pytest.approx(expected, abs=1e-6 * len(text) + 0.02)


def test_figures_of_a_face_are_equally_wide() -> None:
    """Columns of numbers align only if they are."""
    for face in FACES:
        assert len({width(figure, face, 10.0) for figure in "0123456789"}) == 1


def test_letters_a_face_lacks_are_replaced_visibly() -> None:
    assert printable("a → b") == "a to b"
    assert printable("\N{SNOWMAN}") == "?"
    assert printable("−5 °C ± 2 ≥ 1") == "−5 °C ± 2 ≥ 1"


def test_wrapping_loses_no_word_and_keeps_to_the_measure() -> None:
    text = "Restricted rpm range: avoid continuous operation between 2000\N{NO-BREAK SPACE}and 2250"
    lines = wrap(text, "regular", size=9.0, measure=90.0)
    assert " ".join(lines) == printable(text)
    assert all(width(line, "regular", 9.0) <= 90.0 for line in lines)
    assert any("2000 and" in line for line in lines)


def test_importing_the_package_loads_no_pdf_library() -> None:
    code = (
        "import sys, cardgen.render.typesetting, cardgen.render.readback, cardgen.render.html\n"
        "print([m for m in ('reportlab', 'pypdf') if m in sys.modules])"
    )
    env = os.environ | {"PYTHONPATH": os.pathsep.join(sys.path)}
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, env=env
    )
    assert done.stdout.strip() == "[]"
