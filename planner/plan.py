"""The plan: what people typed, frozen, one field per chapter; a change makes a new plan."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
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
from planner.declare import Chapter, Given, Missing, givens_of
from planner.kinds import Quantity, clean
from planner.materials import material
from planner.values import Value, nearest, read_value

# The chapters in the order of the file; "" is the top level. Rows are lists of tables, `all_qubits` is one table.
SECTIONS: Mapping[str, type[Chapter]] = {
    "": Header,
    "magnet": Magnet,
    "clock": Clock,
    "source": Source,
    "chip": Chip,
    "model": Model,
    "workload": Workload,
    "calibration": Calibration,
    "all_qubits": Qubit,
}
ROWS: Mapping[str, type[Chapter]] = {
    "coil": Coil,
    "phase_noise": PhaseNoise,
    "part": Part,
    "stage": Stage,
    "line": Line,
    "qubit": Qubit,
    "pair": Pair,
}
TABLES = (
    "",
    "magnet",
    "coil",
    "clock",
    "phase_noise",
    "source",
    "chip",
    "part",
    "model",
    "workload",
    "calibration",
    "stage",
    "line",
    "all_qubits",
    "qubit",
    "pair",
)
NAMED = tuple(table for table in ROWS if table != "phase_noise")


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
        return with_section(plan, table, _with_field(plan.chapter(table), name, value))
    rows = plan.rows(table)
    return with_rows(plan, table, (*rows[:row], _with_field(rows[row], name, value), *rows[row + 1 :]))


def with_section(plan: Plan, table: str, section: Chapter) -> Plan:
    """The plan with another chapter in the place of a table that is no list."""
    changes: dict[str, Any] = {table or "header": section}
    return dataclasses.replace(plan, **changes)


def with_rows(plan: Plan, table: str, rows: tuple[Any, ...]) -> Plan:
    """The plan with other rows in a list of tables."""
    changes: dict[str, Any] = {table: rows}
    return dataclasses.replace(plan, **changes)


def _with_field(chapter: Chapter, name: str, value: Value | None) -> Chapter:
    changed: Chapter = dataclasses.replace(chapter, **{name: value})  # type: ignore[type-var]
    return changed


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
    return usual(table, name, plan.chip.material)


@cache
def usual(table: str, name: str, material_name: str | None) -> Resolved:
    """The value of a given that nobody typed, for a plan of this material."""
    given = table_givens(table)[name]
    if given.missing is Missing.MATERIAL and material_name is not None:
        entry = material(material_name).values.get(f"{table}.{name}")
        return Resolved(read_value(given, entry.text), "material") if entry else Resolved(None, "")
    if given.missing is Missing.DEFAULT:
        return Resolved(read_value(given, given.default), "default")
    return Resolved(None, "")


def _no_such_key(plan: Plan, key: str) -> str:
    known = [key_of(plan, address) for address in addresses(plan)]
    return f"there is no given '{clean(key)[:80]}'{nearest(key, known)}"


def unit_shown(plan: Plan, address: Address) -> str:
    """The unit that the cell of a given shows, and that a bare number typed there gets; "" where it has none.

    An empty cell shows the unit of the given's example: the first of its kind would make a Rabi frequency of 2 Hz.
    """
    value = resolved(plan, address).value
    if value is None:
        return _unit_of_example(address.table, address.field)
    return value.unit if isinstance(value, Quantity) else ""


@cache
def _unit_of_example(table: str, name: str) -> str:
    given = table_givens(table)[name]
    example = read_value(given, given.example) if given.kind is not None else None
    return example.unit if isinstance(example, Quantity) else ""
