"""Plan -> evaluation: every result and margin of a plan, once, on arrays. A reason of an unknown travels downstream."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from planner.columns import Column, Reason, given_column, host_columns, swept_column
from planner.declare import Derived, Input, Lock, Per
from planner.graph import Graph, graph
from planner.margins import CLEAR, VERDICTS, Margin, judge
from planner.physics import Array
from planner.plan import Address, Plan, Resolved, addresses, key_of, resolved
from planner.values import number

if TYPE_CHECKING:
    import pint

WANTED_MARGIN = Address("", None, "wanted_margin")


@dataclass(frozen=True, slots=True)
class Evaluation:
    """Everything that follows from a plan.

    `rows` are the indices of its qubits that are not dead, `names` theirs; `used` are the positions in `rows` that are in
    use and judged. `columns` hold givens and results by key.
    """

    plan: Plan
    graph: Graph
    rows: tuple[int, ...]
    names: tuple[str, ...]
    used: tuple[int, ...]
    columns: Mapping[str, Column]
    margins: tuple[Margin, ...]
    not_asked: Mapping[str, str]

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

    def quantity(self, key: str) -> pint.Quantity[Any]:
        """A result as a pint quantity in SI units, rows on the last axis; unknown values are nan."""
        from planner.unitstable import as_pint  # pint takes longer to load than a plan to evaluate

        quantity: pint.Quantity[Any] = as_pint(self.columns[key].values, self.derived(key).kind.si)
        return quantity


def evaluate(plan: Plan, swept: Mapping[str, Array] | None = None) -> Evaluation:
    """Evaluate a plan without problems (`plan.problems`).

    `swept` replaces the SI values of givens (`magnet.field`, `qubit.Q1.rabi_frequency`) by arrays, whose axes every result
    that depends on them then leads with; verdicts are those of the first entry.
    """
    wiring = graph()
    roles = given_column(plan, "qubit.role", plan.qubit).words
    rows = tuple(row for row, role in enumerate(roles) if role != "dead")
    qubits = [plan.qubit[row] for row in rows]
    names = tuple(str(qubit.name) for qubit in qubits)
    columns = {key: given_column(plan, key, qubits) for key in wiring.needed} | host_columns(plan)
    for key, values in (swept or {}).items():
        _sweep(columns, key, values, names)
    used = tuple(row for row, word in enumerate(columns["qubit.role"].words) if word == "use")
    scope = _Scope(columns, names, used)
    with np.errstate(invalid="ignore", divide="ignore", over="ignore", under="ignore"):
        for derived in wiring.order:
            typed = columns.get(derived.key)
            if typed is None or typed.why:
                columns[derived.key] = scope.column(derived)
    wanted = resolved(plan, WANTED_MARGIN).value
    assert wanted is not None and not isinstance(wanted, str)
    margins, not_asked = judge(columns, wiring, used, names, number(wanted))
    return Evaluation(plan, wiring, rows, names, used, columns, margins, not_asked)


def resolve_all(plan: Plan) -> dict[str, Resolved]:
    """Every given that has a value, by its dotted key, qubits with what they take from `all_qubits`."""
    places = {key_of(plan, address): address for address in addresses(plan) if address.table != "all_qubits"}
    found = {key: resolved(plan, address) for key, address in places.items()}
    return {key: entry for key, entry in found.items() if entry.value is not None}


def too_late(until: Lock | None, passed: str) -> bool:
    """Whether the lock has been passed."""
    return until is not None and passed != "none" and until <= Lock[passed.upper()]


@dataclass(frozen=True, slots=True)
class _Scope:
    """What a result is computed from: the columns so far, the rows' names, and which of them are in use."""

    columns: dict[str, Column]
    names: tuple[str, ...]
    used: tuple[int, ...]

    def column(self, derived: Derived) -> Column:
        of_plan = derived.per is Per.PLAN
        rows = 1 if of_plan else len(self.names)
        if derived.only is not None and not self.columns[derived.only.key].on(derived.only):
            nothing = np.full((rows, *derived.trailing), np.nan)
            return Column(nothing, of_plan, dict.fromkeys(range(rows), Reason(derived.off)))
        sources = {name: source for name, source in derived.sources.items() if self.wanted(source)}
        arguments = {name: self.argument(sources.get(name)) for name in derived.inputs}
        why = self.reasons(sources.values(), of_plan)
        values = _with_rows(np.asarray(derived.law(**arguments)), rows, derived.trailing)
        values, why = _explained(derived, values, why)
        return Column(values, of_plan, why, self.bounds(derived, sources.values(), why))

    def wanted(self, source: Input) -> bool:
        return source.when is None or self.columns[source.when.key].on(source.when)

    def argument(self, source: Input | None) -> Array:
        if source is None:
            return np.full(1, np.nan)
        column = self.columns[source.key]
        if source.word:
            return np.array([float(word == source.word) for word in column.words])
        return column.spread if source.tolerance else column.values

    def reasons(self, sources: Iterable[Input], of_plan: bool) -> dict[int, Reason]:
        why: dict[int, Reason] = {}
        for source in sources:
            if not source.optional and self.columns[source.key].why:
                for row, reason in self.spread(source, of_plan):
                    why.setdefault(row, reason)
        return why

    def spread(self, source: Input, of_plan: bool) -> Iterator[tuple[int, Reason]]:
        """The reasons of one source, on the rows of the result that need it."""
        column = self.columns[source.key]
        if column.of_plan:
            exempt = self.exempt(source.unless)
            yield from ((row, column.why[0]) for row in range(1 if of_plan else len(self.names)) if row not in exempt)
        elif of_plan:
            row = next((row for row in self.used if row in column.why), None)
            if row is not None:
                reason = column.why[row]
                yield 0, reason if reason.row else Reason(reason.text, reason.given, self.names[row])
        else:
            exempt = self.exempt(source.unless)
            yield from ((row, reason) for row, reason in column.why.items() if row not in exempt)

    def exempt(self, key: str) -> frozenset[int]:
        """Rows that type this given and so don't need the other source."""
        if not key:
            return frozenset()
        column = self.columns[key]
        return frozenset(row for row in range(len(self.names)) if (0 if column.of_plan else row) not in column.why)

    def bounds(self, derived: Derived, sources: Iterable[Input], why: Mapping[int, Reason]) -> dict[int, str]:
        """Notes by row: of this result's own bound, and of the bounds it rests on."""
        notes: dict[int, str] = {}
        if derived.bound is not None:
            arguments = {name: self.columns[key].values for name, key in derived.bound.inputs.items()}
            flags = _with_rows(np.asarray(derived.bound.where(**arguments)), len(self.names), ())
            notes = {int(row): derived.bound.note for row in np.flatnonzero(flags.reshape(-1, len(self.names))[0])}
        for source in sources:
            column = self.columns[source.key]
            if column.bound and derived.per is Per.QUBIT:
                exempt = self.exempt(source.unless)
                notes = {row: note for row, note in column.bound.items() if row not in exempt} | notes
        return {row: note for row, note in notes.items() if row not in why}


