"""Why a number is what it is: law, source and the numbers put in, down to givens and their origins.

Nothing is said here that a declaration, a docstring or a shipped file says: this module finds it and lays it out.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np

from planner.declare import Compare, Derived, Limit, law_of
from planner.evaluate import WANTED_MARGIN, Evaluation
from planner.graph import HOST, givens
from planner.kinds import clean
from planner.margins import TIGHT, UNKNOWN, VERDICTS, Margin, number_or_none
from planner.plan import ROWS, SECTIONS, Address, UnknownKey, row_name, table_givens
from planner.values import nearest
from planner.views.formula import formula_of, meaning_of, notes_on
from planner.views.numbers import margin_text
from planner.views.provenance import (
    HOST_MEANINGS,
    address_in,
    given_value,
    host_lines,
    host_value,
    reference_text,
    result_value,
    shown,
)
from planner.views.putin import PutIn, help_of, is_found, of_row
from planner.views.rows import margin_line, unit_of, until_word
from planner.views.words import bounds_of

WIDTH = 100
LEVELS = 2  # of results below each other that one explanation shows


def explanation(
    evaluation: Evaluation, key: str, row: str = "", *, levels: int = LEVELS, width: int = WIDTH
) -> list[str]:
    """Why the given, result or margin `key` is what it is, as lines of at most `width` characters.

    `row` names the row of its table; without it the worst of a margin, else the first. A key may name its row itself
    (`qubit.Q1.g`, `larmor.frequency@Q1`). `levels` is how many levels of results are explained. Raises UnknownKey, a
    sentence with the nearest known key, or with the rows there are.
    """
    key, row = _parted(key, row)
    telling = _Telling(evaluation, levels)
    limit = next((limit for limit in evaluation.graph.limits if limit.name == key), None)
    if limit is not None:
        lines = telling.margin(limit, row)
    elif is_found(evaluation, key):
        derived = evaluation.derived(key)
        lines = telling.result(derived, _row_of(evaluation, derived.per.value, row), 1)
    elif key in HOST:
        lines = _host(evaluation, key)
    else:
        lines = _given(evaluation, key, row)
    return _wrapped([*lines, *telling.further()], width)


def known_keys(evaluation: Evaluation) -> list[str]:
    """Every key that can be asked for, rows under their table's name."""
    results = (derived.key for derived in evaluation.graph.order)
    return list(dict.fromkeys((*givens(), *results, *(limit.name for limit in evaluation.graph.limits), *HOST)))


@dataclass(slots=True)
class _Telling:
    """One explanation being told: the results told already, and those left for another time."""

    evaluation: Evaluation
    levels: int
    told: set[str] = field(default_factory=set)
    left: list[str] = field(default_factory=list)

    def further(self) -> list[str]:
        """How to go on where results were left out."""
        keys = [key for key in dict.fromkeys(self.left) if key not in self.told]
        return ["", f"To go on, ask why for {', '.join(keys)}."] if keys else []

    def result(self, derived: Derived, row: int | None, level: int) -> list[str]:
        """A result of one row and, indented below it, the results it rests on."""
        if row is None:
            return [f"{_capital(help_of(derived))}: {derived.key} has no row, there is no {_word(derived.per.value)}."]
        self.told.add(derived.key)
        taken = PutIn(self.evaluation, derived, row)
        lines = [
            _sentence(self.evaluation, derived, row),
            *_indented([*_law_lines(derived), "put in:", *_indented(taken.lines())]),
        ]
        for other, place in taken.below():
            if level >= self.levels:
                self.left.append(other.key)
            elif other.key not in self.told:
                lines += ["", *_indented(self.result(other, place, level + 1))]
        return lines

    def margin(self, limit: Limit, row: str) -> list[str]:
        """A margin: meaning, verdict and why, both sides, then both explained."""
        margin = self.evaluation.margin(limit.name)
        first = f"{_capital(limit.meaning)} (margin {limit.name})."
        if margin is None:
            return [first, f"  Not asked: {self.evaluation.not_asked[limit.name]}."]
        judged = margin.worst
        row_asked = _row_of(self.evaluation, judged.table, row) if row else None
        place = int(judged.rows[margin.place]) if row_asked is None else row_asked
        if place not in judged.rows:
            return [first, f"  {clean(row)} is not judged: it is not in use."]
        own = judged.rows.tolist().index(place)
        lines = [first, *_indented(_verdict(self.evaluation, margin, own)), *_indented(self.sides(margin, own))]
        for key in (margin.compare.allowed, margin.compare.expected):
            lines += ["", *_indented(self.side(key, place))]
        return lines

    def sides(self, margin: Margin, own: int) -> Iterator[str]:
        """Both sides with their values in this row."""
        compare: Compare = margin.compare
        unit = unit_of(self.evaluation, margin)
        if compare.what:
            yield f"compared: {compare.what}"
        for word, key, values in (
            ("allowed", compare.allowed, margin.worst.allowed),
            ("expected", compare.expected, margin.worst.expected),
        ):
            row = of_row(self.evaluation, self.evaluation.columns[key].table, int(margin.worst.rows[own]))
            yield f"{word}: {shown(compare.kind, number_or_none(values[own]), unit)} = {key}{row}"

    def side(self, key: str, place: int) -> list[str]:
        """One side of a margin explained."""
        table = self.evaluation.columns[key].table
        if is_found(self.evaluation, key):
            return self.result(self.evaluation.derived(key), place if table else 0, 1)
        return _given(self.evaluation, key, self.evaluation.tables[table][place] if table else "")


