"""The invented handbook of the demonstration aeroplane: what `hidden_truth` says, rounded.

Run as a program it writes `profiles/aircraft/specimen-handbook.csv` again.
"""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from hidden_truth import Truth, fly

FILE = Path(__file__).parents[1] / "profiles" / "aircraft" / "specimen-handbook.csv"
MIXTURES = ("Best power", "Economy")
HEADER = """\
# Invented handbook of an invented aeroplane. Not for flight.
# Specimen SP-4R flight manual, section 5, revision 7: cruise settings, level flight, true values.
# Where full throttle gives less than the percent power asked, the row is full throttle.
pressure_altitude_ft,isa_deviation_c,rpm,map_inhg,percent_power,fuel_flow_gph,tas_kt,weight_lb,mixture,source
"""


def lines() -> Iterator[str]:
    """Yield the rows of the handbook."""
    truth = Truth()
    for mixture in range(len(MIXTURES)):
        for rpm in (2100, 2300, 2500):
            for altitude in (0, 4000, 8000, 12000, 16000):
                for percent in (55, 65, 75):
                    text, full = line(truth, altitude, 0, rpm, percent, 2800, mixture)
                    yield text
                    if full:
                        break  # the higher powers would be the same row again
        for deviation in (-20, 20):
            for altitude in (0, 4000, 8000, 12000, 16000):
                yield line(truth, altitude, deviation, 2300, 65, 2800, mixture)[0]
        for weight in (2500, 3000):
            for altitude in (4000, 12000):
                yield line(truth, altitude, 0, 2300, 65, weight, mixture)[0]


def line(
    truth: Truth,
    altitude: int,
    deviation: int,
    rpm: int,
    percent: int,
    weight: int,
    mixture: int,
) -> tuple[str, bool]:
    """Return one row, and whether it is at full throttle."""
    point = fly(truth, altitude, deviation, rpm, weight, mixture, percent=percent)
    text = (
        f"{altitude},{deviation},{rpm},{point.map_inhg:.1f},{percent},{point.fuel_flow_gph:.1f},"
        f"{point.tas_kt:.0f},{weight},{MIXTURES[mixture]},handbook"
    )
    return text, point.full_throttle


if __name__ == "__main__":
    FILE.write_text(HEADER + "\n".join(lines()) + "\n")
