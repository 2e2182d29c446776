"""Generated profiles of invented aircraft, as many as a test wants, in a folder of their own."""

from __future__ import annotations

import random
import shutil
from pathlib import Path

DEMO = Path(__file__).parent.parent / "profiles"

SMALL_CARD = """card:
  rpm: [2350 rpm, 2500 rpm]
  percent_powers: [65 %]
  altitudes: [4000 ft, 8000 ft]
  mixtures: [Best power]
  masses: [2800 lb]
"""


def write_profiles(folder: Path, count: int, *, seed: int = 1, small: bool = False) -> list[Path]:
    """Write aircraft that differ in wing, drag-making gear, mass and propeller."""
    for part in ("engines", "propellers"):
        shutil.copytree(DEMO / part, folder / part)
    (folder / "aircraft").mkdir()
    rng = random.Random(seed)
    whole = (DEMO / "aircraft" / "specimen.yaml").read_text()
    head, _, card = whole.partition("\ncard:\n")
    card = card.partition("\nevidence:")[0] + "\n"  # generated aircraft have no points files
    files = []
    for place in range(count):
        text = head
        for old, new in (
            ("registration: QX-417", f"registration: QX-{place:04d}"),
            ("wing_area: 152 ft2", f"wing_area: {rng.uniform(140.0, 175.0):.1f} ft2"),
            ("wing_span: 33.6 ft", f"wing_span: {rng.uniform(32.0, 36.0):.2f} ft"),
            ("gross_mass: 3000 lb", f"gross_mass: {rng.uniform(2850.0, 3100.0):.0f} lb"),
            ("specimen-p2-77", rng.choice(("specimen-p2-77", "specimen-p3-75"))),
        ):
            if old not in text:
                raise AssertionError(f"the demonstration aircraft no longer says {old!r}")
            text = text.replace(old, new, 1)
        text += "\n" + (SMALL_CARD if small else f"card:\n{card}")
        file = folder / "aircraft" / f"plane{place:04d}.yaml"
        file.write_text(text)
        files.append(file)
    return files


def change_wing(file: Path, rng: random.Random) -> None:
    """Change one number of an aircraft, so that its card is out of date."""
    lines = [
        f"  wing_area: {rng.uniform(140.0, 175.0):.3f} ft2" if "wing_area" in line else line
        for line in file.read_text().splitlines()
    ]
    file.write_text("\n".join(lines) + "\n")
