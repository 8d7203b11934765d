"""Plan -> evaluation: every result and margin of a plan, once, on arrays. A reason of an unknown travels downstream."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from planner.columns import Column, Reason, given_columns, host_columns, pair_columns, swept_column
from planner.declare import Derived, Input
from planner.graph import Graph, givens, graph
from planner.kinds import Quantity
from planner.leads import Lead, changes, leads_of, low_end, moved, root_sum_square, scaled
from planner.margins import CLEAR, VERDICTS, Bench, Margin, judge, typed_though_found
from planner.physics import Array
from planner.plan import NAMED, ROWS, Address, Plan, Resolved, addresses, key_of, resolved
from planner.values import number

if TYPE_CHECKING:
    import pint

WANTED_MARGIN = Address("", None, "wanted_margin")


@dataclass(frozen=True, slots=True)
class Evaluation:
    """Everything that follows from a plan.

    `rows` are the indices of its qubits that are not dead, `tables` the names of every table's rows ("": the plan, one row);
    `used` are the positions in `rows` that are in use and judged. `columns` hold givens and results by key.
    """

    plan: Plan
    graph: Graph
    rows: tuple[int, ...]
    tables: Mapping[str, tuple[str, ...]]
    used: tuple[int, ...]
    columns: Mapping[str, Column]
    margins: tuple[Margin, ...]
    not_asked: Mapping[str, str]
    leads: tuple[Lead, ...] = ()

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the qubits that are not dead."""
        return self.tables["qubit"]

    @property
    def verdict(self) -> str:
        """The worst verdict of the asked margins."""
        return VERDICTS[min((margin.code for margin in self.margins), default=CLEAR)]

    @property
    def ranked(self) -> tuple[Margin, ...]:
        """The asked margins, worst first."""
        return tuple(sorted(self.margins, key=lambda margin: margin.rank))

    def margin(self, name: str) -> Margin | None:
        """The margin of that name, None where it is not asked."""
        return next((margin for margin in self.margins if margin.name == name), None)

    def derived(self, key: str) -> Derived:
        """The declaration of a result. Raises KeyError for a key that is none."""
        for derived in self.graph.order:
            if derived.key == key:
                return derived
        raise KeyError(key)

    def range_of(self, key: str) -> tuple[Array, Array]:
        """Lowest and highest that a result may be, one a row, by tolerances and ranges; nan where it is unknown."""
        column = self.columns[key]
        fall, rise = changes(column.values if column.has_lead else column.values[None], len(self.leads))
        return low_end(column.base(), fall), column.base() + root_sum_square(rise)

    def quantity(self, key: str) -> pint.Quantity[Any]:
        """A result as a pint quantity in SI units, rows on the last axis; unknown values are nan."""
        from planner.unitstable import as_pint  # pint takes longer to load than a plan to evaluate

        quantity: pint.Quantity[Any] = as_pint(self.columns[key].values, self.derived(key).kind.si)
        return quantity


def evaluate(plan: Plan, swept: Mapping[str, Array] | None = None, *, ranges: bool = True) -> Evaluation:
    """Evaluate a plan without problems (`soundness.problems`).

    `ranges`: tolerances and the ranges of untyped values are a leading axis of every result that depends on them; margins
    then have low and high and their verdicts are tempered. `swept` replaces the SI values of givens (`magnet.field`,
    `qubit.Q1.rabi_frequency`) by arrays, whose axes every result that depends on them then leads with, without ranges; a
    vector's components stand on the last axis, verdicts are those of the first entry. Raises ValueError for givens that
    decide which results there are, for words, and for unknown keys.
    """
    wiring = graph()
    roles = given_columns(plan, ["qubit.role"], {"qubit": plan.qubit})["qubit.role"].words
    rows = tuple(row for row, role in enumerate(roles) if role != "dead")
    tables = {table: plan.rows(table) for table in ROWS} | {"qubit": tuple(plan.qubit[row] for row in rows)}
    names = {table: _names(table, found) for table, found in tables.items()} | {"": ("",)}
    columns = given_columns(plan, wiring.needed, tables)
    columns |= host_columns(plan) | pair_columns(plan, names["qubit"])
    leads = leads_of(plan, rows) if ranges and not swept else ()
    columns = {key: moved(column, key, leads) for key, column in columns.items()} if leads else columns
    for key, values in (swept or {}).items():
        _sweep(columns, key, values, names)
    used = tuple(row for row, role in enumerate(columns["qubit.role"].words) if role == "use")
    scope = _Scope(columns, names, used, leads)
    with np.errstate(invalid="ignore", divide="ignore", over="ignore", under="ignore"):
        for derived in wiring.order:
            typed = columns.get(derived.key)
            if typed is None or typed.why:
                columns[derived.key] = scope.column(derived)
    wanted = resolved(plan, WANTED_MARGIN).value
    assert isinstance(wanted, Quantity)
    bench = Bench(columns, np.array(used, dtype=np.intp), names, leads, number(wanted), typed_though_found(columns))
    margins, not_asked = judge(bench, wiring.limits)
    return Evaluation(plan, wiring, rows, names, used, columns, margins, not_asked, leads)


