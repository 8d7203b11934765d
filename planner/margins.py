"""Margins and verdicts: what is allowed over what is expected, the worst row of each limit, and why."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from planner.columns import Column, Reason
from planner.declare import Compare, Limit, Lock, Missing, Per
from planner.graph import givens, repairable_until
from planner.physics import Array

LARGEST_MARGIN = 1e6
VERDICTS = ("short", "unknown", "tight", "clear")  # in the order of what is worst
SHORT, UNKNOWN, TIGHT, CLEAR = range(4)
_NOT_MADE = CLEAR + 1  # a comparison that a row does not make is never its worst

Rows = NDArray[np.intp]


class Judged(NamedTuple):
    """One comparison over the judged rows: both sides, margins (nan unknown) and verdict codes."""

    compare: Compare
    allowed: Array
    expected: Array
    margins: Array
    codes: NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Margin:
    """A limit's margin over the rows it judges, and the worst of them.

    `rows` are the positions of the judged rows, `margins` and `codes` (positions in VERDICTS) one for each, of the worse
    comparison. `worst` is the position of the worst in `rows`, `row` the name of that qubit ("" where the
    comparison is one of the plan).
    `allowed` and `expected` are those of the worst, None where unknown, `reason` says why, `note` why a verdict is tempered.
    `until` is the latest lock of the choices that act on it.
    """

    limit: Limit
    rows: Rows
    margins: Array
    codes: NDArray[np.int64]
    worst: int
    row: str
    compare: Compare
    allowed: float | None
    expected: float | None
    reason: Reason | None
    note: str
    until: Lock | None

    @property
    def name(self) -> str:
        """Name of the margin."""
        return self.limit.name

    @property
    def value(self) -> float | None:
        """The worst margin, None where it is unknown."""
        return number_or_none(self.margins[self.worst])

    @property
    def code(self) -> int:
        """Position of the worst verdict in VERDICTS."""
        return int(self.codes[self.worst])

    @property
    def verdict(self) -> str:
        """Verdict of the worst row."""
        return VERDICTS[self.code]

    @property
    def rank(self) -> tuple[int, float]:
        """Sorts margins worst first."""
        return self.code, self.value or 0.0


def judge(
    columns: Mapping[str, Column],
    limits: Sequence[Limit],
    used: Sequence[int],
    names: Mapping[str, tuple[str, ...]],
    wanted: float,
) -> tuple[tuple[Margin, ...], dict[str, str]]:
    """The asked margins over the rows in use, and the reasons of those that are not asked."""
    typed = frozenset(
        key
        for key, given in givens().items()
        if given.missing is Missing.FOUND and key in columns and not columns[key].found
    )
    rows, one = np.array(used, dtype=np.intp), np.zeros(1, dtype=np.intp)
    margins: list[Margin] = []
    not_asked: dict[str, str] = {}
    for limit in limits:
        if limit.asked is not None and not columns[limit.asked.key].on(limit.asked):
            not_asked[limit.name] = limit.not_asked
        else:
            margins.append(_margin(columns, typed, limit, rows if limit.per is Per.QUBIT else one, names, wanted))
    return tuple(margins), not_asked


def number_or_none(value: float) -> float | None:
    """A float, None for nan."""
    return None if np.isnan(value) else float(value)


def _margin(
    columns: Mapping[str, Column],
    typed: frozenset[str],
    limit: Limit,
    rows: Rows,
    names: Mapping[str, tuple[str, ...]],
    wanted: float,
) -> Margin:
    compares = [
        compare for compare in limit.compares if compare.when is None or columns[compare.when.key].on(compare.when)
    ]
    judged = [_judged(columns, limit, compare, rows, wanted) for compare in compares]
    judged = [one for one in judged if (one.codes != _NOT_MADE).any()] or judged[:1]
    ranks = [_rank(one) for one in judged]
    every, margins, codes = ranks[0], judged[0].margins, judged[0].codes
    for one, rank in zip(judged[1:], ranks[1:], strict=True):  # the worse comparison of each row
        worse = rank < every
        every = np.minimum(rank, every)
        margins, codes = np.where(worse, one.margins, margins), np.where(worse, one.codes, codes)
    worst = int(np.argmin(every))
    row = int(rows[worst])
    chosen = judged[min(range(len(judged)), key=lambda place: float(ranks[place][worst]))]
    ends = [columns[key] for key in (chosen.compare.allowed, chosen.compare.expected)]
    of_plan = all(column.of_plan for column in ends)
    return Margin(
        limit,
        rows,
        margins,
        codes,
        worst,
        "" if of_plan else names["qubit"][row],
        chosen.compare,
        number_or_none(chosen.allowed[worst]),
        number_or_none(chosen.expected[worst]),
        _reason(ends, row, names),
        _note(ends, row) if margins[worst] < 1 else "",
        repairable_until(tuple(one.compare for one in judged), typed),
    )


def _rank(judged: Judged) -> Array:
    """A number that sorts rows worst first: by verdict, then by size."""
    known = np.where(np.isnan(judged.margins), 0.0, judged.margins)
    return np.asarray(judged.codes * (2 * LARGEST_MARGIN) + np.minimum(known, LARGEST_MARGIN), dtype=np.float64)


def _judged(columns: Mapping[str, Column], limit: Limit, compare: Compare, rows: Rows, wanted: float) -> Judged:
    ends = [columns[compare.allowed], columns[compare.expected]]
    allowed, expected = (_at(column, rows) for column in ends)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.maximum(allowed, 0.0) / expected
    ratio = np.where((expected == 0) & (allowed >= 0), np.inf, ratio)  # nothing expected is within anything allowed
    margins = np.minimum(ratio, LARGEST_MARGIN)
    codes = np.where(margins < 1, SHORT, np.where(margins <= wanted, TIGHT if limit.tight_counts else CLEAR, CLEAR))
    codes = np.where(np.isnan(margins), UNKNOWN, codes)
    if any(column.bound for column in ends):  # an upper bound of what is expected can't condemn a plan
        codes = np.where((codes == SHORT) & _bounded(ends, rows), TIGHT, codes)
    for key in compare.only_with:
        made = ~np.isnan(_at(columns[key], rows))
        margins, codes = np.where(made, margins, LARGEST_MARGIN), np.where(made, codes, _NOT_MADE)
    return Judged(compare, allowed, expected, margins, codes)


def _at(column: Column, rows: Rows) -> Array:
    base = column.base()
    return np.full(len(rows), base[0]) if column.of_plan else base[rows]


def _bounded(ends: Sequence[Column], rows: Rows) -> NDArray[np.bool_]:
    """Rows in which either side is only a bound."""
    bounded = np.zeros(len(rows), dtype=bool)
    for column in ends:
        bounded |= 0 in column.bound if column.of_plan else np.isin(rows, list(column.bound))
    return bounded


def _reason(ends: Sequence[Column], row: int, names: Mapping[str, tuple[str, ...]]) -> Reason | None:
    for column in ends:
        reason = column.why.get(0 if column.of_plan else row)
        if reason is not None:
            return reason if column.of_plan else reason.of(names[column.table][row])
    return None


def _note(ends: Sequence[Column], row: int) -> str:
    return next((note for column in ends if (note := column.bound.get(0 if column.of_plan else row))), "")
