"""Every error cardgen raises on purpose.

The tree::

    CardgenError                 exit code 1, never raised itself
    ├── UsageError           2   the command was called wrongly
    │   └── QuantityError    2   a quantity such as "24.5 inHg" cannot be read as asked
    ├── DataError            3   a profile, points or fit file is bad; carries Problems
    ├── NoSolutionError      4   the physics has no answer for what was asked
    │   └── DomainError      4   a number lies outside what a table or formula covers
    └── ReleaseError         3   a finished card could not be released, the old one stands

Errors carry fields; their text says where, what was found, what was expected and one next step.
"""

from __future__ import annotations

from collections.abc import Sequence

from cardgen.records import dataclass


@dataclass(frozen=True, slots=True, order=True)
class Problem:
    """One thing wrong in one place of one file.

    Parameters
    ----------
    file : str
        Path as the user gave it [-]
    line, column : int
        Position counted from 1; 0 where the whole file is meant [-]
    key : str
        Dotted path of the key, "" where there is none [-]
    found : str
        What is wrong, with what was found [-]
    expected : str
        What was expected instead, or what to do next; "" where `found` says it all [-]
    """

    file: str
    line: int
    column: int
    key: str
    found: str
    expected: str = ""

    def __str__(self) -> str:
        """Return the line printed to stderr."""
        place = f"{self.file}:{self.line}:{self.column}" if self.line else self.file
        key = f" {self.key}:" if self.key else ""
        expected = f", expected {self.expected}" if self.expected else ""
        return f"{place}:{key} {self.found}{expected}"


class CardgenError(Exception):
    """Root of the tree; `exit_code` is what the command line ends with."""

    exit_code = 1


class UsageError(CardgenError):
    """The command was called with options that make no sense together."""

    exit_code = 2


class QuantityError(UsageError):
    """A text is not a number with a unit of the dimension asked for.

    Parameters
    ----------
    found : str
        What was given and what is wrong with it [-]
    expected : str
        What was expected instead, with examples [-]
    """

    def __init__(self, found: str, expected: str) -> None:
        self.found = found
        self.expected = expected
        super().__init__(found, expected)

    def __str__(self) -> str:
        """Return one line saying what was found and what was expected."""
        return f"{self.found}; expected {self.expected}"


class DataError(CardgenError):
    """One or more files are bad; every problem found is in `problems`."""

    exit_code = 3

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class ReleaseError(CardgenError):
    """A finished card does not carry the computed numbers, or could not be written."""

    exit_code = 3


class NoSolutionError(CardgenError):
    """What was asked has no answer in the model."""

    exit_code = 4


class DomainError(NoSolutionError):
    """A number lies outside what a table or a formula covers."""
