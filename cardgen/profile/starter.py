"""The profile that `cardgen new` writes: invented data to replace, every key with its meaning.

A line that begins with `#-` is a key left out: without that mark it is valid where it stands.
"""

from __future__ import annotations

from cardgen.errors import UsageError

_AIRCRAFT = """\
# One aircraft. All data here are invented: replace them, then set demo to no.
# Every quantity carries its unit: 76 in, 24.5 inHg, 1200 kg, 15 degC, 75 %.
# A line that begins with #- is a key left out; take the mark away to use it.

kind: aircraft
format: 1
demo: yes           # yes: the card says DEMONSTRATION DATA and is not for flight
date: 2026-01-31    # day this profile was last changed, printed on the card

# The parts, as paths from this file's folder. A change of propeller is a change of one line.
engine: "{engine}"
propeller: "{propeller}"

identity:
  registration: Q-DEMO         # while demo is yes it begins with Q, as nobody's registration does
  type: Invented four-seater
  serial: "0001"
  operator: Invented Flying Group
  engine_serial: E-0001        # serial numbers belong to this aircraft, models to the part files
  propeller_serial: P-0001
  approvals:                   # supplemental approvals that the configuration rests on
    - Invented supplemental approval 1
  # The approved flight manual that governs.
  handbook: {{document: Invented flight manual, section: "5", revision: "1"}}

airframe:
  wing_area: 165 ft2
  wing_span: 35 ft
  gross_mass: 2650 lb
  gear: fixed                  # fixed or retractable: where a fit starts from, 0.028 or 0.022
#-  zero_lift_drag: 0.026      # zero-lift drag coefficient, instead of that
  oswald_factor: 0.75          # span efficiency that a fit starts from
  greatest_lift_coefficient: 1.3   # flaps up; slower level flight is not shown

percent_of: Maximum continuous   # the rating that percent power is a share of

# Ways of leaning. Each has exactly one of: setting (best_power, best_economy, peak, or as_flown
# where only a fit to flights can tell), rich_of_peak, lean_of_peak, fuel_air_ratio.
mixtures:
  - name: Best power
    basis: Peak exhaust temperature, then richer until 100 degF below it   # how to set it
    rich_of_peak: 100 degF
  - name: Best economy
    basis: Leanest smooth running
    setting: best_economy
#-  - name: Lean side
#-    basis: Peak exhaust temperature, then leaner until 25 degF below it
#-    lean_of_peak: 25 degF
#-  - name: Rich
#-    basis: Full rich
#-    fuel_air_ratio: 0.085    # mass of fuel per mass of dry air

# Limits can stand in this file, the engine file and the propeller file: wherever their source
# belongs. Each has a name, the wording of its source, and the source. Where a source says that
# there is no such limit, write none with its wording. What no file states is reported as
# unknown, never as allowed. Several sources for one limit share its name; the strictest holds.
limits:
  leaning:             # how much power and manifold pressure a mixture is allowed at
    - name: Leaning
      mixture: Best economy
      greatest_power: 75 %
      greatest_manifold_pressure: 25 inHg
      wording: Lean to best economy at 75 % power and 25 inHg or less.
      source: {{document: Invented flight manual, section: "4.5", revision: "1"}}
  airspeed:            # kind V_NO (beyond it is a caution) and V_NE (beyond it is outside)
    - name: Normal operating speed
      kind: V_NO
      calibrated_airspeed: 140 kt
      wording: V_NO 140 KCAS.
      source: {{document: Invented flight manual, section: "2.2", revision: "1"}}
    - name: Never-exceed speed
      kind: V_NE
      calibrated_airspeed: 175 kt
      wording: V_NE 175 KCAS.
      source: {{document: Invented flight manual, section: "2.2", revision: "1"}}
  altitude:            # pressure altitude; least, greatest or both
    - name: Greatest altitude
      greatest: 15000 ft
      wording: Maximum operating altitude 15 000 ft.
      source: {{document: Invented flight manual, section: "2.8", revision: "1"}}
  temperature:         # outside air temperature; least, greatest or both
    - name: Outside air temperature
      least: -40 degC
      greatest: 45 degC
      wording: From -40 degC to 45 degC.
      source: {{document: Invented flight manual, section: "2.8", revision: "1"}}
#-  ratings:           # where the flight manual states other ratings than the engine file
#-    none: The ratings of the engine apply.
#-    source: {{document: Invented flight manual, section: "2.4", revision: "1"}}

# What the gauges are wrong by: "not measured", or correction (added to any reading it gives the
# true value) or points, with band (how far the truth may still lie from that, either way).
instruments:
  tachometer:
    points:
      - {{indicated: 2000 rpm, actual: 2010 rpm}}
      - {{indicated: 2600 rpm, actual: 2615 rpm}}
    band: 10 rpm
    date: 2026-01-15
    method: Optical tachometer
  manifold_pressure: not measured   # then a default band guards every limit
#-  fuel_flow_factor: 1.02     # true over indicated fuel flow
#-  temperature_recovery: 0.8  # share of the full temperature rise that the probe shows
#-  position_error:            # calibrated against indicated airspeed
#-    - {{indicated: 60 kt, calibrated: 63 kt}}
#-    - {{indicated: 160 kt, calibrated: 158 kt}}

fuel:                  # for range and endurance
  usable: 50 gal
  reserve: 7 gal

card:
  rpm: [2200 rpm, 2350 rpm, 2500 rpm]    # columns, as the tachometer reads; at most 6
  percent_powers: [55 %, 65 %, 75 %]
  altitudes: [2000 ft, 4000 ft, 6000 ft, 8000 ft, 10000 ft, 12000 ft]   # rows; at most 12
  altitude_kind: density       # density or pressure
#-  temperatures: [0 degC]     # deviations from standard, columns of a pressure-altitude card
  masses: [2400 lb]            # gross mass where left out
  mixtures: [Best power, Best economy]   # all where left out
  winds: [-20 kt, 0 kt, 20 kt]           # headwind positive
#-  relative_humidity: 50 %    # dry air where left out
  units: us                    # us, metric, or unit by unit: {{set: us, temperature: degF}} with
                               # keys set, pressure, fuel_flow, speed, temperature, altitude, mass
#-  second_units:              # in small type beside the first
#-    fuel_flow: l/h
#-    pressure: hPa
  paper: half-letter           # half-letter, A5, A6, or two-up on letter or A4
#-  break_in:                  # a fresh engine: narrows the card to the operator's band, ceiling
#-    least_power: 60 %
#-    greatest_power: 75 %
#-    greatest_altitude: 8000 ft
#-    source: {{document: Invented overhaul sheet, section: "1", revision: "1"}}

# Points files that the model is fitted to, as paths from this file's folder.
#-evidence: []
"""

