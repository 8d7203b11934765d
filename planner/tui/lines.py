"""How the lines of a grid are laid out and how they look: pure functions from a table to pieces of a line.

Looks are attributes of the terminal (bold, reverse, underlined, dim, italic), never a colour.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from rich.cells import cell_len, set_cell_size
from rich.segment import Segment
from rich.style import Style
from textual.strip import Strip

from planner.tui.draft import Draft
from planner.views.table import Cell, Column, Table, Tone

GAP = 1  # blank terminal cells before every column; the cursor's pointer stands there
LEAST_ROOM = 12  # terminal cells beside the fixed columns; with less the fixed columns scroll too
POINTER = ">"  # beside the cursor's cell, so that a reversed cell elsewhere is never taken for the cursor
CUT = "~"  # last character of a text that does not fit
MORE_LEFT, MORE_RIGHT = "<", ">"  # on the first heading line: columns are hidden on that side
BLANK = Cell("")

PLAIN = Style()
BOLD = Style(bold=True)
UNDERLINE = Style(underline=True)
REVERSE = Style(reverse=True)
STYLES = {
    Tone.PLAIN: PLAIN,
    Tone.SHORT: REVERSE + BOLD,
    Tone.TIGHT: BOLD,
    Tone.UNKNOWN: UNDERLINE,
    Tone.ASSUMED: Style(dim=True),
    Tone.GUESS: Style(italic=True),
    Tone.FAINT: Style(dim=True),
}

Piece = tuple[int, str, Style]  # where it stands on the line, its text, how it looks


def fitted(text: str, width: int, *, right: bool = False) -> str:
    """Text in exactly `width` terminal cells, marked where it had to be cut; wide characters count as two."""
    if cell_len(text) > width:
        return set_cell_size(text, max(0, width - 1)) + CUT[:width]
    blanks = " " * (width - cell_len(text))
    return blanks + text if right else text + blanks


def style_of(cell: Cell, *, under_cursor: bool) -> Style:
    """The tone's look; the cursor reverses it, and underlines what is reversed already."""
    style = STYLES[cell.tone]
    if not under_cursor:
        return style
    return style + (UNDERLINE if style.reverse else REVERSE)


@dataclass(frozen=True, slots=True)
class Span:
    """Where a column stands on the screen, in terminal cells from the widget's left edge."""

    column: int
    x: int
    width: int

    @property
    def end(self) -> int:
        """The first terminal cell to the right of it."""
        return self.x + self.width


def spans(columns: tuple[Column, ...], *, fixed: int, left: int, width: int) -> tuple[Span, ...]:
    """The fixed columns and those from `left` on that fit wholly; only the column at `left` is cut to fit."""
    placed: list[Span] = []
    x = GAP
    for number in (*range(fixed), *range(left, len(columns))):
        wanted, room = columns[number].width, width - x
        if room < 1 or (wanted > room and number != left):
            break
        placed.append(Span(number, x, min(wanted, room)))
        x = placed[-1].end + GAP
    return tuple(placed)


def in_view(table: Table, *, left: int, width: int) -> tuple[Span, ...]:
    """The columns in view, with the last terminal cell kept for the sign that more follow where they do."""
    fixed = _fixed(table, width)
    left = max(fixed, left)
    shown = spans(table.columns, fixed=fixed, left=left, width=width)
    if shown and shown[-1].column == len(table.columns) - 1:
        return shown
    return spans(table.columns, fixed=fixed, left=left, width=width - 1)


def left_showing(table: Table, column: int, *, left: int, width: int) -> int:
    """The first column after the fixed ones that brings this column into view with the least scrolling."""
    left = max(_fixed(table, width), min(left, column))
    while left < column and all(span.column != column for span in in_view(table, left=left, width=width)):
        left += 1
    return left


def _fixed(table: Table, width: int) -> int:
    taken = sum(column.width + GAP for column in table.columns[: table.fixed])
    return min(table.fixed, len(table.columns)) if taken + LEAST_ROOM <= width else 0


def cell_at(table: Table, row: int, column: int) -> Cell:
    """The cell there; a blank one where the row is shorter or there is no such row."""
    cells = table.rows[row] if row < len(table.rows) else ()
    return cells[column] if column < len(cells) else BLANK


def title_piece(title: str, width: int, *, focused: bool) -> Piece:
    """The title in a rule across the widget, bold while the widget has the keyboard."""
    rule = f"-- {title} "
    return 0, rule + "-" * (width - cell_len(rule)), BOLD if focused else PLAIN


def heading_pieces(columns: tuple[Column, ...], shown: tuple[Span, ...], line: int) -> Iterator[Piece]:
    """One heading line over the columns in view; the first one has a sign where columns are left out."""
    expected = 0
    for span in shown:
        if line == 0 and span.column != expected:
            yield span.x - GAP, MORE_LEFT, BOLD
        expected = span.column + 1
        column = columns[span.column]
        text = column.heading[line] if line < len(column.heading) else ""
        yield span.x, fitted(text, span.width, right=column.right), PLAIN
    if line == 0 and shown and expected < len(columns):
        yield shown[-1].end, MORE_RIGHT, BOLD


def draft_pieces(draft: Draft, x: int, width: int, *, focused: bool) -> Iterator[Piece]:
    """The text being typed, underlined, with its insertion point in reverse."""
    before, at_point, after = draft.window(width)
    point = x + cell_len(before)
    yield x, before, UNDERLINE
    yield point, at_point, REVERSE if focused else UNDERLINE
    yield point + cell_len(at_point), after, UNDERLINE


def joined(pieces: Iterator[Piece], width: int) -> Strip:
    """The pieces at their places on a line of `width` terminal cells, blanks between them; text stays literal."""
    segments: list[Segment] = []
    at = 0
    for x, text, style in pieces:
        segments += [Segment(" " * (x - at), PLAIN), Segment(text, style)]
        at = x + cell_len(text)
    return Strip(segments).adjust_cell_length(width, PLAIN).simplify()
