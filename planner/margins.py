"""Margins and verdicts: what is allowed over what is expected, the worst row of each limit, and why."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from planner.columns import Column, Reason
from planner.declare import Compare, Limit, Lock, Per
from planner.graph import Graph
from planner.physics import Array

LARGEST_MARGIN = 1e6
VERDICTS = ("short", "unknown", "tight", "clear")  # in the order of what is worst
SHORT, UNKNOWN, TIGHT, CLEAR = range(4)
_NOT_MADE = CLEAR + 1  # a comparison that a row does not make is never its worst


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

    `rows` are the judged rows, `margins` and `codes` (positions in VERDICTS) one for each, of the worse comparison. `worst`
    is the position of the worst in `rows`, `row` the name of that qubit ("" where the comparison is one of the plan).
    `allowed` and `expected` are those of the worst, None where unknown, `reason` says why, `note` why a verdict is tempered.
    `until` is the latest lock of the choices that act on it.
    """

    limit: Limit
    rows: tuple[int, ...]
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


def judge(columns: Mapping[str, Column], graph: Graph, used: Sequence[int], names: Sequence[str],
          wanted: float) -> tuple[tuple[Margin, ...], dict[str, str]]:
    """The asked margins over the rows in use, and the reasons of those that are not asked."""
    margins: list[Margin] = []
    not_asked: dict[str, str] = {}
    for limit in graph.limits:
        if limit.asked is not None and not columns[limit.asked.key].on(limit.asked):
            not_asked[limit.name] = limit.not_asked
        else:
            margins.append(_margin(columns, graph, limit, tuple(used) if limit.per is Per.QUBIT else (0,), names, wanted))
    return tuple(margins), not_asked


def number_or_none(value: float) -> float | None:
    """A float, None for nan."""
    return None if np.isnan(value) else float(value)


def _margin(columns: Mapping[str, Column], graph: Graph, limit: Limit, rows: tuple[int, ...], names: Sequence[str],
            wanted: float) -> Margin:
    compares = [compare for compare in limit.compares if compare.when is None or columns[compare.when.key].on(compare.when)]
    judged = [_judged(columns, limit, compare, rows, wanted) for compare in compares]
    codes = np.stack([one.codes for one in judged])
    sizes = np.nan_to_num(np.stack([one.margins for one in judged]))
    worse = np.lexsort((sizes, codes), axis=0)[0]  # the worse comparison of each row, then the worst row
    every = np.arange(len(rows))
    worst = int(np.lexsort((sizes[worse, every], codes[worse, every]))[0])
    chosen = judged[int(worse[worst])]
    ends = [columns[key] for key in (chosen.compare.allowed, chosen.compare.expected)]
    of_plan = all(column.of_plan for column in ends)
    margins = np.stack([one.margins for one in judged])[worse, every]
    return Margin(limit, rows, margins, codes[worse, every], worst, "" if of_plan else names[rows[worst]], chosen.compare,
                  number_or_none(chosen.allowed[worst]), number_or_none(chosen.expected[worst]),
                  _reason(ends, rows[worst], names), _note(ends, rows[worst]), graph.until(compares))


def _judged(columns: Mapping[str, Column], limit: Limit, compare: Compare, rows: tuple[int, ...], wanted: float) -> Judged:
    ends = [columns[compare.allowed], columns[compare.expected]]
    allowed, expected = (_at(column, rows) for column in ends)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(expected > 0, np.maximum(allowed, 0.0) / expected, np.where(allowed >= 0, np.inf, 0.0))
    margins = np.where(np.isnan(allowed) | np.isnan(expected), np.nan, np.minimum(ratio, LARGEST_MARGIN))
    tight = TIGHT if limit.tight_counts else CLEAR
    codes = np.select([np.isnan(margins), margins < 1, margins <= wanted], [UNKNOWN, SHORT, tight], CLEAR)
    if any(column.bound for column in ends):  # an upper bound of what is expected can't condemn a plan
        codes = np.where((codes == SHORT) & [bool(_note(ends, row)) for row in rows], TIGHT, codes)
    made = np.ones(len(rows), dtype=bool)
    for key in compare.only_with:
        made &= ~np.isnan(_at(columns[key], rows))
    return Judged(compare, allowed, expected, np.where(made, margins, np.inf), np.where(made, codes, _NOT_MADE))


def _at(column: Column, rows: tuple[int, ...]) -> Array:
    base = column.base()
    return np.full(len(rows), base[0]) if column.of_plan else base[list(rows)]


def _reason(ends: Sequence[Column], row: int, names: Sequence[str]) -> Reason | None:
    for column in ends:
        reason = column.why.get(0 if column.of_plan else row)
        if reason is not None:
            return reason if column.of_plan or reason.row else Reason(reason.text, reason.given, names[row])
    return None


def _note(ends: Sequence[Column], row: int) -> str:
    return next((note for column in ends if (note := column.bound.get(0 if column.of_plan else row))), "")
