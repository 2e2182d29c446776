"""The package's dataclasses behave as the standard ones do."""

from __future__ import annotations

import copy
import dataclasses
import pickle

import pytest

from cardgen.engine import Mixture
from cardgen.limits.kinds import Source
from cardgen.propeller import Propeller, blade_from_activity_factor
from cardgen.records import dataclass


@dataclass(frozen=True, slots=True)
class Quick:
    """Made here."""

    a: float
    b: tuple[float, ...] = (1.0, 2.0)
    c: str = "c"


@dataclasses.dataclass(frozen=True, slots=True)
class Standard:
    """Made by the standard library."""

    a: float
    b: tuple[float, ...] = (1.0, 2.0)
    c: str = "c"


def test_it_is_a_dataclass_to_the_standard_library() -> None:
    """`fields`, `replace`, `asdict` and `is_dataclass` work alike."""
    one, other = Quick(1.0), Standard(1.0)
    assert dataclasses.is_dataclass(Quick)
    assert [f.name for f in dataclasses.fields(one)] == [f.name for f in dataclasses.fields(other)]
    assert dataclasses.asdict(one) == dataclasses.asdict(other)
    assert dataclasses.replace(one, a=2.0) == Quick(2.0)
    assert repr(one) == repr(other).replace("Standard", "Quick")


def test_equality_and_hash_go_by_value_and_class() -> None:
    """Tables of propellers are remembered by it."""
    assert Quick(1.0) == Quick(1.0)
    assert hash(Quick(1.0)) == hash(Quick(1.0)) == hash(Standard(1.0))
    assert Quick(1.0) != Quick(2.0)
    assert Quick(1.0) != Standard(1.0)
    blade = blade_from_activity_factor(100.0)
    assert len({Propeller(2.0, 2, blade, 0.2, 0.5), Propeller(2.0, 2, blade, 0.2, 0.5)}) == 1


@pytest.mark.parametrize("name", ["a", "b", "elsewhere"])
def test_nothing_can_be_changed(name: str) -> None:
    """Neither a field nor anything else."""
    with pytest.raises(dataclasses.FrozenInstanceError):
        setattr(Quick(1.0), name, 3.0)
    with pytest.raises(dataclasses.FrozenInstanceError):
        delattr(Quick(1.0), name)


def test_copies_and_pickles_are_equal() -> None:
    """Many cards are made by several processes."""
    for thing in (Quick(1.0), Mixture("m", 0.07), Source("d", "s", "r")):
        assert copy.copy(thing) == thing
        assert copy.deepcopy(thing) == thing
        assert pickle.loads(pickle.dumps(thing)) == thing


def test_missing_and_surplus_arguments_are_refused() -> None:
    """As `__init__` of any dataclass does."""
    with pytest.raises(TypeError):
        Quick()  # type: ignore[call-arg]
    with pytest.raises(TypeError):
        Quick(1.0, (), "c", 4)  # type: ignore[call-arg]
