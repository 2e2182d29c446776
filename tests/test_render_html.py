"""The card on a screen and as data says what the page says."""

from __future__ import annotations

import csv
import json
import re
import shutil
import struct
import subprocess
import zlib
from dataclasses import replace
from html.parser import HTMLParser
from io import StringIO
from pathlib import Path

import numpy as np
import numpy.typing as npt
import pytest
from card_factory import Sketch, make_card
from test_render_pdf import RANDOM_CARDS, edition_of, pdf_of, random_sketch, with_cell

from cardgen.errors import ReleaseError
from cardgen.render.beside import listings
from cardgen.render.data import content_digest, to_csv, to_json
from cardgen.render.html import to_html
from cardgen.render.html_readback import read_back_html
from cardgen.render.wording import SUPPLEMENTARY
from cardgen.render.words import page_texts
from cardgen.tables.card import CellState

WIDEST = Sketch(
    altitudes=12,
    rpm=6,
    temperatures=3,
    kind="pressure",
    tables=2,
    metric=True,
    long=True,
    back=True,
)
CHROMIUM = shutil.which("chromium")


@pytest.mark.parametrize("seed", range(RANDOM_CARDS))
def test_every_html_card_reads_back_as_itself(seed: int) -> None:
    edition = edition_of(random_sketch(seed))
    read_back_html(to_html(edition), edition)


def test_same_card_gives_the_same_html() -> None:
    assert to_html(edition_of(Sketch())) == to_html(edition_of(Sketch()))


def test_every_changed_digit_in_a_table_is_caught() -> None:
    edition = edition_of(Sketch(altitudes=2, rpm=2, tables=1))
    page = to_html(edition)
    read_back_html(page, edition)
    start, end = page.index(b"<thead>"), page.index(b"</table>")
    texts = re.finditer(rb">([^<>]+)<|data-says=\"([^\"]*?) at ", page[start:end])
    places = [
        start + match.start(group) + k
        for match in texts
        for group in (1, 2)
        for k, byte in enumerate(match.group(group) or b"")
        if 48 <= byte <= 57
    ]
    assert len(places) > 20
    for place in places:
        bad = bytearray(page)
        bad[place] = 48 + (bad[place] - 47) % 10
        with pytest.raises(ReleaseError):
            read_back_html(bytes(bad), edition)


def test_html_of_another_number_is_caught_and_the_cell_named() -> None:
    edition = edition_of(Sketch(reasons=0))
    other = with_cell(edition.card, (1, 0, 2), manifold_pressure=11.1)
    with pytest.raises(ReleaseError, match=r"2000.*2300 rpm"):
        read_back_html(to_html(replace(edition, card=other)), edition)


def test_forbidden_cell_never_shows_its_number_on_the_screen() -> None:
    edition = edition_of(Sketch(reasons=1))
    card = with_cell(
        edition.card,
        (0, 0, 0),
        state=CellState.FORBIDDEN,
        reason=0,
        manifold_pressure=29.9,
        fuel_flow=19.9,
    )
    for content in (to_html, to_csv, to_json):
        text = content(replace(edition, card=card)).decode()
        assert "29.9" not in text
        assert "19.9" not in text


def test_html_needs_nothing_outside_itself() -> None:
    page = to_html(edition_of(WIDEST)).decode()
    assert not re.search(r"https?:|//[a-z]|url\((?!#)|@import|<link|<img|<iframe|\ssrc=", page)
    assert "default-src 'none'" in page.replace("&#x27;", "'")


def test_words_of_the_profile_cannot_become_markup() -> None:
    edition = edition_of(Sketch())
    hostile = '<script>alert("1")</script>&amp;'
    identity = replace(edition.identity, registration=hostile)
    card = replace(edition.card, percent_of=hostile, stamps=(hostile,))
    hostile_edition = replace(edition, card=card, identity=identity)
    page = to_html(hostile_edition)
    assert page.count(b"<script>") == 1
    read_back_html(page, hostile_edition)


