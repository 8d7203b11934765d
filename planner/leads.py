"""Ranges: what a plan's numbers may be, as one leading axis of the evaluation.

Entry 0 of the axis is the plan itself; then each given that has a tolerance is moved by one tolerance, and each value that
nobody typed to the ends of its known range, one at a time: two entries each. The last entries scale results that are only
upper bounds. The changes that these make are added root-sum-square on either side.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from planner.columns import Column
from planner.declare import Given
from planner.graph import givens, graph
from planner.kinds import Quantity
from planner.physics import Array
from planner.plan import ROWS, Address, Plan, resolved
from planner.ranges import coupling_spans, span
from planner.values import number

EXACT_ROWS = 64  # beyond so many qubits a given of all of them is moved in all at once, which misses only spacings


@dataclass(frozen=True, slots=True)
class Lead:
    """One doubtful number: its key in the columns, the rows (None: all) and component it stands in, and both ends.

    `typed` tells a tolerance from the range of a value that nobody typed, `name` is what a sentence calls it. A bounded
    result has `low` and `high` as factors.
    """

    key: str
    rows: tuple[int, ...] | None
    component: int | None
    low: float | Array
    high: float | Array
    typed: bool
    name: str
    factor: bool = False


def leads_of(plan: Plan, rows: Sequence[int]) -> tuple[Lead, ...]:
    """All doubtful numbers of a plan that results use; `rows` are the qubits that are not dead."""
    found: list[Lead] = []
    for key in graph().needed:
        table, _, name = key.rpartition(".")
        given = givens()[key]
        if given.kind is None or given.per_stage:
            continue
        if table in ROWS:
            found += _of_rows(plan, key, table, name, given, rows if table == "qubit" else range(len(plan.rows(table))))
        else:
            found += _of_value(plan, Address(table, None, name), key, None, given)
    for key, low, high in coupling_spans(plan.chip.material or ""):
        found.append(Lead(key, None, None, low, high, typed=False, name="the hyperfine coupling of the material"))
    for derived in graph().order:
        if derived.bound is not None and derived.bound.least > 0:
            found.append(
                Lead(
                    derived.key, None, None, derived.bound.least, 1.0, typed=False, name=derived.bound.note, factor=True
                )
            )
    return tuple(found)


def moved(column: Column, key: str, leads: Sequence[Lead]) -> Column:
    """The column of a given along the leading axis."""
    mine = [(place, lead) for place, lead in enumerate(leads) if lead.key == key and not lead.factor]
    if not mine:
        return column
    values = np.repeat(column.values[None], 1 + 2 * len(leads), axis=0)
    for place, lead in mine:
        where = slice(None) if lead.rows is None else list(lead.rows)
        target = values if lead.component is None else values[..., lead.component]
        target[1 + 2 * place, where] = lead.low
        target[2 + 2 * place, where] = lead.high
    return replace(column, values=values)


def scaled(values: Array, key: str, leads: Sequence[Lead], rows: NDArray[np.intp]) -> Array:
    """A bounded result with its bounded rows scaled down at the entries that are for it."""
    mine = [(place, lead) for place, lead in enumerate(leads) if lead.key == key and lead.factor]
    if not mine or not rows.size:
        return values
    values = np.array(np.broadcast_to(values, (1 + 2 * len(leads), values.shape[-1])))
    for place, lead in mine:
        values[1 + 2 * place, rows] *= lead.low
    return values


def changes(values: Array, count: int) -> tuple[Array, Array]:
    """Largest fall and rise that each doubtful number makes, shape (numbers, rows), from values along the leading axis."""
    if len(values) == 1:  # depends on none of them
        return np.zeros((count, values.shape[-1])), np.zeros((count, values.shape[-1]))
    steps = (values[1:] - values[0]).reshape(count, 2, -1)
    steps = np.where(np.isnan(steps), 0.0, steps)
    return np.minimum(steps.min(axis=1), 0.0), np.maximum(steps.max(axis=1), 0.0)


def low_end(base: Array, falls: Array) -> Array:
    """The lowest that values may be: the falls added root-sum-square, but for positive values never below what all falls
    together make as factors, which wide ranges would otherwise pass by far.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        together = base * np.prod(1 + falls / base, axis=0)
    lowest: Array = base - root_sum_square(falls)
    return np.where(base > 0, np.fmax(lowest, together), lowest)


def root_sum_square(steps: Array) -> Array:
    """Independent changes together."""
    return np.asarray(np.sqrt((steps**2).sum(axis=0)))


def _of_rows(plan: Plan, key: str, table: str, name: str, given: Given, rows: Sequence[int]) -> Iterator[Lead]:
    stated = [(place, row) for place, row in enumerate(rows) if _doubtful(getattr(plan.rows(table)[row], name))]
    each = [lead for place, row in stated for lead in _of_value(plan, Address(table, row, name), key, (place,), given)]
    yield from _together(each) if table == "qubit" and len(rows) > EXACT_ROWS else each
    if table == "qubit" and _doubtful(getattr(plan.all_qubits, name)):
        sharing = tuple(place for place, row in enumerate(rows) if getattr(plan.qubit[row], name) is None)
        if sharing:
            yield from _of_value(plan, Address("all_qubits", None, name), key, sharing, given)


def _together(each: Sequence[Lead]) -> Iterator[Lead]:
    """The same given of many qubits moved in all of them at once."""
    for component in dict.fromkeys(lead.component for lead in each):
        alike = [lead for lead in each if lead.component == component]
        rows = tuple(row for lead in alike for row in lead.rows or ())
        low, high = np.array([lead.low for lead in alike]), np.array([lead.high for lead in alike])
        yield replace(alike[0], rows=rows, low=low, high=high)


def _doubtful(value: object) -> bool:
    return isinstance(value, Quantity) and value.tolerance is not None


def _of_value(plan: Plan, address: Address, key: str, rows: tuple[int, ...] | None, given: Given) -> Iterator[Lead]:
    value, source = resolved(plan, address)
    if not isinstance(value, Quantity):
        return
    if value.tolerance is not None:
        yield from _by_tolerance(value, key, rows, given)
    elif source in {"default", "material"}:
        found = span(key, plan.chip.material)
        if found is not None:
            yield Lead(key, rows, None, number(found.low), number(found.high), typed=False, name=key)


def _by_tolerance(value: Quantity, key: str, rows: tuple[int, ...] | None, given: Given) -> Iterator[Lead]:
    numbers = value.value if isinstance(value.value, tuple) else (value.value,)
    spreads = value.tolerance if isinstance(value.tolerance, tuple) else (value.tolerance or 0.0,) * len(numbers)
    for component, (middle, spread) in enumerate(zip(numbers, spreads, strict=True)):
        if spread:
            part = component if len(numbers) > 1 else None
            low, high = (_inside(given, middle, end) for end in (middle - spread, middle + spread))
            yield Lead(key, rows, part, low, high, typed=True, name=key)


def _inside(given: Given, middle: float, end: float) -> float:
    """The end of a range, kept within what the given accepts."""
    if given.above is not None and end <= given.above:
        end = given.above + (middle - given.above) * 1e-3
    if given.below is not None and end >= given.below:
        end = given.below - (given.below - middle) * 1e-3
    if given.least is not None:
        end = max(end, given.least)
    return end if given.most is None else min(end, given.most)
