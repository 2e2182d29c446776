"""The kinds of value a profile key can hold, each read from its source text and bounded."""

from __future__ import annotations

import datetime
import re
import unicodedata
from functools import cached_property
from typing import Annotated, Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import PydanticCustomError, core_schema

from cardgen.errors import QuantityError
from cardgen.records import dataclass
from cardgen.units import EXAMPLES, Dimension, parse_quantity

_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_WHOLE_NUMBER = re.compile(r"[+-]?[0-9]+")
_DATE = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")
_LONGEST_SHOWN = 60  # characters of somebody's text that an error repeats
_UNPRINTABLE = frozenset({"Cc", "Cf", "Cn", "Co", "Cs", "Zl", "Zp"})  # Unicode categories


def wrong(found: str, expected: str = "", *, at: tuple[str | int, ...] = ()) -> PydanticCustomError:
    """Return the error a validator raises.

    Parameters
    ----------
    found : str
        What is wrong, with what was found [-]
    expected : str
        What was expected instead [-]
    at : tuple of str or int
        Path, within the mapping under test, of what is to blame [-]

    Returns
    -------
    PydanticCustomError
        To be raised [-]
    """
    context = {"found": found, "expected": expected, "at": at}
    return PydanticCustomError("cardgen", "{found}, expected {expected}", context)


def shown(value: object) -> str:
    """Return a value as an error repeats it.

    Parameters
    ----------
    value : object
        Text, list or mapping [-]

    Returns
    -------
    str
        The text, cut short, or the name of its shape [-]
    """
    if isinstance(value, dict):
        return "a mapping of keys"
    if isinstance(value, list):
        return "a list"
    text = str(value)
    if len(text) > _LONGEST_SHOWN:
        text = text[:_LONGEST_SHOWN] + "…"
    return repr(text)


def scalar_text(value: object, expected: str) -> str:
    """Return the text of a scalar that is not empty.

    Parameters
    ----------
    value : object
        What stands in the file [-]
    expected : str
        What is expected there, for the error [-]

    Returns
    -------
    str
        The text without blanks around it [-]
    """
    if not isinstance(value, str):
        raise wrong(f"{shown(value)} stands here", expected)
    text = value.strip()
    if not text:
        raise wrong("has no value", expected)
    return text