_ENGINE = """\
# One type of engine. All data here are invented: replace them.
# A line that begins with #- is a key left out; take the mark away to use it.

kind: engine
format: 1
model: Invented engine
displacement: 350 in3
compression_ratio: 8.5
cylinders: 4
induction: natural             # others are not modelled yet
gear_ratio: 1                  # propeller rpm over engine rpm
fuel_density: 6.0 lb/gal

ratings:
  - name: Take-off
    power: 180 hp
    rpm: 2700 rpm
#-    manifold_pressure: 28.5 inHg   # where the source states one
    time_limit: 5 min          # left out where the rating is continuous
    wording: Take-off 180 hp at 2700 rpm, 5 minutes.
    source: {document: Invented engine manual, section: "2", revision: "1"}
  - name: Maximum continuous
    power: 175 hp
    rpm: 2600 rpm
    wording: Maximum continuous 175 hp at 2600 rpm.
    source: {document: Invented engine manual, section: "2", revision: "1"}
# The rating that full throttle gives at sea level, on a standard day, at best-power mixture: it
# sets the power level of the model. The one of greatest power where left out.
full_throttle_rating: Take-off

# See the aircraft file for what every limit has.
limits:
  rpm_range:                   # for continuous operation; least, greatest or both
    - name: Engine rpm
      least: 1800 rpm
      greatest: 2600 rpm
      wording: Continuous operation from 1800 to 2600 rpm.
      source: {document: Invented engine manual, section: "2", revision: "1"}
  manifold_pressure_curve:     # greatest continuous manifold pressure, linear between points
    - name: Manifold pressure
      points:
        - {rpm: 1800 rpm, manifold_pressure: 24 inHg}
        - {rpm: 2700 rpm, manifold_pressure: 29 inHg}
      wording: Do not exceed the line from 24 inHg at 1800 rpm to 29 inHg at 2700 rpm.
      source: {document: Invented engine manual, section: figure 3, revision: "1"}
  least_manifold_pressure:     # likewise, a list of curves with points; or, as here, none
    none: No least manifold pressure.
    source: {document: Invented engine manual, section: "2", revision: "1"}
  altitude_schedule:           # greatest manifold pressure against pressure altitude
    - name: Altitude schedule
      points:
        - {altitude: 0 ft, manifold_pressure: 29 inHg}
        - {altitude: 15000 ft, manifold_pressure: 27 inHg}
      wording: At most 29 inHg at sea level, falling to 27 inHg at 15 000 ft.
      source: {document: Invented engine manual, section: figure 4, revision: "1"}
"""

