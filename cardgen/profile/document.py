"""What a profile says once it is read: frozen, SI, everything the other layers need."""

from __future__ import annotations

from pathlib import Path

from cardgen.aircraft import Aircraft
from cardgen.engine import Mixture
from cardgen.limits.gauges import Gauges
from cardgen.limits.kinds import Limits, Rating, Source
from cardgen.records import dataclass
from cardgen.tables.choices import CardChoices


@dataclass(frozen=True, slots=True)
class PartIdentity:
    """Maker's designation and serial number of a part, and the file it came from."""

    model: str
    serial: str
    file: str


@dataclass(frozen=True, slots=True)
class Identity:
    """Whose numbers these are."""

    registration: str
    aircraft_type: str
    serial: str
    operator: str
    engine: PartIdentity
    propeller: PartIdentity
    approvals: tuple[str, ...]
    handbook: Source
    date: str  # ISO date the owner gives the profile; printed, so that no clock is read
    demo: bool


@dataclass(frozen=True, slots=True)
class FuelSupply:
    """Usable fuel and the reserve that range and endurance leave of it [m3]."""

    usable: float
    reserve: float


@dataclass(frozen=True, slots=True)
class Profile:
    """One aircraft, read and checked."""

    path: Path
    name: str
    identity: Identity
    aircraft: Aircraft
    gross_mass: float  # [kg]
    percent_of: Rating
    mixtures: tuple[Mixture, ...]
    as_flown: tuple[str, ...]  # names of mixtures whose fuel-air ratio only a fit can tell
    limits: Limits
    gauges: Gauges
    card: CardChoices
    fuel: FuelSupply | None
    winds: tuple[float, ...]  # head positive [m/s]
    evidence: tuple[Path, ...]
    digest: str  # of everything that can change a number, so not of the identity
    part_digests: dict[str, str]  # by part, see `cardgen.profile.digest`
