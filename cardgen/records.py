"""The standard `dataclass`, made fast for the frozen, slotted classes that hold numbers here.

A command lives for a third of a second, and nearly a fifth of that went into the code that the
standard decorator writes and compiles for each of some 170 classes: six functions a class that
differ in nothing but names. Here only `__init__` is compiled; the others are shared and look the
names up. The classes are dataclasses in every other way: `fields`, `replace`, `asdict`, equality
by value, hash by value, a readable `repr`, `FrozenInstanceError`, pickling.

For type checkers this *is* the standard decorator.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from dataclasses import dataclass as dataclass  # noqa: PLC0414 - the name that checkers know
else:
    from dataclasses import FrozenInstanceError
    from dataclasses import dataclass as _standard

    def dataclass(cls=None, /, *, frozen=False, slots=False, eq=True, order=False):
        """Make a class a dataclass, as `dataclasses.dataclass` does."""

        def made(plain):
            if not (frozen and slots) or order:
                return _standard(frozen=frozen, slots=slots, eq=eq, order=order)(plain)
            quick = _standard(slots=True, eq=False, repr=False)(plain)
            for name, shared in _SHARED.items():
                if name not in plain.__dict__:
                    setattr(quick, name, shared)
            if eq:
                quick.__eq__, quick.__hash__ = _equal, _hash
            return quick

        return made if cls is None else made(cls)

    def _set_once(self, name, value):
        """Let `__init__`, and pickle, fill a slot that is empty, and nobody change one."""
        if name not in self.__dataclass_fields__ or hasattr(self, name):
            raise FrozenInstanceError(f"cannot assign to field {name!r}")
        object.__setattr__(self, name, value)

    def _never(self, name):
        """Let nobody empty a slot."""
        raise FrozenInstanceError(f"cannot delete field {name!r}")

    def _values(self):
        """Return the values of all fields in order."""
        return tuple(getattr(self, name) for name in self.__dataclass_fields__)

    def _equal(self, other):
        """Compare by value with another of the same class."""
        return (
            _values(self) == _values(other) if other.__class__ is self.__class__ else NotImplemented
        )

    def _hash(self):
        """Hash by value."""
        return hash(_values(self))

    def _represent(self):
        """Write the class and its fields."""
        pairs = ", ".join(f"{name}={getattr(self, name)!r}" for name in self.__dataclass_fields__)
        return f"{self.__class__.__qualname__}({pairs})"

    _SHARED = {"__setattr__": _set_once, "__delattr__": _never, "__repr__": _represent}
