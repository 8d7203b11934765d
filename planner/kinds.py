"""Kinds of quantities, and quantities as people type them: `VALUE [± TOL] UNIT [± REL %] [; ORIGIN]`.

Digits stay decimal until the SI value is complete, so that '0.1 mT' and '100 uT' are the same double. Units stand in
data/units.toml; pint is loaded only for a unit outside it.
"""

from __future__ import annotations

import math
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from decimal import Context, Decimal
from functools import lru_cache
from pathlib import Path
from types import MappingProxyType
from typing import Final

from planner.grammar import LONGEST, Amount, QuantityError, Reading, Unreadable, clean, quote, read, too_small

__all__ = [
    "ANGLE", "CHARGE_NOISE", "COUNT", "CURRENT", "DISPLACEMENT", "DRIFT", "ENERGY", "ENERGY_SQUARED", "FIELD",
    "FIELD_PER_CURRENT", "FRACTION", "FREQUENCY", "FREQUENCY_NOISE", "FREQUENCY_PER_ANGLE", "FREQUENCY_PER_FIELD",
    "GRADIENT", "KINDS", "NUMBER", "PHASE_LEVEL", "POWER", "RATIO", "RELATIVE_NOISE", "TEMPERATURE", "TIME",
    "WHITE_NOISE",
    "Kind", "Quantity", "QuantityError", "Unit", "clean", "from_toml", "in_unit", "parse",
]  # fmt: skip

MOST_COUNTED: Final = 10**18  # keeps a count inside the 64-bit integers of TOML; 1e18 in messages
ORIGINS: Final = ("measured", "datasheet", "drawing", "estimate", "guess")
OTHER_ORIGIN: Final = "other"

_EXACT: Final = Context(prec=2 * LONGEST)  # a typed number times a factor keeps all its digits
_SPELLINGS: Final = (("µ", "u"), ("μ", "u"), ("√Hz", "rtHz"), ("sqrt(Hz)", "rtHz"), ("²", "^2"), ("°", "deg"))
_TOML_TYPES: Final = {bool: "true or false", list: "a list", dict: "a table"}


@dataclass(frozen=True, slots=True)
class Unit:
    """One accepted unit: the SI value of 1, or of 0 where it is a level (ten times a decimal logarithm)."""

    factor: Decimal
    level: bool = False

    def si(self, number: Decimal) -> float:
        """The SI value of a number in this unit, infinite beyond a double."""
        if not self.level:
            return float(_EXACT.multiply(number, self.factor))
        try:
            return float(self.factor) * math.pow(10, float(number) / 10)
        except OverflowError:
            return math.inf

    def spread(self, number: Decimal, tolerance: Decimal) -> float:
        """The SI tolerance of a number, to first order for a level."""
        if self.level:
            return self.si(number) * math.log(10) / 10 * float(tolerance)
        return self.si(tolerance)

    def number(self, si: float) -> float:
        """The number that this SI value is in this unit. Raises ValueError for a level of nothing."""
        if self.level:
            return 10 * math.log10(si / float(self.factor))
        return float(_EXACT.divide(Decimal(repr(float(si))), self.factor))


@dataclass(frozen=True, slots=True)
class Kind:
    """A sort of quantity: its name in messages, the unit of its SI values and the units people may type, best first.

    `aliases` are further spellings of these units. `asks_pint`: a unit outside the table may be asked of pint.
    `whole`: only whole numbers from 0 on.
    """

    name: str
    si: str
    units: Mapping[str, Unit] = field(hash=False)
    aliases: Mapping[str, str] = field(default_factory=dict, hash=False)
    asks_pint: bool = False
    whole: bool = False

    @property
    def first_unit(self) -> str:
        """The unit that an empty cell shows."""
        return next(iter(self.units))

    @property
    def pure(self) -> bool:
        """Whether a number without a unit is accepted."""
        return "" in self.units

    @property
    def choices(self) -> str:
        """The accepted units in words, for messages."""
        named = [unit for unit in self.units if unit]
        return ", ".join(named) + (" or no unit" if self.pure else "")

    @property
    def example(self) -> str:
        """A text that would be accepted, for messages."""
        return "5" if self.whole else f"0.5 {self.first_unit}".strip()


@dataclass(frozen=True, slots=True)
class Quantity:
    """A typed quantity: the text as typed and what it means.

    `text` holds the origin too; a count such as '1e6' is written out. `value` and `tolerance` (a standard uncertainty,
    or None) are SI and of one shape; `unit` is the listed spelling of the typed unit; `origin` follows the first ';'.
    """

    text: str
    value: float | tuple[float, ...]
    tolerance: float | tuple[float, ...] | None
    unit: str
    origin: str

    @property
    def origin_class(self) -> str:
        """The class of the origin by its first word: measured, datasheet, drawing, estimate, guess or other."""
        first = re.search(r"[^\W_]+", self.origin)
        word = first[0].lower() if first else ""
        return word if word in ORIGINS else OTHER_ORIGIN


