"""Columns: the values of a plan's givens as arrays, each with its unknowns and the reasons for them.

A column has one number a row on its last axis (one row for a plan, one a qubit that is not dead), the components of a
vector behind it and studies' axes before it. What can't be known is nan and carries a `Reason`.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import lru_cache, partial
from itertools import chain
from operator import attrgetter, is_not
from typing import Any, cast

import numpy as np
from numpy.typing import NDArray

from planner.declare import Form, Given, Switch
from planner.graph import HOST, PAIR_PLACES, givens
from planner.kinds import Quantity
from planner.materials import material
from planner.physics import Array
from planner.plan import ROWS, Plan, unstated, usual
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

    def of(self, row: str) -> Reason:
        """The reason with the name of its row, kept where it has one."""
        return self if self.row else replace(self, row=row)

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

    `table` is the table whose rows these are ("": the plan, which is one row), `trailing` the number of axes behind the rows.
    `why` and `bound` hold, by row, the reason of an unknown and the note of a value that is only an upper bound.
    `tolerance` (SI, as `values`, None: all exact) and `words` (of a choice, one a row, "" where absent) belong to givens;
    `found` tells a result from what was typed or stands by default.
    """

    values: Array
    table: str
    trailing: int = 0
    why: Mapping[int, Reason] = field(default_factory=dict)
    bound: Mapping[int, str] = field(default_factory=dict)
    tolerance: Array | None = None
    words: tuple[str, ...] = ()
    found: bool = False

    @property
    def of_plan(self) -> bool:
        """Whether this is one value of the plan rather than one a row."""
        return self.table == ""

    @property
    def has_lead(self) -> bool:
        """Whether studies' axes stand before the rows."""
        return self.values.ndim > 1 + self.trailing

    @property
    def plain(self) -> bool:
        """Whether every row is known, no bound, and the same along every study's axis."""
        return not self.why and not self.bound and not self.has_lead

    @property
    def spread(self) -> Array:
        """Standard uncertainties, 0 where none was typed."""
        return np.zeros_like(self.values) if self.tolerance is None else self.tolerance

    def base(self) -> Array:
        """The values of the plan itself, one a row: the first along every study's axis."""
        base: Array = self.values[(0,) * (self.values.ndim - 1 - self.trailing)]
        return base

    def absent(self) -> NDArray[np.bool_]:
        """Where there is no number, along studies' axes and rows."""
        missing = np.isnan(self.values)
        return np.asarray(missing.any(axis=tuple(range(-self.trailing, 0)))) if self.trailing else missing

    def on(self, switch: Switch) -> bool:
        """Whether a switch on this column is on; off where the column is unknown. Without a test: any row is typed."""
        if switch.on is None:
            return len(self.why) < int(self.values.shape[-1 - self.trailing])
        if self.words:
            return bool(switch.on(self.words[0]))
        return not self.why and bool(switch.on(float(self.values.flat[0])))


def given_columns(plan: Plan, keys: Iterable[str], tables: Mapping[str, Sequence[Any]]) -> dict[str, Column]:
    """The columns of these givens; those of a list of tables have a value for each of its rows in `tables`."""
    columns: dict[str, Column] = {}
    by_table: dict[str, list[str]] = {}
    for key in keys:
        table, _, name = key.rpartition(".")
        if table in ROWS:
            by_table.setdefault(table, []).append(name)
        else:
            value = getattr(plan.chapter(table), name)
            columns[key] = _plan_column(key, value) if value is not None else _usual_column(key, plan.chip.material)
    for table, names in by_table.items():
        rows = tables[table]
        fields = (
            zip(*map(attrgetter("__class__", *names), rows), strict=True) if rows else iter([()] * (1 + len(names)))
        )
        for name, stated_values in zip(names, list(fields)[1:], strict=True):
            shared = getattr(plan.all_qubits, name) if table == "qubit" else None
            fallback = unstated(plan, table, name).value if shared is None else shared
            columns[f"{table}.{name}"] = _column(plan, f"{table}.{name}", table, stated_values, fallback)
    return columns


def host_columns(plan: Plan) -> dict[str, Column]:
    """What the chosen material says of itself."""
    host = material(plan.chip.material or "")
    numbers = (float(host.hole), float(host.valleys), host.moment, host.barrier.moment)
    return {key: Column(np.array([number]), "") for key, number in zip(HOST, numbers, strict=True)}


