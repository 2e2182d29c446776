"""Pictures of the demonstration card for the README: `python -m tests.pictures`.

Needs `pdftoppm` (poppler) and `chromium`, and writes out/pictures/card.png, back.png, chart.png and
screen.png.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

from cardgen.cli.loading import load
from cardgen.profile.card_content import card_of
from cardgen.render.beside import listings
from cardgen.render.fonts import printable
from cardgen.render.produce import produce
from cardgen.render.words import page_texts
from cardgen.tables.card import CellState

ROOT = Path(__file__).parent.parent
PROFILE = ROOT / "profiles" / "aircraft" / "specimen.yaml"
FOLDER = ROOT / "out" / "pictures"
RESOLUTION = 110  # of a page [dots per inch]
SCREEN = (1024, 1300)


def main() -> int:
    """Write the four pictures; return the exit code."""
    missing = [tool for tool in ("pdftoppm", "chromium") if shutil.which(tool) is None]
    if missing:
        print(f"not there: {', '.join(missing)}", file=sys.stderr)  # noqa: T201
        return 1
    profile, learned = load(str(PROFILE), fit_file=None, no_fit=False)
    card = card_of(profile, learned)
    files = produce(card, profile.identity, issue=1, replaces=None, formats=("pdf", "html"))
    # The table with most forbidden cells shows most of what a card can say.
    table = max(card.tables, key=lambda one: int((one.state == CellState.FORBIDDEN).sum()))
    pages = page_texts(files["pdf"])
    wanted = {
        "card": f"{100.0 * table.power_fraction:g} %\n{table.mixture}",
        "back": next(
            printable(one.title) for one in listings(card) if one.title.startswith("Range")
        ),
        "chart": card.back.charts[0].title,
    }
    FOLDER.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "card.pdf").write_bytes(files["pdf"])
        (folder / "card.html").write_bytes(files["html"])
        for picture, text in wanted.items():
            page = next(k for k, words in enumerate(pages, start=1) if text in words)
            _page(folder / "card.pdf", page, FOLDER / picture)
        _screen(folder, FOLDER / "screen.png")
    return 0


def _page(pdf: Path, page: int, target: Path) -> None:
    place = ["-f", str(page), "-l", str(page), "-singlefile"]
    command = ["pdftoppm", "-gray", "-png", "-r", str(RESOLUTION), *place, str(pdf), str(target)]
    subprocess.run(command, check=True)


def _screen(folder: Path, target: Path) -> None:
    """Photograph the card for the screen by night."""
    page = (folder / "card.html").read_text(encoding="utf-8")
    night = page.replace(' id="auto" checked', ' id="auto"').replace(
        ' id="night"', ' id="night" checked'
    )
    (folder / "night.html").write_text(night, encoding="utf-8")
    subprocess.run(
        [
            "chromium",
            "--headless",
            "--no-sandbox",
            "--disable-gpu",
            "--hide-scrollbars",
            f"--user-data-dir={folder / 'browser'}",
            f"--window-size={SCREEN[0]},{SCREEN[1]}",
            f"--screenshot={target}",
            (folder / "night.html").as_uri(),
        ],
        check=True,
        capture_output=True,
        timeout=120,
    )


if __name__ == "__main__":
    raise SystemExit(main())