def _with_rows(values: Array, rows: int, trailing: tuple[int, ...]) -> Array:
    """The values with all rows on their axis."""
    shape = (*values.shape[:max(0, values.ndim - 1 - len(trailing))], rows, *trailing)
    return values if values.shape == shape else np.broadcast_to(values, shape)


def _explained(derived: Derived, values: Array, why: dict[int, Reason]) -> tuple[Array, dict[int, Reason]]:
    """Rows with a reason set to nan, and a law's own nan given its reason. A nan that nobody explains is a bug."""
    finite = np.isfinite(values)
    if not why and finite.all():
        return values, why
    axes = tuple(range(-len(derived.trailing), 0))
    known = finite.all(axis=axes) if axes else finite
    for row in np.flatnonzero(~known.reshape(-1, known.shape[-1])[0]):
        if int(row) not in why:
            if derived.unknown is None:
                raise AssertionError(f"{derived.key} is not a number although everything it needs is known")
            why[int(row)] = Reason(derived.unknown.reason, derived.unknown.given)
    known = np.array(known)
    known[..., list(why)] = False
    return np.where(known.reshape(known.shape + (1,) * len(axes)), values, np.nan), why


def _sweep(columns: dict[str, Column], key: str, values: Array, names: tuple[str, ...]) -> None:
    table, _, name = key.rpartition(".")
    head, _, row = table.partition(".")
    column_key = f"{head}.{name}" if row else key
    columns[column_key] = swept_column(columns[column_key], values, names.index(row) if row else None)
