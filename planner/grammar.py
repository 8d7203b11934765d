"""How a quantity is written: `VALUE [± TOL] UNIT [± REL %]`, three such values between commas for a vector.

Only the form is read here: digits stay decimal and the unit stays text. `kinds` knows what they mean. A text is matched
against fixed patterns of bounded length and never evaluated.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal
from typing import Final

LONGEST: Final = 80  # characters of a value, its tolerance and unit
SHOWN: Final = 60  # characters of a refused text that a message repeats

_PM: Final = r"(?:±|\+/-)"
_EXPONENT: Final = r"(?:[eE][+-]?\d+)?"
_MANTISSA: Final = r"[+-]?(?:\d+\.?\d*|\.\d+)"
_NUMBER: Final = rf"(?P<mantissa>{_MANTISSA})(?:\((?P<digits>\d+)\))?(?P<exponent>{_EXPONENT})"
_SPREAD: Final = rf"(?P<spread>[ \t]*{_PM}[ \t]*(?P<tolerance>{_MANTISSA}{_EXPONENT}))?"
_VALUE: Final = rf"[ \t]*(?P<value>{_NUMBER}{_SPREAD})[ \t]*"
_UNIT: Final = rf"(?P<unit>(?:(?!{_PM}).)*?)[ \t]*"
_RELATIVE: Final = rf"(?:{_PM}[ \t]*(?P<relative>{_MANTISSA}{_EXPONENT})[ \t]*(?P<behind>.*?)[ \t]*)?"
_INNER: Final = re.compile(_VALUE, re.ASCII)
_LAST: Final = re.compile(_VALUE + _UNIT + _RELATIVE, re.ASCII)
_THOUSANDS: Final = re.compile(r"[ \t]*[+-]?[1-9]\d{0,2}(?:,\d{3})+(?![\d,])", re.ASCII)
_NO_NUMBER: Final = re.compile(r"[ \t]*[+-]?(?:nan|inf(?:inity)?)\b", re.ASCII | re.IGNORECASE)
# Characters that count as printable and yet show nothing: Unicode's default ignorable ones and the empty braille cell.
_SELECTORS: Final = frozenset(map(chr, range(0xFE00, 0xFE10)))
_INVISIBLE: Final = _SELECTORS | frozenset("\u034f\u115f\u1160\u17b4\u17b5\u2800\u3164\uffa0")


class QuantityError(ValueError):
    """A text that is no quantity of its kind. The message is one plain sentence to act on."""


class Unreadable(QuantityError):
    """The text has not the form of a quantity; whoever knows the kind adds an example."""


@dataclass(frozen=True, slots=True)
class Amount:
    """A number and its tolerance in the typed unit, None where there is none."""

    number: Decimal
    tolerance: Decimal | None


@dataclass(frozen=True, slots=True)
class Reading:
    """What stands in a text: amounts, the unit as typed, and the relative tolerance of all amounts as a share.

    `unit_place` is where in the text a unit would be put in if none was typed.
    """

    amounts: tuple[Amount, ...]
    unit: str
    relative: Decimal | None
    unit_place: int


def clean(text: str) -> str:
    """The text with every character that is not shown (control, direction, zero width) replaced by U+FFFD."""
    if text.isascii() and text.isprintable():
        return text
    return "".join(c if c.isprintable() and c not in _INVISIBLE else "\ufffd" for c in text)


def quote(text: str) -> str:
    """A text as a message repeats it: in quotes, cleaned, and cut where it is long."""
    stripped = text[: 4 * LONGEST].strip()
    return f"'{clean(stripped if len(stripped) <= SHOWN else stripped[:SHOWN] + '...')}'"


def read(text: str, *, sizes: tuple[int, ...], percent_is_unit: bool) -> Reading:
    """Read the part of a quantity before the ';'. Raises QuantityError.

    `sizes` are the accepted numbers of components. `percent_is_unit`: in '5 ± 1 %' the '%' is the unit of both numbers
    instead of making the tolerance relative.
    """
    _refuse_unfit(text)
    _refuse_marks(text)
    *inner, last = text.split(",")
    end = _last_match(last, text)
    amounts = (*(_inner_amount(piece, text) for piece in inner), _amount(end, text))
    _refuse_number_of(amounts, sizes, text)
    return _reading(amounts, end, len(text) - len(last), text, percent_is_unit=percent_is_unit)


def _reading(
    amounts: tuple[Amount, ...], end: re.Match[str], offset: int, text: str, *, percent_is_unit: bool
) -> Reading:
    unit, relative, place = end["unit"], end["relative"], end.end("value")
    if unit == "%" and end["tolerance"] and relative is None and not percent_is_unit:
        unit, relative, place = "", end["tolerance"], end.start("spread")
        amounts = (*amounts[:-1], Amount(amounts[-1].number, None))
    share = None if relative is None else _not_negative(_decimal(relative, text), text).scaleb(-2)
    shared = _shared_tolerance(amounts, concise=bool(end["digits"]), relative=share is not None, text=text)
    return Reading(shared, unit, share, offset + place)


def _refuse_unfit(text: str) -> None:
    if not text.strip():
        raise QuantityError("no number is given: write one, then its unit")
    if len(text) > LONGEST:
        raise QuantityError(f"{quote(text)} is {len(text)} characters long: at most {LONGEST} are read before a ';'")
    blanked = text.replace("\t", " ")
    for typed, shown in zip(blanked, clean(blanked), strict=True):
        if typed != shown:
            raise QuantityError(f"{quote(text)} has a character that is not shown (U+{ord(typed):04X}): retype it")
    if re.search("[\u2010-\u2015\u2212]", text):
        raise QuantityError(f"{quote(text)} has a dash in place of a minus sign: write '-'")


def _refuse_marks(text: str) -> None:
    """Refuse commas that are no separators of components: decimal commas and thousands marks."""
    if "," not in text:
        return
    if _THOUSANDS.match(text):
        raise QuantityError(
            f"{quote(text)} could have thousands marks: write none, or in a vector a blank after each comma"
        )
    pointed = re.sub(r"(?<=\d),(?=\d)", ".", text)
    match = _LAST.fullmatch(pointed)
    if match and "," not in pointed and not re.match(r"[-+.\d]", match["unit"]):
        raise QuantityError(f"{quote(text)}: a comma is not a decimal point, write {quote(pointed)}")


def _last_match(piece: str, text: str) -> re.Match[str]:
    match = _LAST.fullmatch(piece)
    if not match:
        raise _unreadable(piece, text)
    if match["relative"] is not None and match["behind"] != "%":
        raise QuantityError(
            f"{quote(text)}: a tolerance behind the unit is relative and ends with %, any other stands before the unit"
        )
    return match


def _inner_amount(piece: str, text: str) -> Amount:
    match = _INNER.fullmatch(piece)
    if match:
        return _amount(match, text)
    if _LAST.fullmatch(piece):
        raise QuantityError(f"{quote(text)}: write unit and relative tolerance once, behind the last number")
    raise _unreadable(piece, text)


def _unreadable(piece: str, text: str) -> QuantityError:
    if _NO_NUMBER.match(piece):
        return QuantityError(f"{quote(text)} is not a number to plan with: write a finite number, or leave it out")
    if not piece.strip():
        return QuantityError(f"{quote(text)} lacks a number beside a comma")
    return Unreadable(f"{quote(piece)} does not read as a number, then its unit")


def _amount(match: re.Match[str], text: str) -> Amount:
    mantissa, digits, exponent, tolerance = match.group("mantissa", "digits", "exponent", "tolerance")
    number = _decimal(mantissa + exponent, text)
    if digits and tolerance:
        raise _two_tolerances(text)
    if digits:
        power = int(exponent[1:] or 0) - len(mantissa.partition(".")[2])
        return Amount(number, _decimal(f"{digits}e{power}", text))
    return Amount(number, _not_negative(_decimal(tolerance, text), text) if tolerance else None)


def _decimal(written: str, text: str) -> Decimal:
    rounded = float(written)
    if math.isinf(rounded):
        raise QuantityError(f"{quote(text)} is too large: write a number below 1e308")
    if rounded == 0 and re.match(r"[+-]?[0.]*[1-9]", written):
        raise too_small(text)
    return Decimal(written) if rounded else Decimal(0)


def too_small(text: str) -> QuantityError:
    """The error of a number that a double can only hold as 0."""
    return QuantityError(f"{quote(text)} is too small to tell from 0: write 0")


def _not_negative(tolerance: Decimal, text: str) -> Decimal:
    if tolerance < 0:
        raise QuantityError(f"{quote(text)} has a negative tolerance: write 0 or more")
    return tolerance


def _two_tolerances(text: str) -> QuantityError:
    return QuantityError(f"{quote(text)} has two tolerances: write one")


def _refuse_number_of(amounts: tuple[Amount, ...], sizes: tuple[int, ...], text: str) -> None:
    if len(amounts) not in sizes:
        wanted = " or ".join(str(size) for size in sizes[:-1]) + (" or " if sizes[1:] else "") + _numbers(sizes[-1])
        comma = "" if sizes == (1,) else ", with a comma between them"
        raise QuantityError(f"{quote(text)} holds {_numbers(len(amounts))}: write {wanted}{comma}")


def _numbers(count: int) -> str:
    return "1 number" if count == 1 else f"{count} numbers"


def _shared_tolerance(amounts: tuple[Amount, ...], *, concise: bool, relative: bool, text: str) -> tuple[Amount, ...]:
    """The amounts with a tolerance on all or none; one written behind the last (not as '(5)') holds for each."""
    typed = sum(amount.tolerance is not None for amount in amounts)
    if relative and typed:
        raise _two_tolerances(text)
    if typed in (0, len(amounts)):
        return amounts
    if typed == 1 and amounts[-1].tolerance is not None and not concise:
        return tuple(Amount(amount.number, amounts[-1].tolerance) for amount in amounts)
    raise QuantityError(
        f"{quote(text)} has a tolerance on some numbers only: write one on each, or one ± behind the last for all"
    )