_PROPELLER = """\
# One type of propeller. All data here are invented: replace them.
# A line that begins with #- is a key left out; take the mark away to use it.

kind: propeller
format: 1
model: Invented propeller
blades: 2
diameter: 75 in                # as installed, after any cropping
# Form of the blades, one of two: the activity factor of one blade (a published blade form is
# scaled to it), or stations measured from root to tip, as in
#   stations:
#     - {radius_fraction: 0.2, chord: 4.0 in, thickness_ratio: 0.8, angle: 40 deg}
#     - ... at least four, radius_fraction rising to 1, all angles at one setting of the hub
blade:
  activity_factor: 95
stops:
  fine: 12 deg                 # least blade angle
  coarse: 30 deg               # greatest blade angle in flight
  station: 30 in               # radius at which both are quoted; 75 % of the tip where left out

# See the aircraft file for what every limit has.
limits:
  restricted_rpm:              # closed to continuous operation, both ends included
    - name: Restricted range
      low: 2140 rpm
      high: 2260 rpm
      above_manifold_pressure: 24 inHg    # closed only at and above; left out, always
#-      below_manifold_pressure: 28 inHg  # closed only at and below
#-      phase: cruise          # only in one phase: ground, take-off, climb, cruise, descent
      wording: Avoid continuous operation between 2140 and 2260 rpm at 24 inHg and above.
      source: {document: Invented propeller data sheet, section: note 1, revision: "1"}
"""


def starter(name: str, *, in_aircraft_folder: bool = True) -> dict[str, str]:
    """Return the files of a starter profile.

    Parameters
    ----------
    name : str
        What to call the profile, a file name without ending [-]
    in_aircraft_folder : bool
        Whether the aircraft file lies in the folder `aircraft/` beside `engines/` and
        `propellers/`, or above those two [-]

    Returns
    -------
    dict
        Text by path, the aircraft file first; paths start from the folder that holds all [-]

    Raises
    ------
    UsageError
        The name cannot be a file name.
    """
    if not name or name.startswith(".") or not name.isprintable() or set(name) & set('/\\:"{}'):
        raise UsageError(f"{name!r} cannot be the name of a profile, expected one such as my-plane")
    engine, propeller = f"engines/{name}-engine.yaml", f"propellers/{name}-propeller.yaml"
    folder, up = ("aircraft/", "../") if in_aircraft_folder else ("", "")
    return {
        f"{folder}{name}.yaml": _AIRCRAFT.format(engine=up + engine, propeller=up + propeller),
        engine: _ENGINE,
        propeller: _PROPELLER,
    }
