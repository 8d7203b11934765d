"""The plan: what people typed, frozen, one field per chapter; a change makes a new plan."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from datetime import date
from difflib import get_close_matches
from functools import cache
from typing import Any, NamedTuple

from planner.chapters.calibration import Calibration
from planner.chapters.chip import Chip
from planner.chapters.clock import Clock
from planner.chapters.header import Header
from planner.chapters.magnet import Magnet
from planner.chapters.model import Model
from planner.chapters.qubit import Qubit
from planner.chapters.rows import Coil, Line, Pair, Part, PhaseNoise, Stage
from planner.chapters.source import Source
from planner.chapters.workload import Workload
from planner.declare import Chapter, Form, Given, Missing, givens_of
from planner.kinds import Kind, Quantity, QuantityError, clean, from_toml, in_unit, parse
from planner.materials import material

Value = Quantity | str
# The chapters in the order of the file; "" is the top level. Rows are lists of tables, `all_qubits` is one table.
SECTIONS: Mapping[str, type[Chapter]] = {
    "": Header, "magnet": Magnet, "clock": Clock, "source": Source, "chip": Chip, "model": Model, "workload": Workload,
    "calibration": Calibration, "all_qubits": Qubit,
}
ROWS: Mapping[str, type[Chapter]] = {
    "coil": Coil, "phase_noise": PhaseNoise, "part": Part, "stage": Stage, "line": Line, "qubit": Qubit, "pair": Pair,
}
TABLES = ("", "magnet", "coil", "clock", "phase_noise", "source", "chip", "part", "model", "workload", "calibration", "stage",
          "line", "all_qubits", "qubit", "pair")
NAMED = tuple(table for table in ROWS if table != "phase_noise")


class GivenError(ValueError):
    """A value that a given does not accept; its text is a sentence to act on."""


class UnknownKey(KeyError):
    """A key that no given has; its text is a sentence with the nearest known key."""

    def __str__(self) -> str:
        return str(self.args[0])


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """One device and cooldown. Each chapter holds what was typed (None elsewhere); rows are tuples of chapters."""

    header: Header = field(default_factory=Header)
    magnet: Magnet = field(default_factory=Magnet)
    clock: Clock = field(default_factory=Clock)
    source: Source = field(default_factory=Source)
    chip: Chip = field(default_factory=Chip)
    model: Model = field(default_factory=Model)
    workload: Workload = field(default_factory=Workload)
    calibration: Calibration = field(default_factory=Calibration)
    all_qubits: Qubit = field(default_factory=Qubit)
    coil: tuple[Coil, ...] = ()
    phase_noise: tuple[PhaseNoise, ...] = ()
    part: tuple[Part, ...] = ()
    stage: tuple[Stage, ...] = ()
    line: tuple[Line, ...] = ()
    qubit: tuple[Qubit, ...] = ()
    pair: tuple[Pair, ...] = ()

    def chapter(self, table: str) -> Chapter:
        """The chapter of a table that is no list ("" is the top level)."""
        found: Chapter = getattr(self, table or "header")
        return found

    def rows(self, table: str) -> tuple[Any, ...]:
        """The rows of a list of tables."""
        found: tuple[Any, ...] = getattr(self, table)
        return found


class Address(NamedTuple):
    """Where a given stands: its table, the index of its row (None outside lists) and its field."""

    table: str
    row: int | None
    field: str

    @property
    def given(self) -> Given:
        """The declaration of the given."""
        return table_givens(self.table)[self.field]


class Resolved(NamedTuple):
    """The value of a given that counts, and where it comes from: typed, all_qubits, material, default or "" (absent)."""

    value: Value | None
    source: str


class Problem(NamedTuple):
    """What is wrong with a plan as a whole: the key and a sentence to act on."""

    key: str
    sentence: str


@cache
def table_givens(table: str) -> dict[str, Given]:
    """The givens of a table by field name; `all_qubits` has none called name."""
    givens = givens_of(SECTIONS[table] if table in SECTIONS else ROWS[table])
    return {name: given for name, given in givens.items() if (table, name) != ("all_qubits", "name")}


def key_of(plan: Plan, address: Address) -> str:
    """The dotted key of a place, rows by name (phase noise, which has none, by number from 1)."""
    if address.row is None:
        return f"{address.table}.{address.field}" if address.table else address.field
    return f"{address.table}.{row_name(plan, address.table, address.row)}.{address.field}"


def row_name(plan: Plan, table: str, index: int) -> str:
    """Name of a row, or its number from 1 where it has none."""
    return getattr(plan.rows(table)[index], "name", None) or str(index + 1)


def address_of(plan: Plan, key: str) -> Address:
    """The place of a dotted key. Raises UnknownKey with the nearest known key."""
    table, _, rest = key.rpartition(".")
    if table in SECTIONS and rest in table_givens(table):
        return Address(table, None, rest)
    head, _, name = table.partition(".")
    if head in ROWS and name:
        names = [row_name(plan, head, index) for index in range(len(plan.rows(head)))]
        if name in names and rest in table_givens(head):
            return Address(head, names.index(name), rest)
    raise UnknownKey(_no_such_key(plan, key))


def addresses(plan: Plan) -> Iterator[Address]:
    """Every given that the plan has room for, in the order of the file."""
    for table in TABLES:
        if table in SECTIONS:
            yield from (Address(table, None, name) for name in table_givens(table))
        else:
            for row in range(len(plan.rows(table))):
                yield from (Address(table, row, name) for name in table_givens(table))


def stated(plan: Plan, address: Address) -> Value | None:
    """What was typed there, or None."""
    chapter = plan.chapter(address.table) if address.row is None else plan.rows(address.table)[address.row]
    value: Value | None = getattr(chapter, address.field)
    return value


def replaced(plan: Plan, address: Address, value: Value | None) -> Plan:
    """The plan with that one given replaced, or removed with None."""
    table, row, name = address
    if row is None:
        changed = dataclasses.replace(plan.chapter(table), **{name: value})  # type: ignore[type-var]
        return dataclasses.replace(plan, **{table or "header": changed})
    rows = plan.rows(table)
    changed_row = dataclasses.replace(rows[row], **{name: value})
    return with_rows(plan, table, (*rows[:row], changed_row, *rows[row + 1:]))


def with_rows(plan: Plan, table: str, rows: tuple[Any, ...]) -> Plan:
    """The plan with other rows in a list of tables."""
    return dataclasses.replace(plan, **{table: rows})


def resolved(plan: Plan, address: Address) -> Resolved:
    """The value that counts: typed, else of all qubits, else the material's, else the default."""
    value = stated(plan, address)
    if value is not None:
        return Resolved(value, "typed")
    if address.table == "qubit" and address.field != "name":
        shared = getattr(plan.all_qubits, address.field)
        if shared is not None:
            return Resolved(shared, "all_qubits")
    return unstated(plan, address.table, address.field)


