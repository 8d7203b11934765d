"""Values of givens: what a given accepts, from TOML or as typed, and the sentence when it does not."""

from __future__ import annotations

from datetime import date
from difflib import get_close_matches

from planner.declare import Form, Given
from planner.kinds import MOST_COUNTED, Kind, Quantity, QuantityError, clean, from_toml, in_unit, parse

Value = Quantity | str
LARGEST_SIZE = 1e30  # in the first unit of the kind; squares and products of what lies below stay finite
LONGEST_TEXT = 500  # characters of a note


class GivenError(ValueError):
    """A value that a given does not accept; its text is a sentence to act on."""


def read_value(given: Given, raw: object, *, assume: str = "") -> Value:
    """A value as the given accepts it, from a TOML value or a typed text. Raises GivenError.

    `assume` is the unit that an editor adds to a bare number.
    """
    match given.form:
        case Form.TEXT:
            return _text(raw)
        case Form.DATE:
            return _date(raw)
        case Form.CHOICE:
            return _choice(given, raw)
    assert given.kind is not None
    try:
        if isinstance(raw, str):
            quantity = parse(given.kind, raw, sizes=given.sizes, assume=assume)
        else:
            quantity = from_toml(given.kind, raw, sizes=given.sizes)
    except QuantityError as error:
        raise GivenError(str(error)) from None
    _check_bounds(given, quantity)
    _check_size(given.kind, quantity)
    return quantity


def nearest(word: str, known: list[str]) -> str:
    """A hint at the nearest known word, or nothing."""
    close = get_close_matches(word, known, n=1, cutoff=0.6)
    return f"; did you mean {close[0]}?" if close else ""


def bounds_text(given: Given, unit: str) -> str:
    """What the given accepts, in words: 'more than 0 mT and at most 5e+04 mT'; empty without bounds."""
    kind = given.kind
    if kind is None:
        return ""
    words = (("more than", given.above), ("at least", given.least), ("less than", given.below), ("at most", given.most))
    return " and ".join(f"{word} {_bound(kind, bound, unit)}" for word, bound in words if bound is not None)


def _bound(kind: Kind, bound: float, unit: str) -> str:
    if kind.si == "1" and unit not in kind.units:
        unit = ""
    try:
        return f"{in_unit(kind, bound, unit):.4g} {unit}".rstrip()
    except (ValueError, ZeroDivisionError):  # a level has no value for nothing
        return f"{bound:.4g} {kind.si}"


def _check_size(kind: Kind, quantity: Quantity) -> None:
    """Refuse slips of the exponent, whose squares no computer number holds."""
    unit = kind.units[kind.first_unit]
    scale = 1.0 if unit.level else float(unit.factor)
    numbers = (*_numbers(quantity.value), *_numbers(quantity.tolerance or ()))
    if not all(number == 0 or 1 / LARGEST_SIZE <= abs(number) / scale <= LARGEST_SIZE for number in numbers):
        named = kind.si if unit.level else kind.first_unit
        raise GivenError(
            f"'{quantity.text}' is out of range: write at most {f'1e30 {named}'.strip()} and, where it is "
            f"not 0, at least {f'1e-30 {named}'.strip()}"
        )


def _check_bounds(given: Given, quantity: Quantity) -> None:
    values = _numbers(quantity.value)
    fits = all(
        (given.above is None or value > given.above)
        and (given.least is None or value >= given.least)
        and (given.below is None or value < given.below)
        and (given.most is None or value <= given.most)
        for value in values
    )
    if not fits:
        raise GivenError(
            f"'{quantity.text}' is out of range: {given.help.split(';')[0]} must be {bounds_text(given, quantity.unit)}"
        )
    if given.nonzero and not any(values):
        raise GivenError(f"'{quantity.text}' is out of range: it must not be 0")


def _text(raw: object) -> str:
    if not isinstance(raw, str):
        raise GivenError(f"{_shown(raw)} is not a text: write it in quotes")
    text = clean(raw.replace("\n", " ")).strip()
    if len(text) > LONGEST_TEXT:
        raise GivenError(f"the text has {len(text)} characters: use at most {LONGEST_TEXT}")
    return text


def _date(raw: object) -> str:
    if isinstance(raw, date):
        return raw.isoformat()[:10]
    try:
        return date.fromisoformat(raw.strip() if isinstance(raw, str) else "").isoformat()
    except ValueError:
        raise GivenError(f"{_shown(raw)} is not a date: write year-month-day, as 2027-02-01") from None


def _choice(given: Given, raw: object) -> str:
    words = ", ".join(given.options)
    text = raw.strip() if isinstance(raw, str) else None
    if text in given.options:
        return str(text)
    hint = nearest(text, list(given.options)) if text else ""
    raise GivenError(f"{_shown(raw)} is not one of the choices: use one of {words}{hint}")


def _shown(raw: object) -> str:
    if isinstance(raw, bool):
        return str(raw).lower()
    if isinstance(raw, list | dict):
        return "a list" if isinstance(raw, list) else "a table"
    if isinstance(raw, int) and abs(raw) > MOST_COUNTED:  # Python refuses to write out the very longest
        return "a whole number beyond 1e18"
    return f"'{clean(str(raw))[:80]}'"


def number(quantity: Quantity) -> float:
    """The SI value of a quantity of one component."""
    assert isinstance(quantity.value, float | int)
    return float(quantity.value)


def components(quantity: Quantity) -> int:
    """How many numbers the quantity holds."""
    return len(_numbers(quantity.value))


def _numbers(numbers: float | tuple[float, ...]) -> tuple[float, ...]:
    return numbers if isinstance(numbers, tuple) else (numbers,)