def _load() -> dict[str, tuple[str, Mapping[str, Unit]]]:
    with (Path(__file__).with_name("data") / "units.toml").open("rb") as file:
        table = tomllib.load(file, parse_float=Decimal)
    return {name: (row["si"], _units(row.get("levels", {}), row.get("units", {}))) for name, row in table.items()}


def _units(levels: Mapping[str, Decimal | int], linear: Mapping[str, Decimal | int]) -> Mapping[str, Unit]:
    made = {name: Unit(Decimal(factor), level=True) for name, factor in levels.items()}
    return MappingProxyType(made | {name: Unit(Decimal(factor)) for name, factor in linear.items()})


_TABLE: Final = _load()


def _kind(name: str, *, asks_pint: bool = False, whole: bool = False, aliases: Mapping[str, str] | None = None) -> Kind:
    si, units = _TABLE[name]
    return Kind(name, si, units, MappingProxyType(dict(aliases or {})), asks_pint, whole)


_PER_TIME: Final = {"1/h": "/h", "1/day": "/day", "1/s": "/s", "/d": "/day", "1/d": "/day"}

FIELD: Final = _kind("field", asks_pint=True)
ANGLE: Final = _kind("angle")
TIME: Final = _kind("time", asks_pint=True, aliases={"d": "day"})
FREQUENCY: Final = _kind("frequency")
FRACTION: Final = _kind("fraction")
DRIFT: Final = _kind("fraction per time", aliases=_PER_TIME | {"ppm/d": "ppm/day", "ppb/d": "ppb/day"})
RATIO: Final = _kind("ratio", aliases={"dBc": "dB"})
POWER: Final = _kind("power", asks_pint=True)
TEMPERATURE: Final = _kind("temperature", asks_pint=True)
ENERGY: Final = _kind("energy", asks_pint=True)
GRADIENT: Final = _kind("field per length")
CHARGE_NOISE: Final = _kind("charge noise")
DISPLACEMENT: Final = _kind("displacement per energy")
RELATIVE_NOISE: Final = _kind("relative noise", aliases={"/rtHz": "1/rtHz"})
FREQUENCY_NOISE: Final = _kind("frequency noise")
WHITE_NOISE: Final = _kind("white noise")
COUNT: Final = _kind("count", whole=True)
NUMBER: Final = _kind("number")
CURRENT: Final = _kind("current", asks_pint=True)
FIELD_PER_CURRENT: Final = _kind("field per current")
PHASE_LEVEL: Final = _kind("phase level")
FREQUENCY_PER_FIELD: Final = _kind("frequency per field")  # the last three are kinds of results only
FREQUENCY_PER_ANGLE: Final = _kind("frequency per angle")
ENERGY_SQUARED: Final = _kind("energy squared")

KINDS: Final = (
    FIELD, ANGLE, TIME, FREQUENCY, FRACTION, DRIFT, RATIO, POWER, TEMPERATURE, ENERGY, GRADIENT, CHARGE_NOISE,
    DISPLACEMENT, RELATIVE_NOISE, FREQUENCY_NOISE, WHITE_NOISE, COUNT, NUMBER, CURRENT, FIELD_PER_CURRENT, PHASE_LEVEL,
    FREQUENCY_PER_FIELD, FREQUENCY_PER_ANGLE, ENERGY_SQUARED,
)  # fmt: skip


def parse(kind: Kind, text: str, *, sizes: tuple[int, ...] = (1,), assume: str = "") -> Quantity:
    """The quantity that a text means. Raises QuantityError.

    `sizes` are the accepted numbers of components. `assume` is the unit that an editor adds where none is typed; the
    text of the quantity then holds it. Without it a number that needs a unit is refused.
    """
    typed, semicolon, origin = text.partition(";")
    try:
        reading = read(typed, sizes=sizes, percent_is_unit="%" in kind.units)
    except Unreadable as error:
        raise QuantityError(f"{error}, such as {kind.example}") from None
    if assume and not reading.unit:
        place = reading.unit_place
        return parse(kind, f"{text[:place]} {assume}{text[place:]}", sizes=sizes)
    name, unit = _unit_of(kind, reading.unit, typed)
    values = tuple(_si(unit, amount, typed) for amount in reading.amounts)
    tolerances = tuple(_tolerance(unit, amount, reading.relative, typed) for amount in reading.amounts)
    if kind.whole:
        typed = _written_out(reading, typed)
    return Quantity(typed + semicolon + origin, _shaped(values), _shaped_tolerance(tolerances), name, origin.strip())


def from_toml(kind: Kind, raw: object, *, sizes: tuple[int, ...] = (1,)) -> Quantity:
    """The quantity that a value of a TOML file means: a text, or a bare number for a kind without a unit.

    Raises QuantityError.
    """
    if isinstance(raw, str):
        return parse(kind, raw, sizes=sizes)
    if isinstance(raw, int | float) and not isinstance(raw, bool):
        return parse(kind, _bare(kind, raw), sizes=sizes)
    read_as = _TOML_TYPES.get(type(raw), "a date or time")
    example = f"3, 0, 8 {kind.first_unit}".strip() if 3 in sizes else kind.example
    raise QuantityError(f'{read_as} is no quantity: write a text in quotes, such as "{example}"')


