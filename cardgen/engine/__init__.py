"""Engine: air flow, power, fuel flow and their inverses."""

from cardgen.engine.mixture import Mixture
from cardgen.engine.model import Engine, NaturalInduction

__all__ = ["Engine", "Mixture", "NaturalInduction"]
