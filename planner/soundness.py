"""Whether a plan fits together: required givens, names, contradictions; and edits that keep it so."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from planner.declare import Missing
from planner.kinds import Quantity
from planner.plan import (
    NAMED,
    ROWS,
    SECTIONS,
    Address,
    Plan,
    key_of,
    replaced,
    resolved,
    row_name,
    stated,
    table_givens,
)
from planner.values import GivenError, components, nearest, number, read_value

NOT_IN_NAMES = ".='\"\ufffd"  # they part keys and --with; the last stands for a character that is not shown


class Problem(NamedTuple):
    """What is wrong with a plan as a whole: the key and a sentence to act on."""

    key: str
    sentence: str


def problems(plan: Plan) -> list[Problem]:
    """What is wrong with the plan as a whole: required givens, names, and givens that contradict each other."""
    return [*_required(plan), *_names(plan), *_contradictions(plan)]


def edited(plan: Plan, address: Address, text: str, *, assume: str = "") -> Plan:
    """The plan with a given as typed, or without it where the text is blank. Raises GivenError with what is wrong.

    `assume` is the unit of a bare number. A plan without problems stays one without.
    """
    changed = entered(plan, address, text, assume=assume)
    refuse_new_problems(plan, changed)
    return changed


def entered(plan: Plan, address: Address, text: str, *, assume: str = "") -> Plan:
    """As `edited`, but not yet held against the other givens, for edits that belong together. Raises GivenError."""
    typed = text.strip()
    return replaced(plan, address, read_value(address.given, typed, assume=assume) if typed else None)


def refuse_new_problems(before: Plan, after: Plan) -> None:
    """Raises GivenError with the first problem of a plan that it did not have before."""
    known = set(problems(before))
    for problem in problems(after):
        if problem not in known:
            raise GivenError(f"{problem.key}: {problem.sentence}")


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
        for index, row in enumerate(plan.rows(table)):
            name = row.name
            if name is None:
                continue
            if not name or any(character in name for character in NOT_IN_NAMES):
                yield Problem(
                    f"{table}.{index + 1}.name", f"'{name}' can't be a name: use letters and digits, no dot, = or quote"
                )
            elif name in seen:
                yield Problem(f"{table}.{name}.name", f"the name '{name}' is used twice: give every {table} its own")
            seen.add(name)


def _contradictions(plan: Plan) -> Iterator[Problem]:
    low, high = plan.source.low, plan.source.high
    if isinstance(low, Quantity) and isinstance(high, Quantity) and number(low) >= number(high):
        yield Problem(
            "source.high", f"'{high.text}' is not above source.low '{low.text}': the band runs from low to high"
        )
    if plan.qubit and all(_word(plan, row, "role") != "use" for row in range(len(plan.qubit))):
        yield Problem("qubit.role", "no qubit is in use: give at least one the role 'use'")
    yield from _short_gates(plan)
    names = {row.name for row in plan.qubit}
    for index, pair in enumerate(plan.pair):
        for end in ("first", "second"):
            other = getattr(pair, end)
            if other is not None and other not in names:
                hint = nearest(other, list(map(str, names)))
                yield Problem(key_of(plan, Address("pair", index, end)), f"there is no qubit '{other}'{hint}")
    for index, line in enumerate(plan.line):
        if plan.stage and isinstance(line.attenuation, Quantity) and components(line.attenuation) != len(plan.stage):
            yield Problem(
                key_of(plan, Address("line", index, "attenuation")),
                f"'{line.attenuation.text}' has {components(line.attenuation)} values for {len(plan.stage)} "
                "stages: write one dB value per stage, 0 where there is none",
            )


def _short_gates(plan: Plan) -> Iterator[Problem]:
    gate_time = plan.workload.gate_time
    if not isinstance(gate_time, Quantity):
        return
    for row in range(len(plan.qubit)):
        if _word(plan, row, "role") == "dead":
            continue
        rabi = resolved(plan, Address("qubit", row, "rabi_frequency")).value
        if isinstance(rabi, Quantity) and number(gate_time) * 2 * number(rabi) < 1 - 1e-9:
            half = 1e9 / (2 * number(rabi))
            name = row_name(plan, "qubit", row)
            yield Problem(
                "workload.gate_time",
                f"'{gate_time.text}' is shorter than half a Rabi period of {name}, "
                f"{half:.4g} ns: use at least that, or a faster Rabi frequency",
            )
            return


def _word(plan: Plan, row: int, name: str) -> str:
    return str(resolved(plan, Address("qubit", row, name)).value)