def pair_columns(plan: Plan, qubits: Sequence[str]) -> dict[str, Column]:
    """Positions of the qubits of each pair among those that are not dead, nan for one that is."""
    places = {name: float(place) for place, name in enumerate(qubits)}
    ends = {
        key: [places.get(getattr(pair, key.partition(".")[2].removesuffix("_place")), np.nan) for pair in plan.pair]
        for key in PAIR_PLACES
    }
    return {key: Column(np.array(values, dtype=float), "pair") for key, values in ends.items()}


def swept_column(column: Column, values: Array, row: int | None, *, zero_unset: bool) -> Column:
    """The column with other values along new leading axes, in one row or (None) in the plan's.

    A vector's components stand on the last axis of `values`; along a single axis, one number stands for all three. With
    `zero_unset` a 0 counts as absent.
    """
    trailing = column.trailing
    values = np.asarray(values, dtype=float)
    values = values[:, None] if trailing and values.ndim == 1 else values
    values = np.where(values == 0, np.nan, values) if zero_unset else values
    place = 0 if row is None else row
    spread = np.empty((*values.shape[: values.ndim - trailing], *column.values.shape))
    spread[...] = column.values
    np.moveaxis(spread, -1 - trailing, 0)[place] = values
    why = {other: reason for other, reason in column.why.items() if other != place}
    return replace(column, values=spread, why=why)


def _usual_column(key: str, material_name: str | None) -> Column:
    """The column of a given of the plan that nobody typed: the material's value, the default, or nothing."""
    table, _, name = key.rpartition(".")
    return _plan_column(key, usual(table, name, material_name).value)


@lru_cache(maxsize=4096)
def _plan_column(key: str, value: Value | None) -> Column:
    """The column of one value of the plan, kept since an edit changes one of them."""
    given = givens()[key]
    if given.form is not Form.QUANTITY:
        return Column(np.full(1, np.nan), "", words=("" if value is None else str(value),))
    return _numbers(key, given, [value], "", max(given.sizes))


def _column(plan: Plan, key: str, table: str, stated: Sequence[Value | None], fallback: Value | None) -> Column:
    given = givens()[key]
    if given.form is not Form.QUANTITY:
        usual = "" if fallback is None else str(fallback)
        words = [usual if value is None else str(value) for value in stated] if any(map(_is_stated, stated)) else None
        return Column(np.full(len(stated), np.nan), table, words=tuple(words or [usual] * len(stated)))
    size = len(plan.stage) if given.per_stage else max(given.sizes)
    if not any(map(_is_stated, stated)) and stated:  # one value for every row: read it once
        one = _numbers(key, given, [fallback], table, size)
        shape = (len(stated), *one.values.shape[1:])
        tolerance = None if one.tolerance is None else np.broadcast_to(one.tolerance, shape)
        why = dict.fromkeys(range(len(stated)), one.why[0]) if one.why else {}
        return replace(one, values=np.broadcast_to(one.values, shape), why=why, tolerance=tolerance)
    return _numbers(key, given, [fallback if value is None else value for value in stated], table, size)


def _numbers(key: str, given: Given, entries: Sequence[Value | None], table: str, size: int) -> Column:
    quantities = cast("Sequence[Quantity | None]", entries)  # the given is a quantity, so its values are
    absent = [] if all(map(_is_stated, quantities)) else [row for row, entry in enumerate(quantities) if entry is None]
    quantities = [entry or _NOTHING for entry in quantities] if absent else quantities
    scalar = not given.per_stage and size == 1
    array = _array(list(map(_VALUE, quantities)), size, scalar=scalar)
    if given.zero_unset:
        absent = np.flatnonzero(np.nan_to_num(array) == 0).tolist()
    array[absent] = np.nan
    spreads = list(map(_TOLERANCE, quantities))
    stated = any(map(_is_stated, spreads))
    tolerance = _array([spread or 0.0 for spread in spreads], size, scalar=scalar) if stated else None
    array.flags.writeable = False  # the columns of values that nobody typed are kept and shared
    why = dict.fromkeys(absent, Reason(NOT_TYPED, key))
    return Column(array, table, 0 if scalar else 1, why, tolerance=tolerance)


def _array(values: Sequence[float | tuple[float, ...]], size: int, *, scalar: bool) -> Array:
    """Numbers, or vectors in which one number stands for each component, as an array."""
    if scalar:
        return np.array(values, dtype=float)
    if not size:  # one number a stage, and no stages
        return np.zeros((len(values), 0))
    numbers = chain.from_iterable(value if isinstance(value, tuple) else (value,) * size for value in values)
    return np.fromiter(numbers, dtype=float, count=size * len(values)).reshape(-1, size)
