"""Invented cards of invented aircraft, for tests of pages: no model stands behind a number."""

from __future__ import annotations

import hashlib
import random
from dataclasses import dataclass
from typing import Literal

import numpy as np
from back_factory import make_back

from cardgen.limits.kinds import Source
from cardgen.profile.document import Identity, PartIdentity
from cardgen.tables.back import NOTHING_BESIDE
from cardgen.tables.card import Card, CardTable, CellState, Decimals, Reason, Section
from cardgen.tables.choices import CardChoices, SecondUnits, UnitSet

METRIC = UnitSet("hPa", "l/h", "km/h", "degC", "m", "kg")


def make_identity(*, long: bool = False) -> Identity:
    if long:
        return Identity(
            registration="ZZ-EXAMPLE-4",
            aircraft_type="Invented Longname Utility Four-Seat Retractable Mark IV (modified)",
            serial="000-1234-ABC-56789",
            operator="The Invented Valley Flying Club and Gliding Association (in formation)",
            engine=PartIdentity(
                "Examplewerk Sechszylinder EX-540-A1A5D (modified)", "L-1234567-89A", "e"
            ),
            propeller=PartIdentity(
                "Sample Airscrew SA-3-C209/78CCA-2 three-blade", "PX-000998877", "p"
            ),
            approvals=("Supplemental approval EX-00123 for the three-blade propeller, revision C",),
            handbook=Source("Pilot's handbook of the Longname Utility", "section 5", "revision 12"),
            date="2031-02-14",
            demo=True,
        )
    return Identity(
        registration="ZZ-DEMO",
        aircraft_type="Demo Four",
        serial="101",
        operator="Invented Flying Club",
        engine=PartIdentity("Demo EX-360", "E-1001", "e"),
        propeller=PartIdentity("Demo PX-74", "P-2002", "p"),
        approvals=(),
        handbook=Source("Demo Four handbook", "section 5", "revision 2"),
        date="2031-02-14",
        demo=True,
    )


@dataclass(frozen=True)
class Sketch:
    """What a fake card looks like."""

    altitudes: int = 7
    rpm: int = 4
    temperatures: int = 1
    kind: Literal["density", "pressure"] = "density"
    tables: int = 2
    reasons: int = 2
    metric: bool = False
    long: bool = False
    fitted: bool = True
    stamps: bool = True
    seed: int = 1
    back: bool = False  # listings and charts as well
    second: bool = False  # a second unit of pressure and fuel flow


REASON_TEXT = (
    "Restricted rpm range: avoid continuous operation between 2000 and 2250 rpm below 15 inHg; "
    "widened by 50 rpm because the tachometer was never measured",
    "Manifold pressure above the continuous limit at this rpm",
    "Below the least manifold pressure at this rpm",
    "This mixture is not allowed above 65 % power",
)


