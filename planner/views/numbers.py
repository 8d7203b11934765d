"""Numbers as text: significant digits, the unit that suits a size, and margins that never round up to 1."""

from __future__ import annotations

from math import floor, isfinite, log10

from planner.kinds import Kind, Quantity, in_unit

UNKNOWN = "?"


def digits(value: float, count: int) -> str:
    """A number with `count` significant digits, plain where that is readable, else with an exponent."""
    if value == 0:
        return "0"
    rounded = float(f"{value:.{count - 1}e}")
    size = floor(log10(abs(rounded)))
    if -3 < size < 6:
        return f"{rounded:.{max(0, count - 1 - size)}f}"
    mantissa, exponent = f"{rounded:.{count - 1}e}".split("e")
    short = mantissa.rstrip("0").rstrip(".") if "." in mantissa else mantissa
    return f"{short}e{int(exponent)}"


def plain(value: float, count: int) -> str:
    """A number with `count` significant digits and no zeros behind the last one that matters."""
    text = digits(value, count)
    return text.rstrip("0").rstrip(".") if "." in text and "e" not in text else text


def best_unit(kind: Kind, value: float) -> str:
    """The unit of the kind in which the value reads best: the largest that leaves it at 1 or more."""
    linear = [(float(unit.factor), name) for name, unit in kind.units.items() if not unit.level]
    if not linear or not value or "" in kind.units:
        return "" if "" in kind.units else kind.si
    fitting = [pair for pair in linear if pair[0] <= abs(value) * (1 + 1e-12)]
    return max(fitting)[1] if fitting else min(linear)[1]


def number_in(kind: Kind, value: float | None, unit: str, count: int = 3) -> str:
    """A value in a unit, without the unit; `?` for an unknown."""
    return UNKNOWN if value is None or not isfinite(value) else digits(in_unit(kind, value, unit), count)


def with_unit(kind: Kind, value: float | None, unit: str = "", count: int = 3) -> str:
    """A value with its unit, by default the one that reads best; `?` for an unknown."""
    if value is None or not isfinite(value):
        return UNKNOWN
    unit = unit or best_unit(kind, value)
    return f"{plain(in_unit(kind, value, unit), count)} {unit}".rstrip()


def margin_text(value: float | None) -> str:
    """A margin in three digits or so; one below 1 is never rounded up to it."""
    if value is None:
        return UNKNOWN
    if value >= 1e6:
        return "1e6"
    places = 2 if value < 10 else 1 if value < 100 else 0
    rounded = round(value, places)
    return f"{floor(value * 100) / 100 if value < 1 <= rounded else rounded:.{places}f}"


def without_origin(quantity: Quantity) -> str:
    """The typed text up to its origin."""
    return quantity.text.split(";")[0].rstrip()


def understood(kind: Kind, quantity: Quantity) -> str:
    """What was read from a typed quantity: its SI value and tolerance."""
    values = quantity.value if isinstance(quantity.value, tuple) else (quantity.value,)
    text = ", ".join(plain(value, 6) for value in values)
    if quantity.tolerance is not None:
        spreads = quantity.tolerance if isinstance(quantity.tolerance, tuple) else (quantity.tolerance,)
        text += " ± " + ", ".join(plain(spread, 3) for spread in dict.fromkeys(spreads))
    return f"{text} {kind.si if kind.si != '1' else ''}".rstrip()