def resolve_all(plan: Plan) -> dict[str, Resolved]:
    """Every given that has a value, by its dotted key, qubits with what they take from `all_qubits`."""
    places = {key_of(plan, address): address for address in addresses(plan) if address.table != "all_qubits"}
    found = {key: resolved(plan, address) for key, address in places.items()}
    return {key: entry for key, entry in found.items() if entry.value is not None}


def _names(table: str, rows: Sequence[Any]) -> tuple[str, ...]:
    """Names of rows, or their numbers from 1 where a table has none."""
    return tuple(row.name for row in rows) if table in NAMED else tuple(str(place + 1) for place in range(len(rows)))


@dataclass(frozen=True, slots=True)
class _Scope:
    """What results are computed from: the columns so far, the names of every table's rows, and the qubits in use."""

    columns: dict[str, Column]
    names: Mapping[str, tuple[str, ...]]
    used: tuple[int, ...]
    leads: tuple[Lead, ...]
    indicators: dict[tuple[str, str], Array] = field(default_factory=dict)

    def column(self, derived: Derived) -> Column:
        table, rows, trailing = derived.per.value, len(self.names[derived.per.value]), derived.trailing
        if not rows:
            return Column(np.zeros((0, *trailing)), table, len(trailing), found=True)
        if derived.only is not None and not self.columns[derived.only.key].on(derived.only):
            nothing = np.full((rows, *trailing), np.nan)
            reason = Reason(derived.off.reason, derived.off.given)
            return Column(nothing, table, len(trailing), dict.fromkeys(range(rows), reason), found=True)
        sources = {name: source for name, source in derived.sources.items() if not source.when or self.wanted(source)}
        arguments = {name: self.argument(sources.get(name)) for name in derived.inputs}
        doubtful = [source for source in sources.values() if not self.columns[source.key].plain]
        why = self.reasons(doubtful, table) if doubtful else {}
        values = _with_rows(np.asarray(derived.law(**arguments)), rows, trailing)
        values = self.without_missing(values, doubtful, table, len(trailing)) if doubtful else values
        values = _explained(derived, values, why)
        if derived.bound is not None and derived.bound.least > 0 and self.leads:
            values = scaled(values, derived.key, self.leads, np.flatnonzero(self.bounded(derived)))
        bound = self.bounds(derived, doubtful, why) if doubtful or derived.bound is not None else {}
        return Column(values, table, len(trailing), why, bound, found=True)

    def wanted(self, source: Input) -> bool:
        return all(self.columns[switch.key].on(switch) for switch in source.when)

    def argument(self, source: Input | None) -> Array:
        if source is None:
            return np.full(1, np.nan)
        column = self.columns[source.key]
        if source.word is not None:
            return self.indicator(source.key, source.word)
        return column.spread if source.tolerance else column.values

    def indicator(self, key: str, word: str) -> Array:
        """1 in the rows whose choice is this word, else 0; made once for each word."""
        if (key, word) not in self.indicators:
            self.indicators[key, word] = np.array([float(choice == word) for choice in self.columns[key].words])
        return self.indicators[key, word]

    def without_missing(self, values: Array, sources: Iterable[Input], table: str, trailing: int) -> Array:
        """The values with nan wherever a source that is needed there has none, along studies' axes too."""
        for source in sources:
            column = self.columns[source.key]
            if source.optional or source.word is not None or not (column.why or column.has_lead):
                continue
            absent = column.absent()
            if column.table not in {"", table}:
                absent = np.asarray(absent[..., list(self.counted(column.table))].any(axis=-1, keepdims=True))
            if source.unless:
                absent = np.asarray(absent & self.columns[source.unless].absent())
            if np.any(absent):
                values = np.where(absent[(...,) + (None,) * trailing], np.nan, values)
        return values

    def counted(self, table: str) -> Sequence[int]:
        """Rows of a table that a result of another table rests on: qubits in use, every row of the others."""
        return self.used if table == "qubit" else range(len(self.names[table]))

    def reasons(self, sources: Iterable[Input], table: str) -> dict[int, Reason]:
        why: dict[int, Reason] = {}
        for source in sources:
            if not source.optional and source.word is None and self.columns[source.key].why:
                why = {**self.spread(source, table), **why}
        return why

    def spread(self, source: Input, table: str) -> Mapping[int, Reason]:
        """The reasons of one source, on the rows of the result that need it."""
        column = self.columns[source.key]
        exempt = self.exempt(source.unless, table)
        if column.table == table:
            return {row: reason for row, reason in column.why.items() if row not in exempt} if exempt else column.why
        if column.table == "":
            reason = column.why[0]
        else:
            row = next((row for row in self.counted(column.table) if row in column.why), None)
            if row is None:
                return {}
            reason = column.why[row].of(self.names[column.table][row])
        return {row: reason for row in range(len(self.names[table])) if row not in exempt}

    def exempt(self, key: str, table: str) -> frozenset[int]:
        """Rows that type this given and so don't need the other source."""
        if not key:
            return frozenset()
        column = self.columns[key]
        rows = range(len(self.names[table]))
        return frozenset(row for row in rows if (0 if column.table == "" else row) not in column.why)

    def bounded(self, derived: Derived) -> Array:
        """Rows whose result is only an upper bound."""
        assert derived.bound is not None
        arguments = {name: self.columns[key].values for name, key in derived.bound.inputs.items()}
        rows = len(self.names[derived.per.value])
        return np.asarray(_with_rows(np.asarray(derived.bound.where(**arguments)), rows, ()).reshape(-1, rows)[0])

    def bounds(self, derived: Derived, sources: Iterable[Input], why: Mapping[int, Reason]) -> dict[int, str]:
        """Notes by row: of this result's own bound, and of the bounds it rests on."""
        table, notes = derived.per.value, dict[int, str]()
        if derived.bound is not None and not derived.bound.least:
            notes = {int(row): derived.bound.note for row in np.flatnonzero(self.bounded(derived))}
        for source in sources:
            column = self.columns[source.key]
            if column.bound and column.table == table:
                exempt = self.exempt(source.unless, table)
                notes = {row: note for row, note in column.bound.items() if row not in exempt} | notes
        return {row: note for row, note in notes.items() if row not in why}


