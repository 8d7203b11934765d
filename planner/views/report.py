"""The report of a plan: as text that stays stable for a diff, and as JSON for scripts; and the lines of `check`."""

from __future__ import annotations

import hashlib
import json
from typing import Any

import numpy as np

from planner import __version__
from planner.declare import Missing
from planner.evaluate import Evaluation, resolve_all
from planner.graph import givens
from planner.kinds import Quantity
from planner.margins import Margin, number_or_none
from planner.materials import edition
from planner.plan import ROWS, address_of
from planner.planfile import FORMAT
from planner.studies.typenext import TypeNext
from planner.views.first_screen import head_lines, text_lines
from planner.views.rows import gap, not_asked_line, result_text, until_word
from planner.views.table import Cell, Column, Table
from planner.views.tables import margin_table

WIDTH = 80
ROWS_BESIDE = 6


def plan_hash(evaluation: Evaluation) -> str:
    """First 16 hex digits of SHA-256 over the sorted lines `key=repr(SI value, tolerance)` of all resolved givens and the
    edition; defaults found from results are left out.
    """
    lines = [f"{key}={_numbers(entry.value)!r}" for key, entry in resolve_all(evaluation.plan).items()]
    text = "\n".join([*sorted(lines), f"edition={edition()!r}"])
    return hashlib.sha256(text.encode()).hexdigest()[:16]


def check_lines(evaluation: Evaluation, name: str) -> list[str]:
    """The margins of one plan, worst first."""
    lines = [f"{name}: {evaluation.verdict}"]
    asked = tuple(row for row in margin_table(evaluation, WIDTH).rows if row[3].text)
    table = margin_table(evaluation, WIDTH)
    lines += text_lines(Table(table.columns, asked))
    return [*lines, *filter(None, [not_asked_line(evaluation)])]


def report_text(evaluation: Evaluation, following: TypeNext | None, name: str) -> list[str]:
    """The whole plan's results as text, one result a line."""
    lines = [
        f"plan {name}",
        f"hash {plan_hash(evaluation)}, edition {edition()}",
        "",
        *head_lines(evaluation, following, "", WIDTH),
        "",
        "margins",
        *check_lines(evaluation, name)[1:],
    ]
    for table in _tables_with_results(evaluation):
        count = len(evaluation.tables[table])
        for start in range(0, count, ROWS_BESIDE):
            lines += ["", *text_lines(_results(evaluation, table, range(start, min(start + ROWS_BESIDE, count))))]
    return [line.rstrip() for line in lines]


def report_json(evaluation: Evaluation, name: str) -> str:
    """Everything in full precision, for scripts: givens, results, margins; null where unknown, with the reason."""
    document = {
        "planner": __version__,
        "format": FORMAT,
        "edition": edition(),
        "hash": plan_hash(evaluation),
        "plan": name,
        "givens": _givens(evaluation),
        "results": _results_json(evaluation),
        "margins": [_margin(evaluation, margin) for margin in evaluation.ranked],
        "not_asked": dict(evaluation.not_asked),
        "verdict": evaluation.verdict,
    }
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False)


def _results(evaluation: Evaluation, table: str, rows: range) -> Table:
    shown = [
        derived
        for derived in evaluation.graph.order
        if derived.shown and derived.per.value == table and derived.key not in givens()
    ]
    shown.sort(key=lambda derived: derived.key)
    names = [evaluation.tables[table][row] for row in rows]
    columns = (
        Column(("result",), max(len(derived.key) for derived in shown)),
        Column(("unit",), 8),
        *(Column((name,), max(8, len(name)), right=True) for name in names),
    )
    lines = tuple(
        (
            Cell(derived.key),
            Cell(derived.display),
            *(Cell(result_text(evaluation, derived.key, row)) for row in rows),
        )
        for derived in shown
    )
    return Table(columns, lines)


def _tables_with_results(evaluation: Evaluation) -> list[str]:
    """Tables that have rows and results, the plan first, then the qubits."""
    found = {derived.per.value for derived in evaluation.graph.order if derived.shown and derived.key not in givens()}
    return [table for table in dict.fromkeys(("", "qubit", *ROWS)) if table in found and evaluation.tables[table]]


def _numbers(value: Quantity | str | None) -> tuple[Any, Any]:
    return (value.value, value.tolerance) if isinstance(value, Quantity) else (value, None)


def _givens(evaluation: Evaluation) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for key, entry in resolve_all(evaluation.plan).items():
        kind = address_of(evaluation.plan, key).given.kind
        if isinstance(entry.value, Quantity) and kind is not None:
            found[key] = {
                "text": entry.value.text,
                "value": entry.value.value,
                "tolerance": entry.value.tolerance,
                "unit": kind.si,
                "origin": entry.value.origin,
                "from": entry.source,
            }
        else:
            found[key] = {
                "text": entry.value,
                "value": entry.value,
                "tolerance": None,
                "unit": "",
                "origin": "",
                "from": entry.source,
            }
    return found | {
        key: _found(evaluation, key)
        for key, given in givens().items()
        if given.missing is Missing.FOUND and key not in found
    }


def _found(evaluation: Evaluation, key: str) -> dict[str, Any]:
    """A default that was found from results: one value of the plan, or one a qubit."""
    kind = evaluation.derived(key).kind
    return {
        "text": None,
        "tolerance": None,
        "unit": kind.si,
        "origin": "",
        "from": "default",
        **_values(evaluation, key),
    }


def _results_json(evaluation: Evaluation) -> dict[str, Any]:
    return {
        derived.key: {"unit": derived.kind.si, **_values(evaluation, derived.key)}
        for derived in sorted(evaluation.graph.order, key=lambda derived: derived.key)
        if derived.shown and derived.key not in givens()
    }


def _values(evaluation: Evaluation, key: str) -> dict[str, Any]:
    column = evaluation.columns[key]
    values = [number_or_none(value) for value in np.ravel(column.base())]
    if column.of_plan:
        return {"value": values[0], **({"why": str(column.why[0])} if 0 in column.why else {})}
    names = evaluation.tables[column.table]
    why = {names[row]: str(reason.of(names[row])) for row, reason in column.why.items()}
    return {"values": dict(zip(names, values, strict=True)), **({"why": why} if why else {})}


def _margin(evaluation: Evaluation, margin: Margin) -> dict[str, Any]:
    return {
        "name": margin.name,
        "worst": margin.row or None,
        "allowed": margin.allowed,
        "expected": margin.expected,
        "unit": margin.compare.kind.si,
        "margin": margin.value,
        "low": margin.low,
        "high": margin.high,
        "verdict": margin.verdict,
        "until": until_word(margin) if margin.until is not None else None,
        "why": gap(evaluation, margin),
    }
