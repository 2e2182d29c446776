"""Profiles: YAML in, frozen dataclasses out, every problem with its place."""

from cardgen.profile.document import FuelSupply, Identity, PartIdentity, Profile
from cardgen.profile.loading import load_profile

__all__ = ["FuelSupply", "Identity", "PartIdentity", "Profile", "load_profile"]
