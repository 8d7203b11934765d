"""Margins and verdicts: what is allowed over what is expected, the worst row of each limit, and why."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from planner.columns import Column, Reason
from planner.declare import Compare, Limit, Lock, Missing
from planner.graph import givens, repairable_until
from planner.leads import Lead, changes, low_end, root_sum_square
from planner.physics import Array

LARGEST_MARGIN = 1e6
VERDICTS = ("short", "unknown", "tight", "clear")  # in the order of what is worst
SHORT, UNKNOWN, TIGHT, CLEAR = range(4)
_NOT_MADE = CLEAR + 1  # a comparison that a row does not make is never its worst

Rows = NDArray[np.intp]


class Judged(NamedTuple):
    """One comparison over the rows of its table: both sides, margins (nan unknown) with their ends, and verdict codes.

    `low` and `high` are what the margins may be; `softened` is, by row, why a verdict is not the one of the margin alone.
    """

    compare: Compare
    table: str
    rows: Rows
    allowed: Array
    expected: Array
    margins: Array
    low: Array
    high: Array
    codes: NDArray[np.int64]
    softened: Mapping[int, str]


@dataclass(frozen=True, slots=True)
class Margin:
    """A limit's margin over the rows it judges, and the worst of them.

    `margins` and `codes` (positions in VERDICTS) are those of the rows that the limit is of, of the worse comparison each.
    `worst` is the comparison and `place` the row of the worst, `row` its name ("" where the comparison is one of the plan).
    `reason` says why it is unknown, `until` is the latest lock of the choices that act on it.
    """

    limit: Limit
    rows: Rows
    margins: Array
    codes: NDArray[np.int64]
    worst: Judged
    place: int
    row: str
    reason: Reason | None
    until: Lock | None

    @property
    def name(self) -> str:
        """Name of the margin."""
        return self.limit.name

    @property
    def compare(self) -> Compare:
        """The comparison that is worst."""
        return self.worst.compare

    @property
    def value(self) -> float | None:
        """The worst margin, None where it is unknown."""
        return self._of_worst(self.worst.margins)

    @property
    def low(self) -> float | None:
        """The lowest that the worst margin may be."""
        return self._of_worst(self.worst.low)

    @property
    def high(self) -> float | None:
        """The highest that the worst margin may be."""
        return self._of_worst(self.worst.high)

    @property
    def allowed(self) -> float | None:
        """What is allowed in the worst row."""
        return self._of_worst(self.worst.allowed)

    @property
    def expected(self) -> float | None:
        """What is expected in the worst row."""
        return self._of_worst(self.worst.expected)

    def _of_worst(self, values: Array) -> float | None:
        made = self.worst.codes[self.place] != _NOT_MADE
        return number_or_none(values[self.place]) if made else None

    @property
    def note(self) -> str:
        """Why the verdict is not the one of the margin alone."""
        return self.worst.softened.get(self.place, "")

    @property
    def code(self) -> int:
        """Position of the worst verdict in VERDICTS."""
        return int(self.worst.codes[self.place]) if self.reason is None else UNKNOWN

    @property
    def verdict(self) -> str:
        """Verdict of the worst row."""
        return VERDICTS[self.code]

    @property
    def rank(self) -> tuple[int, float]:
        """Sorts margins worst first."""
        return self.code, self.value or 0.0


@dataclass(frozen=True, slots=True)
class Bench:
    """What margins are judged from: the columns, the rows in use, the names of every table's rows, the doubtful numbers."""

    columns: Mapping[str, Column]
    used: Rows
    names: Mapping[str, tuple[str, ...]]
    leads: Sequence[Lead]
    wanted: float
    typed: frozenset[str]