def _sentence(evaluation: Evaluation, derived: Derived, row: int) -> str:
    """What a result is, and its value or the root of its being unknown."""
    column = evaluation.columns[derived.key]
    subject = f"{_capital(help_of(derived))}: {derived.key}{of_row(evaluation, derived.per.value, row)}"
    if row in column.why:
        return f"{subject} is unknown: {column.why[row]}."
    notes = dict.fromkeys(filter(None, (_own_bound(evaluation, derived, row), column.bound.get(row, ""))))
    value = f"{subject} = {result_value(evaluation, derived, row)}."
    return " ".join((value, *(f"{_capital(note)}." for note in notes)))


def _law_lines(derived: Derived) -> list[str]:
    """Name, meaning, formula and reference of a result's law."""
    declared, formula = law_of(derived.law), formula_of(derived.law)
    if formula.expression:
        stated = "; ".join((f"formula: {formula.expression}", *notes_on(formula)))
    else:
        stated = f"no closed formula: {formula.method}"
    return [
        f"law: {declared.name}. {meaning_of(derived.law)}",
        stated,
        f"reference: {reference_text(declared.reference, declared.place)}",
    ]


def _own_bound(evaluation: Evaluation, derived: Derived, row: int) -> str:
    """The note of a result that is only a bound in this row."""
    if derived.bound is None:
        return ""
    arguments = {name: evaluation.columns[key].base() for name, key in derived.bound.inputs.items()}
    flags = np.broadcast_to(derived.bound.where(**arguments), len(evaluation.tables[derived.per.value]))
    return derived.bound.note if flags[row] else ""


def _verdict(evaluation: Evaluation, margin: Margin, own: int) -> list[str]:
    """The verdict of a row in a sentence, its range, why it is tempered, and until when something can be done."""
    judged, code = margin.worst, min(int(margin.worst.codes[own]), len(VERDICTS) - 1)
    if own == margin.place:
        code = margin.code
        lines = [f"{margin_line(evaluation, margin)}."]
    else:
        name = of_row(evaluation, judged.table, int(judged.rows[own])).removeprefix(" of ")
        lines = [f"{margin.name} {name} {margin_text(number_or_none(judged.margins[own]))} {VERDICTS[code]}."]
    low, high = (margin_text(number_or_none(ends[own])) for ends in (judged.low, judged.high))
    if low != high and code != UNKNOWN:
        lines.append(f"By tolerances and ranges it may be {low} to {high}.")
    if judged.softened.get(own, "") not in lines[0]:
        lines.append(f"The verdict is tempered: {judged.softened[own]}.")
    elif code == TIGHT:
        lines.append(f"Tight is from 1 to wanted_margin = {given_value(evaluation.plan, WANTED_MARGIN)[0]}.")
    return [*lines, f"Choices act on it until: {until_word(margin)}."]