def unstated(plan: Plan, table: str, name: str) -> Resolved:
    """The value that stands in for a given that nobody typed: the material's, else the default, else none."""
    return _unstated(table, name, plan.chip.material)


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
    return quantity


def problems(plan: Plan) -> list[Problem]:
    """What is wrong with the plan as a whole: required givens, names, and givens that contradict each other."""
    return [*_required(plan), *_names(plan), *_contradictions(plan)]


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


@cache
def _unstated(table: str, name: str, material_name: str | None) -> Resolved:
    given = table_givens(table)[name]
    if given.missing is Missing.MATERIAL and material_name is not None:
        entry = material(material_name).values.get(f"{table}.{name}")
        return Resolved(read_value(given, entry.text), "material") if entry else Resolved(None, "")
    if given.missing is Missing.DEFAULT:
        return Resolved(read_value(given, given.default), "default")
    return Resolved(None, "")


def _bound(kind: Kind, bound: float, unit: str) -> str:
    if kind.si == "1" and unit not in kind.units:
        unit = ""
    try:
        return f"{in_unit(kind, bound, unit):.4g} {unit}".rstrip()
    except (ValueError, ZeroDivisionError):  # a level has no value for nothing
        return f"{bound:.4g} {kind.si}"


def _check_bounds(given: Given, quantity: Quantity) -> None:
    values = quantity.value if isinstance(quantity.value, tuple) else (quantity.value,)
    fits = all((given.above is None or value > given.above) and (given.least is None or value >= given.least)
               and (given.below is None or value < given.below) and (given.most is None or value <= given.most)
               for value in values)
    if not fits:
        raise GivenError(f"'{quantity.text}' is out of range: {given.help.split(';')[0]} must be "
                         f"{bounds_text(given, quantity.unit)}")
    if given.nonzero and not any(values):
        raise GivenError(f"'{quantity.text}' is out of range: it must not be 0")


def _text(raw: object) -> str:
    if not isinstance(raw, str):
        raise GivenError(f"{_shown(raw)} is not a text: write it in quotes")
    text = clean(raw.replace("\n", " ")).strip()
    if len(text) > 500:
        raise GivenError(f"the text has {len(text)} characters: use at most 500")
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
    if text in given.planned:
        raise GivenError(f"'{text}' comes with a later edition: use one of {words}")
    hint = nearest(text, list(given.options)) if text else ""
    raise GivenError(f"{_shown(raw)} is not one of the choices: use one of {words}{hint}")


def _shown(raw: object) -> str:
    if isinstance(raw, bool):
        return str(raw).lower()
    if isinstance(raw, list | dict):
        return "a list" if isinstance(raw, list) else "a table"
    return f"'{clean(str(raw))[:80]}'"


