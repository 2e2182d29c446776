"""A typeset card says what the card says, the same way every time, and nothing else passes."""

from __future__ import annotations

import os
import random
import re
import subprocess
import sys
from dataclasses import replace
from io import BytesIO
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from card_factory import Sketch, make_card, make_identity
from pypdf import PdfReader
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

from cardgen.errors import ReleaseError, UsageError
from cardgen.render.beside import listings
from cardgen.render.edition import Edition
from cardgen.render.fonts import FACES, printable, width, wrap
from cardgen.render.html import to_html
from cardgen.render.html_readback import read_back_html
from cardgen.render.paper import FOLD, PAPERS, find_paper
from cardgen.render.produce import produce
from cardgen.render.readback import read_back
from cardgen.render.typesetting import typeset
from cardgen.render.wording import cell_texts
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


def sheets_of(pdf: bytes) -> list[tuple[float, float]]:
    """Return width and height of every sheet of a file [pt]."""
    boxes = (sheet.mediabox for sheet in PdfReader(BytesIO(pdf)).pages)
    return [(float(box.width), float(box.height)) for box in boxes]


def test_fronts_carry_tables_and_backs_what_stands_beside_them() -> None:
    edition = edition_of(Sketch(altitudes=8, rpm=4, tables=4, back=True))
    titles = [printable(listing.title) for listing in listings(edition.card)]
    titles += [chart.title for chart in edition.card.back.charts]
    texts = page_texts(pdf_of(edition))
    tables = [k for k, text in enumerate(texts) if "\nMixture: " in text]
    backs = [k for k, text in enumerate(texts) if any(title in text for title in titles)]
    assert tables == list(range(0, 2 * len(tables), 2))
    assert backs[: len(tables)] == list(range(1, 2 * len(tables), 2))[: len(backs)]


def test_every_listing_and_chart_is_on_the_card_and_says_where_it_goes_on() -> None:
    edition = edition_of(Sketch(altitudes=12, rpm=6, tables=2, back=True, long=True))
    for paper in PAPERS:
        texts = page_texts(pdf_of(edition, paper=paper))
        for listing in listings(edition.card):
            words = "".join(printable(listing.title).split())
            pages = [k for k, text in enumerate(texts, start=1) if words in "".join(text.split())]
            assert pages
            for here, after in pairwise(pages):
                assert f"Continued on page {after}." in texts[here - 1].replace("\n", " ")
                assert f"Continued from page {here}." in texts[after - 1].replace("\n", " ")


@pytest.mark.parametrize(
    ("name", "value"),
    [("minutes", 5.0), ("distance", 5.0)],
)
def test_page_of_another_range_is_caught(name: str, value: float) -> None:
    edition = edition_of(Sketch(reasons=0, back=True))
    table = edition.card.back.ranges[0]
    array = getattr(table, name).copy()
    array[1] += value
    ranges = (replace(table, **{name: array}), *edition.card.back.ranges[1:])
    other = replace(edition.card, back=replace(edition.card.back, ranges=ranges))
    for file, check in (
        (pdf_of(replace(edition, card=other)), read_back),
        (to_html(replace(edition, card=other)), read_back_html),
    ):
        with pytest.raises(ReleaseError, match="Range and endurance"):
            check(file, edition)


def test_page_of_another_row_or_best_setting_is_caught() -> None:
    edition = edition_of(Sketch(reasons=0, back=True))
    back = edition.card.back
    assert back.rows is not None
    row = np.where(np.isnan(back.rows.row), 0.0, back.rows.row + 2000.0)
    best = back.best[0]
    settings = replace(best.settings[0], rpm=best.settings[0].rpm + 50.0)
    for changed, words in (
        (replace(back, rows=replace(back.rows, row=row)), "Which row"),
        (
            replace(
                back, best=(replace(best, settings=(settings, *best.settings[1:])), *back.best[1:])
            ),
            "Best settings",
        ),
    ):
        other = replace(edition, card=replace(edition.card, back=changed))
        with pytest.raises(ReleaseError, match=words):
            read_back(pdf_of(other), edition)


def test_rpm_of_one_row_stay_together_on_the_broad_side_where_upright_parts_them() -> None:
    sketch = Sketch(altitudes=1, rpm=6, tables=1, reasons=0, stamps=False)
    edition = edition_of(sketch)
    pdf = pdf_of(edition, paper="a6")
    (wide, high), *_ = sheets_of(pdf)
    assert wide > high
    read_back(pdf, edition)
    upright = sheets_of(pdf_of(edition_of(replace(sketch, rpm=3)), paper="a6"))
    assert all(w < h for w, h in upright)
    assert all(w < h for w, h in sheets_of(pdf_of(edition, paper="half-letter")))


def test_sheet_of_two_says_where_to_fold() -> None:
    for paper in ("a4", "letter"):
        pages = page_texts(pdf_of(edition_of(Sketch(back=True)), paper=paper))
        assert all(FOLD in page for page in pages[::2])
        assert not any(FOLD in page for page in pages[1::2])


def test_second_units_stand_below_in_small_type_and_are_read_back() -> None:
    """Reference: 1 inHg = 33.8639 hPa, 1 US gallon = 3.785412 L (NIST SP 811), worked out here."""
    edition = edition_of(Sketch(reasons=0, tables=1, second=True))
    pdf = pdf_of(edition)
    words = [word for page in read_words(pdf) for word in page]
    table = edition.card.tables[0]
    texts = [word.text for word in words]
    cell = list(cell_texts(edition.card, table, (1, 0, 2)))
    at = next(k for k in range(len(texts)) if texts[k : k + 3] == cell)
    pressure, flow, speed = words[at + 3 : at + 6]
    assert float(pressure.text) == round(float(table.manifold_pressure[1, 0, 2]) * 33.8639)
    assert 0.0 <= float(flow.text) - float(table.fuel_flow[1, 0, 2]) * 3.785412 < 1.0
    assert 0.0 <= float(table.true_airspeed[1, 0, 2]) * 1.852 - float(speed.text) < 1.0
    assert {word.size for word in (pressure, flow, speed)} == {9.0}
    read_back(pdf, edition)
    other = edition_of(Sketch(reasons=0, tables=1))
    with pytest.raises(ReleaseError):
        read_back(pdf, other)


def test_numbers_are_never_parted_from_their_units() -> None:
    text = "limits widened by ±10 rpm, 24.0 inHg and 115 °F below it, see section 2.5, revision C"
    for measure in range(40, 200, 3):
        for line in wrap(text, "regular", size=9.0, measure=float(measure)):
            assert not re.match(r"(rpm|inHg|°F|2\.5|C$)", line)


def test_words_of_ours_are_set_with_true_signs() -> None:
    edition = edition_of(Sketch())
    card = replace(
        edition.card,
        notes=("Between -40 and 5 °C, part X-20 is as before.",),
        tables=tuple(
            replace(t, mixture_basis="115 degF rich of peak") for t in edition.card.tables
        ),
    )
    text = "\n".join(page_texts(pdf_of(replace(edition, card=card))))
    assert "115 °F rich of peak" in text
    assert "degF" not in text
    assert "\N{MINUS SIGN}40 and 5 °C, part X-20" in text
