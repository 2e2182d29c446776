"""Kneeboard cruise tables for piston aeroplanes with constant-speed propellers.

The public names below are loaded when they are first used, so that importing the package costs
nothing.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from cardgen.aircraft import Aircraft, Condition, Setting
    from cardgen.airframe import Airframe
    from cardgen.cruise import CruisePoint, CruiseStatus, balance, solve_cruise
    from cardgen.engine import Engine, Mixture, NaturalInduction
    from cardgen.errors import CardgenError, DataError, NoSolutionError, Problem, UsageError
    from cardgen.profile import Profile, load_profile
    from cardgen.propeller import Blade, Propeller, blade_from_activity_factor

__version__ = "0.1.0"

_HOMES = {
    "Aircraft": "cardgen.aircraft",
    "Airframe": "cardgen.airframe",
    "Blade": "cardgen.propeller",
    "CardgenError": "cardgen.errors",
    "Condition": "cardgen.aircraft",
    "CruisePoint": "cardgen.cruise",
    "CruiseStatus": "cardgen.cruise",
    "DataError": "cardgen.errors",
    "Engine": "cardgen.engine",
    "Mixture": "cardgen.engine",
    "NaturalInduction": "cardgen.engine",
    "NoSolutionError": "cardgen.errors",
    "Problem": "cardgen.errors",
    "Profile": "cardgen.profile",
    "Propeller": "cardgen.propeller",
    "Setting": "cardgen.aircraft",
    "UsageError": "cardgen.errors",
    "balance": "cardgen.cruise",
    "blade_from_activity_factor": "cardgen.propeller",
    "load_profile": "cardgen.profile",
    "solve_cruise": "cardgen.cruise",
}

__all__ = [
    "Aircraft",
    "Airframe",
    "Blade",
    "CardgenError",
    "Condition",
    "CruisePoint",
    "CruiseStatus",
    "DataError",
    "Engine",
    "Mixture",
    "NaturalInduction",
    "NoSolutionError",
    "Problem",
    "Profile",
    "Propeller",
    "Setting",
    "UsageError",
    "__version__",
    "balance",
    "blade_from_activity_factor",
    "load_profile",
    "solve_cruise",
]


def __getattr__(name: str) -> Any:
    """Load a public name from its module."""
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(_HOMES[name]), name)