def judge(bench: Bench, limits: Sequence[Limit]) -> tuple[tuple[Margin, ...], dict[str, str]]:
    """The asked margins over the rows in use, and the reasons of those that are not asked."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return _judge(bench, limits)


def _judge(bench: Bench, limits: Sequence[Limit]) -> tuple[tuple[Margin, ...], dict[str, str]]:
    margins: list[Margin] = []
    not_asked: dict[str, str] = {}
    for limit in limits:
        off = next((ask for ask in limit.asked if not bench.columns[ask.switch.key].on(ask.switch)), None)
        if off is not None:
            not_asked[limit.name] = off.otherwise
        else:
            margins.append(_margin(bench, limit))
    return tuple(margins), not_asked


def typed_though_found(columns: Mapping[str, Column]) -> frozenset[str]:
    """Givens that are typed although they could be found from results."""
    found = (key for key, given in givens().items() if given.missing is Missing.FOUND and key in columns)
    return frozenset(key for key in found if not columns[key].found)


def number_or_none(value: float) -> float | None:
    """A float, None for nan."""
    return None if np.isnan(value) else float(value)


def _margin(bench: Bench, limit: Limit) -> Margin:
    made = [
        compare
        for compare in limit.compares
        if compare.when is None or bench.columns[compare.when.key].on(compare.when)
    ]
    judged = [_judged(bench, limit, compare) for compare in made]
    judged = [one for one in judged if (one.codes != _NOT_MADE).any()] or judged[:1]
    ranks = [_rank(one) for one in judged]
    first = min(range(len(judged)), key=lambda number: float(ranks[number].min()))
    chosen, place = judged[first], int(np.argmin(ranks[first]))
    row = int(chosen.rows[place])
    ends = [bench.columns[key] for key in (chosen.compare.allowed, chosen.compare.expected)]
    name = "" if all(column.of_plan for column in ends) else bench.names[chosen.table][row]
    reason = _reason(ends, row, bench.names)
    if chosen.codes[place] == _NOT_MADE:
        reason = Reason(limit.none_made.reason, limit.none_made.given)
    margins, codes = _each_row(judged, ranks) if limit.per.value == chosen.table else (chosen.margins, chosen.codes)
    until = repairable_until(tuple(one.compare for one in judged), bench.typed)
    return Margin(limit, chosen.rows, margins, codes, chosen, place, name, reason, until)


def _each_row(judged: Sequence[Judged], ranks: Sequence[Array]) -> tuple[Array, NDArray[np.int64]]:
    """Margins and codes of the worse comparison of each row."""
    every, margins, codes = ranks[0], judged[0].margins, judged[0].codes
    for one, rank in zip(judged[1:], ranks[1:], strict=True):
        if rank.shape == every.shape:
            worse = rank < every
            every = np.minimum(rank, every)
            margins, codes = np.where(worse, one.margins, margins), np.where(worse, one.codes, codes)
    return margins, codes


def _rank(judged: Judged) -> Array:
    """A number that sorts rows worst first: by verdict, then by size."""
    known = np.where(np.isnan(judged.margins), 0.0, judged.margins)
    return np.asarray(judged.codes * (2 * LARGEST_MARGIN) + np.minimum(known, LARGEST_MARGIN), dtype=np.float64)


def _judged(bench: Bench, limit: Limit, compare: Compare) -> Judged:
    ends = [bench.columns[compare.allowed], bench.columns[compare.expected]]
    table = next((column.table for column in ends if not column.of_plan), limit.per.value)
    rows = bench.used if table == "qubit" else np.arange(len(bench.names[table]))
    allowed, expected = (_at(column, rows, ranged=bool(bench.leads)) for column in ends)
    along = _ratio(allowed, expected)
    margins = along[0]
    tight = np.where(margins <= bench.wanted, TIGHT if limit.tight_counts else CLEAR, CLEAR)
    codes = np.where(np.isnan(margins), UNKNOWN, np.where(margins < 1, SHORT, tight))
    low, high, softened = margins, margins, dict[int, str]()
    if len(along) > 1 or any(column.bound for column in ends):
        fall, rise = changes(along, len(bench.leads))
        low, high = low_end(margins, fall), np.minimum(margins + root_sum_square(rise), LARGEST_MARGIN)
        codes, softened = _softened(bench, ends, rows, codes, fall, rise, margins, low)
    for key in compare.only_with:
        made = ~np.isnan(_at(bench.columns[key], rows, ranged=False)[0])
        margins, codes = np.where(made, margins, LARGEST_MARGIN), np.where(made, codes, _NOT_MADE)
    return Judged(compare, table, rows, allowed[0], expected[0], margins, np.maximum(low, 0.0), high, codes, softened)


def _ratio(allowed: Array, expected: Array) -> Array:
    ratio = np.maximum(allowed, 0.0) / expected
    ratio = np.where((expected == 0) & (allowed >= 0), np.inf, ratio)  # nothing expected is within anything allowed
    return np.minimum(ratio, LARGEST_MARGIN)


def _at(column: Column, rows: Rows, *, ranged: bool) -> Array:
    """Values at these rows, along the leading axis (at least one entry)."""
    values = column.values if column.has_lead and ranged else column.base()[None]
    if column.of_plan:
        return np.repeat(values, len(rows), axis=-1)
    return values if len(rows) == values.shape[-1] else values[..., rows]


def _softened(
    bench: Bench,
    ends: Sequence[Column],
    rows: Rows,
    codes: NDArray[np.int64],
    fall: Array,
    rise: Array,
    margins: Array,
    low: Array,
) -> tuple[NDArray[np.int64], dict[int, str]]:
    """Verdicts that ranges temper: short is tight where only untyped values or bounds may make it so, clear is tight where
    the margin may be short; with the sentence that names the number to type or measure.
    """
    untyped = np.array([not lead.typed for lead in bench.leads], dtype=bool)
    reached = margins + root_sum_square(rise[untyped])
    softened: dict[int, str] = {}
    codes = codes.copy()
    for place in np.flatnonzero((codes == SHORT) | ((codes == CLEAR) & (low < 1))):
        note = _note(ends, int(rows[place]))
        if codes[place] == CLEAR:
            lead = bench.leads[int(np.argmin(fall[:, place]))]
            softened[int(place)] = f"may be short: {lead.name} decides"
        elif reached[place] >= 1:
            lead = bench.leads[int(np.argmax(np.where(untyped, rise[:, place], -1.0)))]
            softened[int(place)] = lead.name if lead.factor else f"may be met: type {lead.name} first"
        elif note:
            softened[int(place)] = note
        else:
            continue
        codes[place] = TIGHT
    return codes, softened


def _reason(ends: Sequence[Column], row: int, names: Mapping[str, tuple[str, ...]]) -> Reason | None:
    for column in ends:
        reason = column.why.get(0 if column.of_plan else row)
        if reason is not None:
            return reason if column.of_plan else reason.of(names[column.table][row])
    return None


def _note(ends: Sequence[Column], row: int) -> str:
    """Why a side may be anything below its bound; empty where it may not."""
    return next((note for column in ends if (note := column.bound.get(0 if column.of_plan else row))), "")
