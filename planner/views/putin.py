"""The numbers put into a result: each symbol of its law with value, key, meaning and provenance."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from planner.declare import Derived, Input
from planner.evaluate import Evaluation
from planner.graph import HOST, givens
from planner.kinds import clean
from planner.plan import unit_shown
from planner.views.formula import constants_read, formula_of, meaning_of
from planner.views.provenance import (
    HOST_MEANINGS,
    address_in,
    given_value,
    host_lines,
    host_value,
    per_row,
    result_value,
    shown,
)

FEW = 3  # origins named where rows differ


@dataclass(frozen=True, slots=True)
class PutIn:
    """What one result takes in one row of its table."""

    evaluation: Evaluation
    derived: Derived
    row: int

    def lines(self) -> list[str]:
        """One line a symbol, then the constants of the formula."""
        symbols = [f"{symbol} = {self._input(source)}" for symbol, source in self.derived.sources.items()]
        named = formula_of(self.derived.law).names
        return symbols + [f"{name} = {text}" for name, text in constants_read().items() if name in named]

    def below(self) -> Iterator[tuple[Derived, int]]:
        """Results that count here, each with the row (of other tables the first) that is taken."""
        for source in self.derived.sources.values():
            if is_found(self.evaluation, source.key) and not self._idle(source):
                yield from ((self.evaluation.derived(source.key), row) for row in self._rows(source.key)[:1])

    def _input(self, source: Input) -> str:
        key = source.key
        if key in HOST:
            behind = "; ".join(host_lines(self.evaluation.plan, key))
            return f"{host_value(self.evaluation, key)}: {key}, {HOST_MEANINGS[key]}; {behind}"
        rows = self._rows(key)
        texts, behind = self._values(source, rows)
        together = self._table(key) in {"", self.derived.per.value}
        value = texts[0] if together else per_row(self._names(key, rows), texts)
        subject = f"{key}{of_row(self.evaluation, self._table(key), rows[0])}" if together else key
        what = f"1 where {subject} is {source.word}, else 0" if source.word else subject
        what = f"tolerance of {subject}" if source.tolerance else what
        return "; ".join(
            filter(None, (f"{value}: {what}, {meaning(self.evaluation, key)}", behind, self._idle(source)))
        )

    def _idle(self, source: Input) -> str:
        """Why an argument does not count here; empty where it does."""
        columns = self.evaluation.columns
        for switch in source.when:
            if not columns[switch.key].on(switch):
                return f"not used while {switch.key} = {self._typed(Input(switch.key), 0)[0]}"
        if source.unless:
            column = columns[source.unless]
            if column.table in {"", self.derived.per.value} and (0 if column.of_plan else self.row) not in column.why:
                return f"not needed, since {source.unless} is typed"
        return ""

    def _values(self, source: Input, rows: Sequence[int]) -> tuple[list[str], str]:
        """Values of a source in these rows, and what stands behind them."""
        if is_found(self.evaluation, source.key):
            derived, column = self.evaluation.derived(source.key), self.evaluation.columns[source.key]
            reason = next((f"unknown: {column.why[row]}" for row in rows if row in column.why), "")
            return [result_value(self.evaluation, derived, row) for row in rows], reason
        found = [self._typed(source, row) for row in rows]
        origins = [*dict.fromkeys(behind for _, behind in found)]
        return [text for text, _ in found], " or ".join(origins[:FEW]) + (" or others" if len(origins) > FEW else "")

    def _typed(self, source: Input, row: int) -> tuple[str, str]:
        """Text and provenance of a given in one row."""
        column = self.evaluation.columns[source.key]
        if source.key not in givens():  # the position of a pair's qubit
            return f"{column.base()[row]:.0f}", ""
        address = address_in(self.evaluation.plan, source.key, self._names(source.key, [row])[0])
        assert address is not None
        text, behind = given_value(self.evaluation.plan, address)
        if source.word:
            return str(int(column.words[row] == source.word)), f"it is {text}, {behind}"
        if source.tolerance and address.given.kind is not None:
            kind, unit = address.given.kind, unit_shown(self.evaluation.plan, address)
            spreads = dict.fromkeys(np.ravel(column.spread[row]).tolist())
            return ", ".join(shown(kind, spread, unit) for spread in spreads), f"of {text}, {behind}"
        return text, behind

    def _rows(self, key: str) -> list[int]:
        """The rows of a source that count: the same one, or those of another table."""
        table = self._table(key)
        if table in {"", self.derived.per.value}:
            return [self.row if table else 0]
        return list(self.evaluation.used) if table == "qubit" else list(range(len(self.evaluation.tables[table])))

    def _table(self, key: str) -> str:
        return self.evaluation.columns[key].table

    def _names(self, key: str, rows: Sequence[int]) -> list[str]:
        return [self.evaluation.tables[self._table(key)][row] for row in rows]


def is_found(evaluation: Evaluation, key: str) -> bool:
    """Whether the value that counts is a result: not a given, or one that results stand in for since nobody typed it."""
    return any(derived.key == key for derived in evaluation.graph.order) and evaluation.columns[key].found


def meaning(evaluation: Evaluation, key: str) -> str:
    """What a given or result is, in the words of its declaration."""
    if is_found(evaluation, key):
        return help_of(evaluation.derived(key))
    return givens()[key].help if key in givens() else "its position among the qubits that are not dead"


def help_of(derived: Derived) -> str:
    """What a result is: its declaration's words, or the first sentence of its law."""
    first = meaning_of(derived.law).partition(". ")[0].rstrip(".")
    return derived.help or (first[:1].lower() + first[1:] if first[1:2].islower() else first)


def of_row(evaluation: Evaluation, table: str, row: int) -> str:
    """' of NAME' behind a key, nothing behind one of the plan."""
    return f" of {clean(evaluation.tables[table][row])}" if table else ""