def test_marking_is_on_the_screen() -> None:
    edition = edition_of(Sketch(fitted=False))
    page = to_html(edition).decode()
    for text in (SUPPLEMENTARY, edition.card.digest, *edition.card.stamps):
        assert text in page


class _Tables(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.captions = 0
        self.tables = 0
        self.bare_heads = 0

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tables += tag == "table"
        self.captions += tag == "caption"
        self.bare_heads += tag == "th" and "scope" not in dict(attrs)


def test_tables_can_be_read_aloud() -> None:
    reader = _Tables()
    reader.feed(to_html(edition_of(WIDEST)).decode())
    edition = edition_of(WIDEST)
    assert reader.tables == reader.captions == 2 + len(listings(edition.card))
    assert reader.bare_heads == 0


def test_light_is_switched_without_a_script() -> None:
    page = to_html(edition_of(Sketch())).decode()
    style = page[page.index("<style>") : page.index("</style>")]
    assert "prefers-color-scheme: dark" in style
    for name in ("day", "night"):
        assert f'type="radio" name="light" id="{name}"' in page
        assert f"#{name}:checked ~ .page" in style


_MEASURE = """<script>
const form = document.getElementById("look-up");
const said = [];
for (const altitude of form.elements.altitude.options) {
  form.elements.altitude.value = altitude.value;
  form.elements.altitude.dispatchEvent(new Event("change"));
  said.push(altitude.value + "|" + form.elements.rpm.value + "|" +
    form.querySelector("output").textContent);
}
const wide = Array.from(document.querySelectorAll("td, th, caption, select, p, dd, h1, output"))
  .filter((box) => box.scrollWidth > box.clientWidth + 1 && box.clientWidth > 0).length;
document.title = JSON.stringify({
  page: document.documentElement.scrollWidth, window: window.innerWidth, wide: wide, said: said });
</script></body>"""


@pytest.mark.skipif(CHROMIUM is None, reason="no browser on this machine")
@pytest.mark.parametrize(("width", "height"), [(768, 1024), (1024, 768)])
@pytest.mark.parametrize("sketch", [Sketch(), WIDEST, Sketch(back=True, second=True)])
def test_screen_holds_the_card_without_overflow_and_looks_cells_up(
    tmp_path: Path, sketch: Sketch, width: int, height: int
) -> None:
    edition = edition_of(sketch)
    page = to_html(edition).decode()
    path = tmp_path / "card.html"
    path.write_text(page.replace("</body>", _MEASURE), encoding="utf-8")
    done = subprocess.run(
        [
            str(CHROMIUM),
            "--headless",
            "--no-sandbox",
            "--disable-gpu",
            f"--user-data-dir={tmp_path / 'browser'}",
            f"--window-size={width},{height}",
            "--dump-dom",
            path.as_uri(),
        ],
        capture_output=True,
        text=True,
        check=True,
        timeout=60,
    )
    title = re.search(r"<title>(.*?)</title>", done.stdout, re.DOTALL)
    assert title is not None
    measured = json.loads(title[1].replace("&quot;", '"'))
    assert measured["page"] <= measured["window"] == width
    assert measured["wide"] == 0
    table = edition.card.tables[0]
    assert len(measured["said"]) == len(table.altitude)
    for a, said in enumerate(measured["said"]):
        altitude, rpm, text = said.split("|")
        assert (float(altitude), float(rpm)) == (table.altitude[a], table.rpm[0])
        if table.state[a, 0, 0] <= CellState.FULL_THROTTLE:
            assert text.startswith(f"{table.manifold_pressure[a, 0, 0]:g}")
        else:
            assert not re.match(r"\d", text)


_LOOK = """<script>
const seen = (box) => getComputedStyle(box);
const light = (text) => {
  const part = text.match(/[0-9.]+/g).map(Number);
  const linear = part.slice(0, 3).map((v) => v / 255).map(
    (v) => (v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4));
  return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2];
};
const ground = (box) => {
  for (let at = box; at; at = at.parentElement) {
    const fill = seen(at).backgroundColor;
    if (fill !== "rgba(0, 0, 0, 0)" && fill !== "transparent") return fill;
  }
  return "rgb(255, 255, 255)";
};
const least = () => Math.min(...Array.from(
  document.querySelectorAll(
    "td, th, p, dd, dt, li, caption, figcaption, h1, h2, label, text, output")
).filter((box) => box.textContent.trim()).map((box) => {
  const ink = box.tagName === "text" ? seen(box).fill : seen(box).color;
  const [low, high] = [light(ink), light(ground(box))].sort((a, b) => a - b);
  return (high + 0.05) / (low + 0.05);
}));
const contrast = {};
for (const name of ["day", "night"]) {
  document.getElementById(name).click();
  contrast[name] = least();
}
const named = (box) => Boolean(
  box.getAttribute("aria-label") || (box.labels && box.labels.length) || box.textContent.trim());
document.title = JSON.stringify({
  contrast: contrast,
  unnamed: Array.from(document.querySelectorAll("input, select, svg, [role=region]"))
    .filter((box) => !named(box)).length,
  captions: Array.from(document.querySelectorAll("table")).filter((t) => !t.caption).length,
  fetched: performance.getEntriesByType("resource").length,
});
</script></body>"""


def browsed(
    page: str, folder: Path, *options: str, size: str = "768,1024"
) -> subprocess.CompletedProcess[str]:
    """Open a page in a browser without a window and without a network."""
    path = folder / "card.html"
    path.write_text(page, encoding="utf-8")
    return subprocess.run(
        [
            str(CHROMIUM),
            "--headless",
            "--no-sandbox",
            "--disable-gpu",
            "--enable-logging=stderr",
            "--host-resolver-rules=MAP * ~NOTFOUND",
            f"--user-data-dir={folder / 'browser'}",
            f"--window-size={size}",
            *options,
            path.as_uri(),
        ],
        capture_output=True,
        text=True,
        check=True,
        timeout=60,
    )


@pytest.mark.skipif(CHROMIUM is None, reason="no browser on this machine")
def test_screen_is_legible_named_silent_and_needs_no_network(tmp_path: Path) -> None:
    """WCAG 2.1 asks 7:1 of text at its strictest (success criterion 1.4.6), by day and by night;
    every control and drawing has a name (4.1.2)."""
    page = to_html(edition_of(WIDEST)).decode()
    done = browsed(page.replace("</body>", _LOOK), tmp_path, "--dump-dom")
    title = re.search(r"<title>(.*?)</title>", done.stdout, re.DOTALL)
    assert title is not None
    found = json.loads(title[1].replace("&quot;", '"'))
    assert found["contrast"]["day"] >= 7.0
    assert found["contrast"]["night"] >= 7.0
    assert (found["unnamed"], found["captions"], found["fetched"]) == (0, 0, 0)
    assert "CONSOLE" not in done.stderr, done.stderr


@pytest.mark.skipif(CHROMIUM is None, reason="no browser on this machine")
def test_night_is_dark_and_day_is_bright_on_the_screen(tmp_path: Path) -> None:
    """Read from screenshots: the ground that most of the screen has."""
    page = (
        to_html(edition_of(Sketch(back=True))).decode().replace(' id="auto" checked', ' id="auto"')
    )
    light = {}
    for name in ("day", "night"):
        chosen = page.replace(f' id="{name}"', f' id="{name}" checked')
        browsed(chosen, tmp_path, f"--screenshot={tmp_path / 'shot.png'}", size="300,200")
        light[name] = _ground((tmp_path / "shot.png").read_bytes())
    assert light == {"day": 1.0, "night": 0.0}


def _ground(png: bytes) -> float:
    """Return the median colour value of a PNG of 8 bits, 0 to 1 (PNG, ISO/IEC 15948)."""
    wide, high, _, kind = struct.unpack(">IIBB", png[16:26])
    channels = {2: 3, 6: 4}[kind]
    at, data = 8, b""
    while at < len(png):
        (length,) = struct.unpack(">I", png[at : at + 4])
        if png[at + 4 : at + 8] == b"IDAT":
            data += png[at + 8 : at + 8 + length]
        at += 12 + length
    raw = np.frombuffer(zlib.decompress(data), np.uint8).reshape(high, 1 + wide * channels)
    rows = np.zeros((high, wide, channels), np.uint8)
    before = np.zeros((wide, channels), np.uint8)
    for k in range(high):
        rows[k] = before = _unfiltered(int(raw[k, 0]), raw[k, 1:].reshape(wide, channels), before)
    return float(np.median(rows[..., :3])) / 255.0


def _unfiltered(
    kind: int, line: npt.NDArray[np.uint8], above: npt.NDArray[np.uint8]
) -> npt.NDArray[np.uint8]:
    """Return one line of a PNG with its filter undone."""
    if kind == 0:
        return line
    if kind == 1:
        return np.cumsum(line, axis=0, dtype=np.uint8)
    if kind == 2:
        return line + above
    out = np.zeros_like(line)
    left = corner = np.zeros(line.shape[1], np.int16)
    for x in range(line.shape[0]):
        up = above[x].astype(np.int16)
        if kind == 3:
            guess = (left + up) // 2
        else:
            near = np.abs(np.stack([up - corner, left - corner, left + up - 2 * corner]))
            guess = np.where(
                (near[0] <= near[1]) & (near[0] <= near[2]),
                left,
                np.where(near[1] <= near[2], up, corner),
            )
        out[x] = (line[x] + guess) % 256
        left, corner = out[x].astype(np.int16), up
    return out


def test_csv_and_json_carry_the_numbers_of_the_page() -> None:
    edition = edition_of(Sketch(altitudes=4, rpm=3, tables=1))
    rows = list(csv.DictReader(StringIO(to_csv(edition).decode())))
    cells = json.loads(to_json(edition))["tables"][0]["cells"]
    table = edition.card.tables[0]
    assert len(rows) == len(cells) == table.state.size
    page = "\n".join(page_texts(pdf_of(edition)))
    for row, cell in zip(rows, cells, strict=True):
        assert row["state"] == cell["state"]
        pressure = row["manifold_pressure_inhg"]
        if row["state"] in ("value", "full_throttle"):
            assert cell["manifold_pressure_inhg"] == float(pressure)
            assert f"{pressure}\n{row['fuel_flow_gph']}\n{row['true_airspeed_kt']}" in page
        else:
            assert pressure == ""
            assert cell["manifold_pressure_inhg"] is None


def test_every_csv_row_knows_its_configuration() -> None:
    edition = edition_of(Sketch())
    for row in csv.DictReader(StringIO(to_csv(edition).decode())):
        assert row["profile"] == edition.card.digest
        assert row["issue"] == "2"
        assert row["mixture"]


def test_columns_carry_the_unit_of_the_card() -> None:
    sketch = Sketch(kind="pressure", temperatures=2, metric=True)
    header = to_csv(edition_of(sketch)).decode().splitlines()[0].split(",")
    for name in (
        "mass_kg",
        "pressure_altitude_m",
        "isa_deviation_c",
        "oat_c",
        "manifold_pressure_hpa",
        "fuel_flow_lph",
        "true_airspeed_kmh",
    ):
        assert name in header


def test_content_digest_moves_with_any_printed_number_and_with_nothing_else() -> None:
    card = make_card(Sketch(reasons=0))
    table = card.tables[0]
    assert content_digest(card) == content_digest(replace(card, digest="0" * 64))
    for name in ("manifold_pressure", "fuel_flow", "true_airspeed"):
        value = float(getattr(table, name)[0, 0, 0]) + 1.0
        assert content_digest(with_cell(card, (0, 0, 0), **{name: value})) != content_digest(card)
