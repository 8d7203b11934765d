"""Which missing given would make most margins known: tried by giving each its example value."""

from __future__ import annotations

from typing import NamedTuple

from planner.declare import Form
from planner.evaluate import Evaluation, evaluate
from planner.margins import UNKNOWN
from planner.plan import Plan, address_of, replaced
from planner.values import read_value


class TypeNext(NamedTuple):
    """The given to type next, one more that is needed with it ("" none), and the margins that become known."""

    key: str
    also: str
    known: int


def type_next(evaluation: Evaluation) -> TypeNext | None:
    """The given that makes most margins known, alone or, where none does, with one more; None where nothing would."""
    before = _unknown(evaluation)
    singles = [(key, evaluate(_with_example(evaluation.plan, key))) for key in _missing(evaluation)]
    found = [TypeNext(key, "", before - _unknown(after)) for key, after in singles]
    if not any(entry.known for entry in found):
        found = [
            TypeNext(key, also, before - _unknown(evaluate(_with_example(after.plan, also))))
            for key, after in singles
            for also in _missing(after)
        ]
    best = max(found, key=lambda entry: entry.known, default=None)
    return best if best is not None and best.known > 0 else None


def _unknown(evaluation: Evaluation) -> int:
    return sum(margin.code == UNKNOWN for margin in evaluation.margins)


def _missing(evaluation: Evaluation) -> list[str]:
    """Keys of the givens at the root of unknown margins; one that every qubit in use lacks stands for all of them."""
    keys = dict.fromkeys(margin.reason.key for margin in evaluation.margins if margin.reason and margin.reason.given)
    return list(dict.fromkeys(_for_all(evaluation, key) for key in keys))


def _for_all(evaluation: Evaluation, key: str) -> str:
    table, _, name = key.rpartition(".")
    column = evaluation.columns.get(f"qubit.{name}")
    shared = table.startswith("qubit.") and column is not None and len(evaluation.used) > 1
    return f"all_qubits.{name}" if shared and column and all(row in column.why for row in evaluation.used) else key


def _with_example(plan: Plan, key: str) -> Plan:
    address = address_of(plan, key)
    given = address.given
    assert given.form is Form.QUANTITY
    return replaced(plan, address, read_value(given, given.example))