def make_card(sketch: Sketch = Sketch()) -> Card:
    rng = random.Random(sketch.seed)
    units = METRIC if sketch.metric else UnitSet()
    altitudes = tuple(
        float(k * (500 if sketch.metric else 2000 if sketch.altitudes <= 8 else 1000))
        for k in range(sketch.altitudes)
    )
    rpm = tuple(float(2100 + 100 * k) for k in range(sketch.rpm))
    deviations = (-20.0, 0.0, 20.0)[: sketch.temperatures] if sketch.kind == "pressure" else (0.0,)
    reasons = tuple(
        Reason(
            chr(65 + k),
            REASON_TEXT[k % 4],
            f"Demo propeller data sheet PX-{k}, section {k + 2}, revision B",
        )
        for k in range(sketch.reasons)
    )
    long = " with a rather long name given by its owner" if sketch.long else ""
    powers = (0.75, 0.65, 0.55, 0.45)
    tables = tuple(
        _table(
            rng,
            sketch,
            mixture=("Best power", "Lean of peak")[k % 2] + long,
            power=powers[(k // 2) % 4] if sketch.tables > 1 else 0.65,
            altitudes=altitudes,
            deviations=deviations,
            rpm=rpm,
        )
        for k in range(sketch.tables)
    )
    metric_second = SecondUnits("inHg", "gal/h", None)
    second = metric_second if sketch.metric else SecondUnits("hPa", "l/h", "km/h")
    choices = CardChoices(
        rpm=rpm,
        power_fraction=powers[:2],
        altitude=tuple(a * 0.3048 for a in altitudes),
        altitude_kind=sketch.kind,
        isa_deviation=deviations,
        mass=(1100.0,),
        mixtures=("Best power", "Lean of peak"),
        units=units,
        second_units=second if sketch.second else SecondUnits(),
    )
    back = NOTHING_BESIDE
    if sketch.back:
        back = make_back(choices, tables, reasons=sketch.reasons, seed=sketch.seed)
    stamps: tuple[str, ...] = ()
    if sketch.stamps:
        stamps = ("DEMONSTRATION DATA, NOT FOR FLIGHT",)
        if not sketch.fitted:
            stamps += ("NOT FITTED: PLANNING ESTIMATE ONLY",)
    return Card(
        choices=choices,
        decimals=Decimals(0, 0, 0) if sketch.metric else Decimals(),
        tables=tables,
        reasons=reasons,
        percent_of="Percent power is of Maximum continuous: 180 hp at 2700 rpm",
        stamps=stamps,
        notes=(
            "Settings are what the gauges must read. Tachometer not measured: limits widened "
            "by ±50 rpm.",
            "Tables by density altitude hold at standard humidity; the largest error on a day "
            "20 °C off standard is 0.1 inHg.",
        ),
        digest=hashlib.sha256(repr(sketch).encode()).hexdigest(),
        sections=(
            Section(
                "Limits applied",
                (
                    *(f"{r.letter} {r.text}. Source: {r.source}" for r in reasons),
                    "V_NO 125 kt calibrated: caution above. Source: Demo Four handbook, section 2.",
                ),
            ),
            Section("Not checked", ("Temperature envelope: unknown, no source states it.",)),
            Section(
                "Evidence",
                (
                    "27 handbook rows, 12 flight points; predicts unseen rows to 0.04 inHg, "
                    "0.05 gal/h, 0.5 kt rms.",
                ),
            ),
        ),
        back=back,
    )


def _table(
    rng: random.Random,
    sketch: Sketch,
    *,
    mixture: str,
    power: float,
    altitudes: tuple[float, ...],
    deviations: tuple[float, ...],
    rpm: tuple[float, ...],
) -> CardTable:
    shape = (len(altitudes), len(deviations), len(rpm))
    state = np.zeros(shape, dtype=np.int8)
    reason = np.full(shape, -1, dtype=np.int8)
    pressure = np.zeros(shape)
    flow = np.zeros(shape)
    speed = np.zeros(shape)
    percent = np.full(shape, 100.0 * power)
    scale = (33.8639, 3.785, 1.852) if sketch.metric else (1.0, 1.0, 1.0)
    places = (0, 0, 0) if sketch.metric else (1, 1, 0)
    top = max(altitudes) or 1.0
    for index in np.ndindex(*shape):
        i, j, k = index
        share = altitudes[i] / top
        asked = 18.0 + 10.0 * power - 3.0 * share - 0.8 * k + 0.4 * j
        ceiling = 29.0 - 12.0 * share
        at_full = asked > ceiling
        pressure[index] = round(min(asked, ceiling) * scale[0], places[0])
        flow[index] = round((15.0 * power + 0.2 * k) * scale[1], places[1])
        speed[index] = round((90.0 + 70.0 * power + 12.0 * share - j) * scale[2], places[2])
        if at_full:
            state[index] = CellState.FULL_THROTTLE
            percent[index] = 100.0 * power - 2.5 * (asked - ceiling)
        if share == 1.0 and k == 0:
            state[index] = CellState.OUT_OF_REACH
        elif share > 0.8 and k == 1:
            state[index] = CellState.OUTSIDE_EVIDENCE
        elif sketch.reasons and rng.random() < 0.12:
            state[index] = CellState.FORBIDDEN
            reason[index] = rng.randrange(sketch.reasons)
        if state[index] not in (CellState.VALUE, CellState.FULL_THROTTLE):
            pressure[index] = flow[index] = speed[index] = np.nan
    temperature = np.array(
        [
            [round(15.0 - 0.002 * a * (3.28 if sketch.metric else 1.0) + d) for d in deviations]
            for a in altitudes
        ],
        dtype=np.float64,
    )
    return CardTable(
        mixture=mixture,
        mixture_basis="exhaust gas 50 °C rich of peak on the leanest cylinder"
        if "power" in mixture
        else "20 °C lean of peak on the richest cylinder",
        power_fraction=power,
        mass=1100.0,
        altitude=altitudes,
        isa_deviation=deviations,
        outside_air_temperature=temperature,
        rpm=rpm,
        state=state,
        reason=reason,
        manifold_pressure=pressure,
        fuel_flow=flow,
        true_airspeed=speed,
        percent_power=percent,
        tolerance=(0.14 * scale[0], 0.21 * scale[1], 1.6 * scale[2]) if sketch.fitted else None,
    )