def _given(evaluation: Evaluation, key: str, row: str) -> list[str]:
    """A given: what it is, its value and origin, what it may be, and where it is used."""
    address = _given_address(evaluation, key, row)
    if address is None:
        return [f"{_capital(givens()[key].help)}: {key} has no row, there is no {_word(key.partition('.')[0])}."]
    given = address.given
    text, behind = given_value(evaluation.plan, address)
    name = "" if address.row is None else f" of {clean(row_name(evaluation.plan, address.table, address.row))}"
    locks = f", locks at {given.locks.word}" if given.locks is not None else ""
    users = _users(evaluation, f"qubit.{address.field}" if address.table == "all_qubits" else key)
    details = (
        f"origin: {behind}",
        f"{text}: {given.options[text]}" if text in given.options else "",
        f"nature: {given.nature.value}{locks}",
        bounds_of(given),
        f"usual: {given.sensible}" if given.sensible else "",
        "used by: " + (", ".join(users) or "no result"),
    )
    return [f"{_capital(given.help)}: {key}{name} = {text}.", *_indented(filter(None, details))]


def _users(evaluation: Evaluation, key: str) -> list[str]:
    """Results and margins that take a given directly."""
    graph = evaluation.graph
    results = [derived.key for derived in graph.order if key in graph.parents[derived.key]]
    return results + [f"margin {limit.name}" for limit in graph.limits if key in _keys_of(limit)]


def _keys_of(limit: Limit) -> set[str]:
    keys = {ask.switch.key for ask in limit.asked}
    for compare in limit.compares:
        keys |= {compare.allowed, compare.expected, *compare.only_with}
        keys |= {compare.when.key} if compare.when is not None else set()
    return keys


def _host(evaluation: Evaluation, key: str) -> list[str]:
    """A value of the material itself."""
    sentence = f"{_capital(HOST_MEANINGS[key])}: {key} = {host_value(evaluation, key)}."
    return [sentence, *_indented(host_lines(evaluation.plan, key))]


def _parted(key: str, row: str) -> tuple[str, str]:
    """The key without the row that it names itself, and that row."""
    key, _, named = key.strip().removeprefix("margin.").partition("@")
    table, _, rest = key.partition(".")
    name, dot, given = rest.rpartition(".")
    return (f"{table}.{given}", name) if table in ROWS and dot else (key, named or row)


def _row_of(evaluation: Evaluation, table: str, row: str) -> int | None:
    """The position of a row by its name, the first one without, None where there is none. Raises UnknownKey."""
    names = evaluation.tables[table]
    if not table or not row:
        return 0 if names else None
    if row in names:
        return names.index(row)
    raise UnknownKey(_no_such_row(table, row, names))


def _given_address(evaluation: Evaluation, key: str, row: str) -> Address | None:
    """The place of a given; one of a row by its name, of the first without, None where there is none. Raises UnknownKey."""
    table, _, name = key.rpartition(".")
    if (table not in SECTIONS and table not in ROWS) or name not in table_givens(table):
        hint = nearest(key, known_keys(evaluation))
        raise UnknownKey(f"there is no given, result or margin '{clean(key)[:80]}'{hint}")
    if table not in ROWS:
        return Address(table, None, name)
    plan = evaluation.plan
    names = [row_name(plan, table, place) for place in range(len(plan.rows(table)))]
    if row and row not in names:
        raise UnknownKey(_no_such_row(table, row, names))
    return address_in(plan, key, row or names[0]) if names else None


def _no_such_row(table: str, row: str, names: Sequence[str]) -> str:
    there_are = f": there are {', '.join(map(clean, names))}" if names else ": there is none"
    return f"there is no {_word(table)} '{clean(row)[:80]}'{nearest(row, list(names)) or there_are}"


def _word(table: str) -> str:
    return table.replace("_", " ")


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:] if text[1:2].islower() or text[1:2] in " -'" else text


def _indented(lines: Iterable[str]) -> list[str]:
    return [f"  {line}" if line else "" for line in lines]


def _wrapped(lines: Iterable[str], width: int) -> list[str]:
    """Lines broken at blanks, what follows indented deeper."""
    broken: list[str] = []
    for line in lines:
        indent = " " * (len(line) - len(line.lstrip()))
        broken += textwrap.wrap(
            line.strip(), width, initial_indent=indent, subsequent_indent=indent + "    ", break_on_hyphens=False
        ) or [""]
    return broken