def _with_rows(values: Array, rows: int, trailing: tuple[int, ...]) -> Array:
    """The values with all rows on their axis."""
    shape = (*values.shape[: max(0, values.ndim - 1 - len(trailing))], rows, *trailing)
    return values if values.shape == shape else np.broadcast_to(values, shape)


def _explained(derived: Derived, values: Array, why: dict[int, Reason]) -> Array:
    """The values with nan for infinities, and a reason in `why` for each row of the plan's own that a law left unknown.

    A nan that nobody explains is a bug.
    """
    finite = np.isfinite(values)
    if finite.all():  # also where there are no rows
        return values
    rows = finite.reshape(
        -1, len(values.shape) and values.shape[values.ndim - 1 - len(derived.trailing)], int(np.prod(derived.trailing))
    )[0].all(axis=-1)
    for row in np.flatnonzero(~rows):
        if int(row) not in why:
            why[int(row)] = _own_reason(derived, infinite=bool(np.isinf(values).any()))
    return np.where(finite, values, np.nan)


def _own_reason(derived: Derived, *, infinite: bool) -> Reason:
    """Why a law found no number although all it needs is known."""
    if derived.unknown is not None:
        return Reason(derived.unknown.reason, derived.unknown.given)
    if infinite:
        return Reason("is beyond all sensible numbers: check what was typed")
    raise AssertionError(f"{derived.key} is not a number although everything it needs is known")


def _sweep(columns: dict[str, Column], key: str, values: Array, names: Mapping[str, tuple[str, ...]]) -> None:
    table, _, name = key.rpartition(".")
    head, _, row = table.partition(".")
    column_key = f"{head}.{name}" if row else key
    column = columns.get(column_key)
    if column is None or column.words or column_key in graph().switched or (row and row not in names[head]):
        raise ValueError(f"{key} can't be swept: evaluate one plan for each value")
    zero_unset = column_key in givens() and givens()[column_key].zero_unset
    place = names[head].index(row) if row else None
    columns[column_key] = swept_column(column, values, place, zero_unset=zero_unset)