@dataclass(frozen=True)
class Value:
    """Base of the annotations: pydantic calls `read`, the schema shows `json_schema`."""

    @property
    def words(self) -> str:
        """Return what may be written, for errors and for the table of keys."""
        raise NotImplementedError

    def read(self, value: object) -> Any:
        """Return the value that a scalar stands for."""
        raise NotImplementedError

    def json_schema(self) -> JsonSchemaValue:
        """Return how an editor should check the scalar."""
        raise NotImplementedError

    def __get_pydantic_core_schema__(
        self, source: object, handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        """Return the validator."""
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: core_schema.CoreSchema, handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        """Return the JSON Schema."""
        return self.json_schema()


@dataclass(frozen=True)
class Quantity(Value):
    """A number with a unit; `least` and `greatest` are bounds written the same way."""

    dimension: Dimension
    least: str
    greatest: str

    @cached_property
    def bounds(self) -> tuple[float, float]:
        """Return the bounds [SI]."""
        least = parse_quantity(self.least, dimension=self.dimension)
        return least, parse_quantity(self.greatest, dimension=self.dimension)

    @property
    def words(self) -> str:
        """Return what may be written."""
        return f"{EXAMPLES[self.dimension]}, {self.least} to {self.greatest}"

    def read(self, value: object) -> float:
        """Return the quantity [SI, rpm]."""
        example = EXAMPLES[self.dimension]
        text = scalar_text(value, example)
        if len(text) > _LONGEST_SHOWN:
            raise wrong(f"{shown(text)} is too long", example)
        try:
            quantity = parse_quantity(text, dimension=self.dimension)
        except QuantityError as error:
            raise wrong(error.found, error.expected) from None
        least, greatest = self.bounds
        # Bounds are inclusive, and the same bound in another unit may differ in its last bit.
        slack = 1e-12 * max(abs(least), abs(greatest))
        if not least - slack <= quantity <= greatest + slack:
            raise wrong(f"{text!r} is not plausible", f"{self.least} to {self.greatest}")
        return quantity

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema."""
        _, _, examples = EXAMPLES[self.dimension].partition(" such as ")
        return {
            "type": "string",
            "pattern": r"^\s*[-+−]?[0-9.]+\s*[^0-9.\s]",
            "examples": examples.split(" or "),
        }


@dataclass(frozen=True)
class Number(Value):
    """A number that has no unit."""

    least: float
    greatest: float
    whole: bool = False

    @property
    def words(self) -> str:
        """Return what may be written."""
        kind = "a whole number" if self.whole else "a number without unit"
        return f"{kind} from {self.least:g} to {self.greatest:g}"

    def read(self, value: object) -> float | int:
        """Return the number [-]."""
        text = scalar_text(value, self.words)
        pattern = _WHOLE_NUMBER if self.whole else _NUMBER
        if len(text) > _LONGEST_SHOWN or pattern.fullmatch(text) is None:
            kind = "a whole number" if self.whole else "a number"
            raise wrong(f"{shown(text)} is not {kind}", self.words)
        number = int(text) if self.whole else float(text)
        if not self.least <= number <= self.greatest:
            raise wrong(f"{text} is not plausible", self.words)
        return number

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema."""
        kind = "integer" if self.whole else "number"
        return {"type": kind, "minimum": self.least, "maximum": self.greatest}


@dataclass(frozen=True)
class Text(Value):
    """Words, printed as they stand."""

    longest: int

    @property
    def words(self) -> str:
        """Return what may be written."""
        return f"text of at most {self.longest} characters"

    def read(self, value: object) -> str:
        """Return the words, each run of blanks and line ends made one space."""
        expected = self.words
        text = " ".join(scalar_text(value, expected).split())
        odd = [character for character in text if unicodedata.category(character) in _UNPRINTABLE]
        if odd:
            raise wrong(f"character U+{ord(odd[0]):04X} cannot be printed", expected)
        if len(text) > self.longest:
            raise wrong(f"text of {len(text)} characters is too long", expected)
        return text

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema; an unquoted 0123 is a number to an editor, text to us."""
        return {"type": ["string", "number"], "maxLength": self.longest}


@dataclass(frozen=True)
class Choice(Value):
    """One of a few words."""

    among: tuple[str, ...]
    otherwise: str = ""

    @property
    def words(self) -> str:
        """Return what may be written."""
        words = ("one of " if len(self.among) > 1 else "") + ", ".join(self.among)
        return f"{words}, {self.otherwise}" if self.otherwise else words

    def read(self, value: object) -> str:
        """Return the word."""
        text = scalar_text(value, self.words)
        if text not in self.among:
            raise wrong(f"{shown(text)} is not known here", self.words)
        return text

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema."""
        return {"enum": list(self.among)}


@dataclass(frozen=True)
class FormatVersion(Choice):
    """Version of the file format."""

    among: tuple[str, ...] = ("1",)

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema; unquoted, a version is a number to an editor."""
        return {"enum": [1, "1"]}


@dataclass(frozen=True)
class Induction(Choice):
    """How the engine gets its air; only what is modelled is accepted."""

    among: tuple[str, ...] = ("natural",)

    def read(self, value: object) -> str:
        """Return the word."""
        text = scalar_text(value, self.words)
        if text in {"turbocharged", "turbonormalised", "turbonormalized", "supercharged"}:
            raise wrong(f"{text} engines are not modelled yet", self.words)
        return super().read(text)


@dataclass(frozen=True)
class YesNo(Value):
    """Yes or no."""

    @property
    def words(self) -> str:
        """Return what may be written."""
        return "yes or no"

    def read(self, value: object) -> bool:
        """Return the answer."""
        text = scalar_text(value, self.words)
        if text not in {"yes", "no", "true", "false"}:
            raise wrong(f"{shown(text)} is neither yes nor no", self.words)
        return text in {"yes", "true"}

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema; editors that read YAML 1.2 see `yes` as text."""
        return {"enum": [True, False, "yes", "no"]}


@dataclass(frozen=True)
class IsoDate(Value):
    """A calendar day as year-month-day."""

    @property
    def words(self) -> str:
        """Return what may be written."""
        return "a date such as 2026-03-14"

    def read(self, value: object) -> str:
        """Return the day as written."""
        text = scalar_text(value, self.words)
        try:
            if _DATE.fullmatch(text) is None:
                raise ValueError
            datetime.date.fromisoformat(text)
        except ValueError:
            raise wrong(f"{shown(text)} is not a date", self.words) from None
        return text

    def json_schema(self) -> JsonSchemaValue:
        """Return the JSON Schema."""
        return {"type": "string", "format": "date"}


# One word per quantity of the trade, with bounds that no light piston aeroplane lies outside of
# (common practice, no source).
Rpm = Annotated[float, Quantity("rotational speed", "500 rpm", "6000 rpm")]
RpmCorrection = Annotated[float, Quantity("rotational speed", "-300 rpm", "300 rpm")]
RpmBand = Annotated[float, Quantity("rotational speed", "0 rpm", "300 rpm")]
ManifoldPressure = Annotated[float, Quantity("pressure", "5 inHg", "60 inHg")]
PressureCorrection = Annotated[float, Quantity("pressure", "-3 inHg", "3 inHg")]
PressureBand = Annotated[float, Quantity("pressure", "0 inHg", "3 inHg")]
Power = Annotated[float, Quantity("power", "20 hp", "1500 hp")]
Fraction = Annotated[float, Quantity("fraction", "0 %", "100 %")]
PercentPower = Annotated[float, Quantity("fraction", "20 %", "100 %")]
Altitude = Annotated[float, Quantity("length", "-2000 ft", "30000 ft")]
Temperature = Annotated[float, Quantity("temperature", "-80 degC", "70 degC")]
IsaDeviation = Annotated[float, Quantity("temperature difference", "-60 degC", "60 degC")]
RichOffset = Annotated[float, Quantity("temperature difference", "0 degF", "400 degF")]
LeanOffset = Annotated[float, Quantity("temperature difference", "0 degF", "200 degF")]
Airspeed = Annotated[float, Quantity("speed", "30 kt", "400 kt")]
Wind = Annotated[float, Quantity("speed", "-150 kt", "150 kt")]
Mass = Annotated[float, Quantity("mass", "500 lb", "15000 lb")]
Duration = Annotated[float, Quantity("time", "10 s", "2 h")]
FuelVolume = Annotated[float, Quantity("volume", "0 gal", "1000 gal")]

Name = Annotated[str, Text(40)]
Words = Annotated[str, Text(120)]
Wording = Annotated[str, Text(400)]
Date = Annotated[str, IsoDate()]
Format = Annotated[str, FormatVersion()]
Flag = Annotated[bool, YesNo()]
