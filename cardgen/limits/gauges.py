"""Gauges: what they read, what that may stand for, and how sure that is."""

from __future__ import annotations

from dataclasses import dataclass

from cardgen.airspeed import PositionError

UNMEASURED_TACHOMETER_BAND_RPM = 50.0
"""Guard band for a tachometer nobody has measured. Common practice, no source."""


@dataclass(frozen=True, slots=True)
class GaugeError:
    """Calibration of one gauge: true = indicated + correction, known to within ± `band`.

    `indicated` and `correction` are equally long; one entry is a constant correction. A gauge that
    was never measured has `measured` false, a zero correction and the stated default band.
    """

    indicated: tuple[float, ...]
    correction: tuple[float, ...]
    band: float
    measured: bool
    method: str = ""
    date: str = ""


@dataclass(frozen=True, slots=True)
class Gauges:
    """The gauges that a cruise setting is read from.

    `tachometer` in rpm, `manifold_pressure` in Pa, `fuel_flow_factor` true over indicated [-],
    `temperature_recovery` the share of the full adiabatic rise an outside-air probe shows [-]
    (None where the gauge is read as true), `position_error` None where none is stated.
    """

    tachometer: GaugeError
    manifold_pressure: GaugeError
    fuel_flow_factor: float = 1.0
    temperature_recovery: float | None = None
    position_error: PositionError | None = None