def _no_such_key(plan: Plan, key: str) -> str:
    known = [key_of(plan, address) for address in addresses(plan)]
    return f"there is no given '{clean(key)[:80]}'{nearest(key, known)}"


def _required(plan: Plan) -> Iterator[Problem]:
    for table in SECTIONS:
        if table == "all_qubits":
            continue
        for name, given in table_givens(table).items():
            address = Address(table, None, name)
            if given.missing is Missing.REQUIRED and stated(plan, address) is None:
                yield Problem(key_of(plan, address), f"is required: {given.help}, as '{given.example}'")
    if not plan.qubit:
        yield Problem("qubit", "is required: at least one [[qubit]] with name and g")
    for table in ROWS:
        for row in range(len(plan.rows(table))):
            for name, given in table_givens(table).items():
                address = Address(table, row, name)
                if given.missing is Missing.REQUIRED and resolved(plan, address).value is None:
                    yield Problem(key_of(plan, address), f"is required: {given.help}, as '{given.example}'")


def _names(plan: Plan) -> Iterator[Problem]:
    for table in NAMED:
        seen: set[str] = set()
        for row in plan.rows(table):
            name = row.name
            if name is None:
                continue
            if not name or any(character in name for character in ".='\""):
                yield Problem(f"{table}.name", f"'{name}' can't be a name: use letters and digits, no dot, = or quote")
            elif name in seen:
                yield Problem(f"{table}.{name}.name", f"the name '{name}' is used twice: give every {table} its own")
            seen.add(name)


def _contradictions(plan: Plan) -> Iterator[Problem]:
    low, high = plan.source.low, plan.source.high
    if isinstance(low, Quantity) and isinstance(high, Quantity) and number(low) >= number(high):
        yield Problem("source.high", f"'{high.text}' is not above source.low '{low.text}': the band runs from low to high")
    if plan.qubit and all(_word(plan, row, "role") != "use" for row in range(len(plan.qubit))):
        yield Problem("qubit.role", "no qubit is in use: give at least one the role 'use'")
    yield from _short_gates(plan)
    names = {row.name for row in plan.qubit}
    for row in plan.pair:
        for end in ("first", "second"):
            other = getattr(row, end)
            if other is not None and other not in names:
                yield Problem(f"pair.{row.name}.{end}", f"there is no qubit '{other}'{nearest(other, list(map(str, names)))}")
    for row in plan.line:
        if plan.stage and isinstance(row.attenuation, Quantity) and _size(row.attenuation) != len(plan.stage):
            yield Problem(f"line.{row.name}.attenuation", f"'{row.attenuation.text}' has {_size(row.attenuation)} values for "
                          f"{len(plan.stage)} stages: write one dB value per stage, 0 where there is none")


def _short_gates(plan: Plan) -> Iterator[Problem]:
    gate_time = plan.workload.gate_time
    if not isinstance(gate_time, Quantity):
        return
    for row in range(len(plan.qubit)):
        rabi = resolved(plan, Address("qubit", row, "rabi_frequency")).value
        if isinstance(rabi, Quantity) and number(gate_time) * 2 * number(rabi) < 1 - 1e-9:
            half = 1e9 / (2 * number(rabi))
            yield Problem("workload.gate_time", f"'{gate_time.text}' is shorter than half a Rabi period of "
                          f"{row_name(plan, 'qubit', row)}, {half:.4g} ns: use at least that, or a faster Rabi frequency")
            return


def _word(plan: Plan, row: int, name: str) -> str:
    return str(resolved(plan, Address("qubit", row, name)).value)


def _size(quantity: Quantity) -> int:
    return len(quantity.value) if isinstance(quantity.value, tuple) else 1


def number(quantity: Quantity) -> float:
    """The SI value of a quantity of one component."""
    assert isinstance(quantity.value, float | int)
    return float(quantity.value)


def unit_shown(plan: Plan, address: Address) -> str:
    """The unit that the cell of a given shows, and that a bare number typed there gets; "" where it has none."""
    kind = address.given.kind
    value = resolved(plan, address).value
    if isinstance(value, Quantity):
        return value.unit
    return kind.first_unit if kind is not None else ""


def edited(plan: Plan, address: Address, text: str, *, assume: str = "") -> Plan:
    """The plan with a given as typed, or without it where the text is blank. Raises GivenError with what is wrong.

    `assume` is the unit of a bare number. A plan without problems stays one without.
    """
    given = address.given
    if text.strip():
        changed = replaced(plan, address, read_value(given, text.strip(), assume=assume))
    elif given.missing is Missing.REQUIRED and address.table != "all_qubits":
        raise GivenError(f"{address.field} is required: type {given.help.split(';')[0]}, as '{given.example}'")
    else:
        changed = replaced(plan, address, None)
    before = set(problems(plan))
    for problem in problems(changed):
        if problem not in before:
            raise GivenError(f"{problem.key}: {problem.sentence}")
    return changed
