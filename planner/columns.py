"""Columns: the values of a plan's givens as arrays, each with its unknowns and the reasons for them.

A column has one number a row on its last axis (one row for a plan, one a qubit that is not dead), the components of a
vector behind it and studies' axes before it. What can't be known is nan and carries a `Reason`.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import partial
from itertools import chain
from operator import attrgetter, is_not
from typing import cast

import numpy as np

from planner.chapters.qubit import Qubit
from planner.declare import Form, Given, Switch
from planner.graph import HOST, givens
from planner.kinds import Quantity
from planner.materials import material
from planner.physics import Array
from planner.plan import ROWS, Plan, unstated
from planner.values import Value


@dataclass(frozen=True, slots=True)
class Reason:
    """Why a number is unknown: a sentence, the given (rows under their table's name) that would end it, and its row."""

    text: str
    given: str = ""
    row: str = ""

    @property
    def key(self) -> str:
        """Dotted key of the given to type, with the name of its row where that is known."""
        table, _, name = self.given.rpartition(".")
        return f"{table}.{self.row}.{name}" if table in ROWS and self.row else self.given

    def __str__(self) -> str:
        if self.text == NOT_TYPED:
            return f"{self.key} {self.text}"
        return f"{self.row}: {self.text}" if self.row else self.text


NOT_TYPED = "is not typed"
# Called once a row and given: functions of the standard library, several times faster over a thousand rows.
_VALUE, _TOLERANCE = attrgetter("value"), attrgetter("tolerance")
_is_stated = partial(is_not, None)
_NOTHING = Quantity(text="", value=np.nan, tolerance=None, unit="", origin="")


@dataclass(frozen=True, slots=True)
class Column:
    """One given or result, `values` as described above.

    `why` and `bound` hold, by row, the reason of an unknown and the note of a value that is only an upper bound.
    `tolerance` (SI, as `values`, None: all exact) and `words` (of a choice, one a row) belong to givens. `of_plan` tells a
    plan's one row from a qubit's.
    """

    values: Array
    of_plan: bool
    why: Mapping[int, Reason] = field(default_factory=dict)
    bound: Mapping[int, str] = field(default_factory=dict)
    tolerance: Array | None = None
    words: tuple[str, ...] = ()

    @property
    def spread(self) -> Array:
        """Standard uncertainties, 0 where none was typed."""
        return np.zeros_like(self.values) if self.tolerance is None else self.tolerance

    def base(self) -> Array:
        """The values of the plan itself, one a row: the first along every study's axis."""
        base: Array = self.values.reshape(-1, self.values.shape[-1])[0]
        return base

    def on(self, switch: Switch) -> bool:
        """Whether a switch on this column is on; off where the column is unknown."""
        if self.words:
            return bool(switch.on(self.words[0]))
        return not self.why and bool(switch.on(float(self.values.flat[0])))


def given_column(plan: Plan, key: str, qubits: Sequence[Qubit]) -> Column:
    """The column of a given, `qubit` givens with one value for each of these rows of the plan."""
    table, _, name = key.rpartition(".")
    if table != "qubit":
        return _column(key, [getattr(plan.chapter(table), name)], unstated(plan, table, name).value, of_plan=True)
    shared = getattr(plan.all_qubits, name)
    fallback = unstated(plan, table, name).value if shared is None else shared
    return _column(key, list(map(attrgetter(name), qubits)), fallback, of_plan=False)


def host_columns(plan: Plan) -> dict[str, Column]:
    """What the chosen material says of itself."""
    host = material(plan.chip.material or "")
    numbers = (float(host.hole), float(host.valleys), host.moment, host.barrier.moment)
    return {key: Column(np.array([number]), of_plan=True) for key, number in zip(HOST, numbers, strict=True)}


def swept_column(column: Column, values: Array, row: int | None) -> Column:
    """The column with other values along new leading axes, in one row or (None) in all."""
    values = np.asarray(values, dtype=float)
    if row is None:
        return Column(values[..., None], column.of_plan, tolerance=column.tolerance)
    spread = np.broadcast_to(column.values, (*values.shape, *column.values.shape)).copy()
    spread[..., row] = values
    why = {other: reason for other, reason in column.why.items() if other != row}
    return Column(spread, column.of_plan, why, tolerance=column.tolerance)


def _column(key: str, stated: list[Value | None], fallback: Value | None, *, of_plan: bool) -> Column:
    given = givens()[key]
    if given.form is not Form.QUANTITY:
        words = tuple(str(fallback if value is None else value) for value in stated)
        return Column(np.full(len(stated), np.nan), of_plan, words=words)
    if not any(map(_is_stated, stated)):  # one value for every row: read it once
        one = _numbers(key, given, [fallback], of_plan=of_plan)
        shape = (len(stated), *one.values.shape[1:])
        tolerance = None if one.tolerance is None else np.broadcast_to(one.tolerance, shape)
        why = dict.fromkeys(range(len(stated)), one.why[0]) if one.why else {}
        return Column(np.broadcast_to(one.values, shape), of_plan, why, tolerance=tolerance)
    return _numbers(key, given, [fallback if value is None else value for value in stated], of_plan=of_plan)


def _numbers(key: str, given: Given, entries: Sequence[Value | None], *, of_plan: bool) -> Column:
    quantities = cast(Sequence[Quantity | None], entries)  # the given is a quantity, so its values are
    absent = [] if all(map(_is_stated, quantities)) else [row for row, entry in enumerate(quantities) if entry is None]
    quantities = [entry or _NOTHING for entry in quantities] if absent else quantities
    size = max(given.sizes)
    array = _array(list(map(_VALUE, quantities)), size)
    if given.zero_unset:
        absent = np.flatnonzero(np.nan_to_num(array) == 0).tolist()
    array[absent] = np.nan
    spreads = list(map(_TOLERANCE, quantities))
    tolerance = _array([spread or 0.0 for spread in spreads], size) if any(map(_is_stated, spreads)) else None
    return Column(array, of_plan, dict.fromkeys(absent, Reason(NOT_TYPED, key)), tolerance=tolerance)


def _array(values: Sequence[float | tuple[float, ...]], size: int) -> Array:
    """Numbers, or vectors in which one number stands for each component, as an array."""
    if size == 1:
        return np.array(values, dtype=float)
    numbers = chain.from_iterable(value if isinstance(value, tuple) else (value,) * size for value in values)
    return np.fromiter(numbers, dtype=float, count=size * len(values)).reshape(-1, size)
