"""Records that come and go: the row that is put in, names that are free, and the attenuators that follow the stages."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from planner import grammar
from planner.declare import Missing
from planner.kinds import Quantity
from planner.plan import NAMED, ROWS, Address, Plan, replaced, table_givens, with_rows
from planner.values import GivenError, components, read_value

_SPREAD = re.compile(r"[ \t]*(?:±|\+/-).*$")  # behind the last number; it holds for each of them


def with_row(plan: Plan, table: str, after: int, name: str = "") -> Plan:
    """The plan with one more record behind row `after`: its copy, or in an empty table one of required examples.

    `name` is the new one's, for tables whose records have names. A new stage attenuates nothing. Raises GivenError.
    """
    rows = plan.rows(table)
    row = rows[after] if rows else _first(plan, table)
    if table in NAMED:
        row = replace(row, name=read_value(table_givens(table)["name"], name))
    place = after + 1 if rows else 0
    grown = with_rows(plan, table, (*rows[:place], row, *rows[place:]))
    return _with_attenuators(plan, grown, lambda each: [*each[:place], "0", *each[place:]])


def without_row(plan: Plan, table: str, index: int) -> Plan:
    """The plan without one record. Raises GivenError for the last qubit, and for one that a pair names."""
    rows = plan.rows(table)
    if table == "qubit":
        _refuse_needed(plan, index)
    shrunk = with_rows(plan, table, (*rows[:index], *rows[index + 1 :]))
    return _with_attenuators(plan, shrunk, lambda each: [*each[:index], *each[index + 1 :]])


def free_name(plan: Plan, table: str) -> str:
    """A name for one more record: the first of Q1, Q2 ... or coil1, coil2 ... that is free."""
    taken = {row.name for row in plan.rows(table)}
    stem = "Q" if table == "qubit" else table
    return next(name for number in range(1, len(taken) + 2) if (name := f"{stem}{number}") not in taken)


def _first(plan: Plan, table: str) -> Any:
    """The first record of a table: its required givens as in their examples, a pair of the plan's own qubits."""
    required = {name: given for name, given in table_givens(table).items() if given.missing is Missing.REQUIRED}
    values = {name: read_value(given, given.example) for name, given in required.items()}
    if table == "pair":
        if len(plan.qubit) < 2:
            raise GivenError("a pair needs two qubits: add another qubit first")
        values |= {"first": str(plan.qubit[0].name), "second": str(plan.qubit[1].name)}
    record: Any = ROWS[table]
    return record(**values)


def _refuse_needed(plan: Plan, index: int) -> None:
    name = plan.qubit[index].name
    if len(plan.qubit) == 1:
        raise GivenError(f"{name} stays: a plan needs at least one qubit, so add another before you remove it")
    for pair in plan.pair:
        if name in {pair.first, pair.second}:
            raise GivenError(f"{name} stays: the pair {pair.name} names it, so remove that pair before")


def _with_attenuators(before: Plan, after: Plan, change: Callable[[list[str]], list[str]]) -> Plan:
    """The plan after its stages changed in number, with one attenuator a stage in each line that had so before."""
    if len(before.stage) == len(after.stage) or not before.stage or not after.stage:
        return after
    for row, line in enumerate(before.line):
        if isinstance(line.attenuation, Quantity) and components(line.attenuation) == len(before.stage):
            place = Address("line", row, "attenuation")
            after = replaced(after, place, read_value(place.given, _each_changed(line.attenuation, change, place)))
    return after


def _each_changed(quantity: Quantity, change: Callable[[list[str]], list[str]], place: Address) -> str:
    """The text of a quantity with other numbers; unit, tolerance and origin stay."""
    head, semicolon, origin = quantity.text.partition(";")
    unit_place = grammar.read(head, sizes=place.given.sizes, percent_is_unit=False).unit_place
    numbers, tail = head[:unit_place], head[unit_place:]
    spread = _SPREAD.search(numbers)
    if spread is not None:
        numbers, tail = numbers[: spread.start()], spread[0] + tail
    return ", ".join(change([number.strip() for number in numbers.split(",")])) + tail + semicolon + origin
