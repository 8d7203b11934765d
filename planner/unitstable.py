"""Writes data/units.toml with the help of pint: `python -m planner.unitstable`.

Which units a kind accepts, and in which order, stands here; the factors are pint's. The table is written ahead so that
`check`, `report` and the editor need not load pint. Only a unit outside the table makes `kinds` import this module.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from decimal import Decimal
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pint

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

TABLE = Path(__file__).with_name("data") / "units.toml"

# Spellings of this program that pint does not read, in the order in which they are replaced.
PINT_SPELLINGS = (("rtHz", "Hz**0.5"), ("^", "**"), ("%", "percent"))


@dataclass(frozen=True, slots=True)
class Units:
    """The accepted units of a kind in the order in which they are offered, levels first.

    `levels` maps a logarithmic unit (ten times the decimal logarithm of a power) to the unit that 0 of it stands for.
    """

    si: str
    linear: tuple[str, ...] = ()
    levels: Mapping[str, str] = field(default_factory=dict)


UNITS: Mapping[str, Units] = {
    "field": Units("T", ("mT", "T", "uT", "nT")),
    "angle": Units("rad", ("deg", "rad", "mrad")),
    "time": Units("s", ("us", "ns", "ms", "s", "min", "h", "day")),
    "frequency": Units("Hz", ("Hz", "kHz", "MHz", "GHz")),
    "fraction": Units("1", ("", "%", "ppm", "ppb")),
    "fraction per time": Units("1/s", ("ppm/h", "ppb/h", "%/h", "/h", "ppm/day", "ppb/day", "/day", "/s")),
    "ratio": Units("1", levels={"dB": ""}),
    "power": Units("W", ("W", "mW", "uW", "nW", "pW"), levels={"dBm": "mW"}),
    "temperature": Units("K", ("mK", "K", "uK")),
    "energy": Units("J", ("ueV", "neV", "meV", "eV", "J")),
    "field per length": Units("T/m", ("mT/nm", "uT/nm", "T/m")),
    "charge noise": Units("J/rtHz", ("ueV/rtHz", "neV/rtHz", "meV/rtHz")),
    "displacement per energy": Units("m/J", ("nm/ueV", "pm/ueV", "um/meV", "nm/meV")),
    "relative noise": Units("1/rtHz", ("ppm/rtHz", "ppb/rtHz", "%/rtHz", "1/rtHz")),
    "frequency noise": Units("Hz/rtHz", ("Hz/rtHz", "kHz/rtHz", "MHz/rtHz")),
    "white noise": Units("Hz^2/Hz", ("Hz^2/Hz", "kHz^2/Hz")),
    "count": Units("1", ("",)),
    "number": Units("1", ("",)),
    "current": Units("A", ("A", "mA", "uA")),
    "field per current": Units("T/A", ("T/A", "mT/A", "uT/A", "mT/mA")),
    "phase level": Units("1/Hz", levels={"dBc/Hz": "1/Hz"}),
    "frequency per field": Units("Hz/T", ("Hz/T", "kHz/T", "MHz/T", "GHz/T", "kHz/mT", "MHz/mT")),
    "frequency per angle": Units("Hz/rad", ("Hz/rad", "kHz/rad", "MHz/rad", "Hz/deg", "kHz/deg", "MHz/deg")),
    "energy squared": Units("J^2", ("J^2", "ueV^2")),
}


@cache
def registry() -> pint.UnitRegistry[Any]:
    """The one pint registry, computing in decimals so that a factor is exact or good to 28 digits."""
    made: pint.UnitRegistry[Any] = pint.UnitRegistry(non_int_type=Decimal)
    made.define("ppb = 1e-9")
    return made


def pint_spelling(unit: str) -> str:
    """A unit of this program as pint reads it: '/h' as '1/h', 'rtHz' as 'Hz**0.5'."""
    text = f"1{unit}" if unit.startswith("/") else unit
    for ours, theirs in PINT_SPELLINGS:
        text = text.replace(ours, theirs)
    return "dimensionless" if text in ("", "1") else text


def as_pint(values: NDArray[np.float64], si: str) -> pint.Quantity[Any]:
    """An array of SI values as a pint quantity, in a registry of ordinary floats."""
    made: pint.UnitRegistry[Any] = pint.get_application_registry()
    return made.Quantity(values, made.Unit(pint_spelling(si)))


def factor(unit: str, si: str) -> Decimal:
    """How many `si` one `unit` is.

    Raises ValueError for a unit with an offset, such as degC, and whatever pint raises where it can't read or convert.
    """
    one, zero = (_converted(Decimal(number), unit, si) for number in (1, 0))
    if zero != 0:
        raise ValueError(f"{unit} is not proportional to {si}")
    return one


def _converted(number: Decimal, unit: str, si: str) -> Decimal:
    quantity = registry().Quantity(number, registry().parse_units(pint_spelling(unit)))
    return Decimal(quantity.to(registry().parse_units(pint_spelling(si))).magnitude)


def table() -> str:
    """The text of data/units.toml."""
    head = (
        f"# The units that each kind of quantity accepts. Written by pint {pint.__version__}; to write it again:\n"
        "#   python -m planner.unitstable\n"
        "# Kinds and units are listed in planner/unitstable.py, units in the order in which they are offered.\n"
        "# [KIND.units]: the SI value of one unit. [KIND.levels], ten times a decimal logarithm: the SI value of 0.\n"
    )
    return head + "".join(_section(name, units) for name, units in UNITS.items())


def _section(name: str, units: Units) -> str:
    levels = {unit: factor(at_zero, units.si) for unit, at_zero in units.levels.items()}
    linear = {unit: factor(unit, units.si) for unit in units.linear}
    head = f'\n[{_key(name)}]\nsi = "{units.si}"\n'
    return head + _block(name, "levels", levels) + _block(name, "units", linear)


def _block(name: str, part: str, factors: Mapping[str, Decimal]) -> str:
    if not factors:
        return ""
    lines = [f"{_key(unit)} = {_number(value)}\n" for unit, value in factors.items()]
    return f"[{_key(name)}.{part}]\n" + "".join(lines)


def _key(name: str) -> str:
    return name if name.isalpha() else f'"{name}"'


def _number(value: Decimal) -> str:
    short = value.normalize()
    return f"{short:f}" if Decimal("1e-3") <= short < Decimal("1e6") else f"{short:e}".replace("e+", "e")


if __name__ == "__main__":
    TABLE.write_text(table(), encoding="utf-8")