def in_unit(kind: Kind, value: float, unit: str) -> float:
    """An SI value of this kind as a number in `unit`.

    Raises QuantityError for a unit of another kind, and where a level such as dBm is asked of nothing or less.
    """
    name, found = _unit_of(kind, unit, unit)
    if found.level and value <= 0:
        raise QuantityError(f"{value:g} {kind.si} has no value in {name}")
    return found.number(value)


def _bare(kind: Kind, number: float) -> str:
    if isinstance(number, int) and abs(number) > MOST_COUNTED:  # Python refuses to write out the very longest
        raise QuantityError("a whole number beyond 1e18 is too large: write a smaller one")
    if not kind.pure:
        raise QuantityError(f'{number!r} has no unit: write a text in quotes, such as "{kind.example}"')
    return repr(number)


def _unit_of(kind: Kind, typed_unit: str, text: str) -> tuple[str, Unit]:
    """Canonical spelling and meaning of a typed unit. Raises QuantityError."""
    name = typed_unit if typed_unit in kind.units else _canonical(kind, typed_unit)
    unit = kind.units.get(name) or _asked_unit(kind, name)
    if unit is None:
        raise QuantityError(_unit_refusal(kind, name, typed_unit, text))
    return name, unit


def _canonical(kind: Kind, typed_unit: str) -> str:
    spelled = typed_unit
    for other, ours in _SPELLINGS:
        spelled = spelled.replace(other, ours)
    return kind.aliases.get(spelled, spelled)


def _asked_unit(kind: Kind, name: str) -> Unit | None:
    """A unit outside the table, if this kind asks pint and pint knows it.

    The beginning of a listed unit ('m' of 'mT') is not asked: someone is about to type the rest, and loading pint takes
    half a second. Nor is one that differs from a listed unit in case only: 'MT' would be a megatesla.
    """
    plain = re.fullmatch("[A-Za-z]{1,24}", name)
    listed = any(unit.startswith(name) for unit in kind.units) or _other_case(kind, name)
    return _pint_unit(name, kind.si) if kind.asks_pint and plain and not listed else None


@lru_cache(maxsize=256)
def _pint_unit(name: str, si: str) -> Unit | None:
    try:
        from planner.unitstable import factor

        return Unit(factor(name, si))
    except Exception:  # noqa: BLE001 - pint answers odd names with many types of exception; all mean 'not this unit'
        return None


def _other_case(kind: Kind, name: str) -> str:
    """The accepted unit that `name` is when case is ignored, or ''."""
    spellings = {unit: unit for unit in kind.units} | dict(kind.aliases)
    return next((unit for spelling, unit in spellings.items() if name and spelling.lower() == name.lower()), "")


def _unit_refusal(kind: Kind, name: str, typed_unit: str, text: str) -> str:
    if not typed_unit:
        return f"{quote(text)} has no unit: add one of {kind.choices}"
    if re.match(r"[\d_'’]", typed_unit) and not typed_unit.startswith("1/"):
        return f"{quote(text)}: write the digits of a number without blanks or marks between them"
    if not any(kind.units):
        return f"{quote(typed_unit)} stands behind a {kind.name}: write the number without a unit"
    if close := _other_case(kind, name):
        return f"{quote(typed_unit)} is not a unit of {kind.name}: did you mean {close}?"
    return f"{quote(typed_unit)} is not a unit of {kind.name}: use {kind.choices}"


def _si(unit: Unit, amount: Amount, text: str) -> float:
    return _in_range(unit.si(amount.number), text, may_be_zero=not (unit.level or amount.number))


def _tolerance(unit: Unit, amount: Amount, relative: Decimal | None, text: str) -> float | None:
    if relative is not None and unit.level:
        raise QuantityError(f"{quote(text)}: the tolerance of a level stands before its unit, as in -40 ± 1 dB")
    tolerance = amount.tolerance if relative is None else _EXACT.multiply(abs(amount.number), relative)
    if tolerance is None:
        return None
    return _in_range(unit.spread(amount.number, tolerance), text, may_be_zero=not tolerance)


def _in_range(value: float, text: str, *, may_be_zero: bool) -> float:
    if math.isinf(value):
        raise QuantityError(f"{quote(text)} is too large: no computer number holds its SI value")
    if value == 0 and not may_be_zero:
        raise too_small(text)
    return value


def _written_out(reading: Reading, text: str) -> str:
    """A count in plain digits; one with a tolerance stays as typed. Raises QuantityError where it is none."""
    number = reading.amounts[0].number
    if not 0 <= number <= MOST_COUNTED or number % 1:
        raise QuantityError(f"{quote(text)} is not a count: write a whole number from 0 to 1e18")
    exact = reading.amounts[0].tolerance is None and reading.relative is None
    return f"{int(number)}" if exact else text


def _shaped(values: tuple[float, ...]) -> float | tuple[float, ...]:
    return values[0] if len(values) == 1 else values


def _shaped_tolerance(tolerances: tuple[float | None, ...]) -> float | tuple[float, ...] | None:
    known = tuple(tolerance for tolerance in tolerances if tolerance is not None)
    return _shaped(known) if known else None
