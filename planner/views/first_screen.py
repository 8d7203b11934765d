"""The first screen as lines of text: what the editor opens with, and what it prints where there is no terminal."""

from __future__ import annotations

from planner.evaluate import Evaluation
from planner.studies.typenext import TypeNext
from planner.views.rows import counts, device_line, field_line, headline, passed_line
from planner.views.table import Table
from planner.views.tables import margin_table, qubit_table

GAPS = 6  # the second blank between columns, which the editor does not have
FIRST_COLUMNS = 7  # name, five results, the worst margin
NARROWEST, LOWEST = 60, 16  # columns and lines below which a full screen says nothing useful


def head_lines(evaluation: Evaluation, following: TypeNext | None, state: str, width: int) -> list[str]:
    """Device, field and state; the counts; the one sentence that matters most."""
    plan = evaluation.plan
    parts = [device_line(plan), field_line(plan), passed_line(plan)]
    room = max(2, (width - len(state) - sum(map(len, parts))) // len(parts))
    first = (" " * min(room, 6)).join(parts)
    left = max(0, width - len(state) - 2) if state else width  # however long the names: the state stays in view
    return [
        f"{first[:left]:<{left}}{'  ' if state else ''}{state}".rstrip(),
        counts(evaluation),
        headline(evaluation, following),
    ]


def too_small(columns: int, lines: int) -> str:
    """What to say in a window that is too small for the editor; empty where it is large enough."""
    if columns >= NARROWEST and lines >= LOWEST:
        return ""
    return f"The window has {columns} columns and {lines} lines: the planner needs {NARROWEST} and {LOWEST}."


def first_screen(evaluation: Evaluation, following: TypeNext | None, width: int = 80) -> list[str]:
    """Head, qubits with their first results, and the margins."""
    qubits = qubit_table(evaluation)
    narrow = Table(qubits.columns[:FIRST_COLUMNS], tuple(row[:FIRST_COLUMNS] for row in qubits.rows))
    lines = [
        *head_lines(evaluation, following, "", width),
        "",
        *text_lines(narrow),
        "",
        *text_lines(margin_table(evaluation, width - GAPS, brief=True), cut=True),
    ]
    return [line[:width].rstrip() for line in lines]


def text_lines(table: Table, *, cut: bool = False) -> list[str]:
    """A table as plain lines, headings first, columns two blanks apart.

    Columns are wide enough for every cell; with `cut` they keep their width and longer cells end in '~'.
    """
    height = max((len(column.heading) for column in table.columns), default=0)
    heads = [
        [column.heading[line] if line < len(column.heading) else "" for column in table.columns]
        for line in range(height)
    ]
    texts = [*heads, *([cell.text for cell in row] for row in table.rows)]
    widths = [column.width for column in table.columns]
    if not cut:
        widths = [max([width, *map(len, each)]) for width, each in zip(widths, zip(*texts, strict=True), strict=True)]
    return [_line(table, widths, each) for each in texts]


def _line(table: Table, widths: list[int], texts: list[str]) -> str:
    fitted = (
        text if len(text) <= width else text[: width - 1] + "~" for text, width in zip(texts, widths, strict=True)
    )
    padded = (
        f"{text:>{width}}" if column.right else f"{text:<{width}}"
        for text, column, width in zip(fitted, table.columns, widths, strict=True)
    )
    return "  ".join(padded).rstrip()
