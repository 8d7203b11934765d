"""The one widget that draws a table: by lines, only what is visible, repainting only the cells that changed.

It knows keys and text and computes nothing. What is typed goes up as messages; the app answers with `accept`
or `reject` and hands a new table down with `show`.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from rich.cells import cell_len
from textual import events
from textual.geometry import Region, Size
from textual.message import Message
from textual.scroll_view import ScrollView
from textual.strip import Strip

from planner.tui.draft import EDITS, Draft, cleaned
from planner.tui.lines import (
    BOLD,
    GAP,
    POINTER,
    Piece,
    Span,
    cell_at,
    draft_pieces,
    fitted,
    heading_pieces,
    in_view,
    joined,
    left_showing,
    style_of,
    title_piece,
)
from planner.views.table import Cell, Table

Step = Literal["stay", "up", "down", "next", "previous"]
STEPS: dict[str, Step] = {"enter": "stay", "up": "up", "down": "down", "tab": "next", "shift+tab": "previous"}


def typed_character(event: events.Key) -> str:
    """The character a key adds to a text, "" for keys that add none (with control or alt held, they are commands)."""
    held = set(event.key.split("+")[:-1]) - {"shift"}
    return event.character if event.character and event.is_printable and not held else ""


class CellMessage(Message):
    """Something that happened at the cell with this key."""

    def __init__(self, grid: Grid, key: str) -> None:
        super().__init__()
        self.grid = grid
        self.key = key

    @property
    def control(self) -> Grid:
        """The grid, for handlers that name one by its id."""
        return self.grid


class Grid(ScrollView, can_focus=True, inherit_bindings=False):
    """A table with a cursor. Typing always edits the cell under it; arrows, Home, End and the page keys move it.

    Space, Tab and Escape are left to the app while no text is being typed.
    """

    DEFAULT_CSS = "Grid { overflow-x: hidden; overflow-y: auto; scrollbar-size: 0 0; }"  # scrollbars repaint often

    class Moved(CellMessage):
        """The cursor stands on another key now."""

    class Typing(CellMessage):
        """The text being typed has begun or changed."""

        def __init__(self, grid: Grid, key: str, text: str) -> None:
            super().__init__(grid, key)
            self.text = text

    class Accepted(CellMessage):
        """The text is meant to be taken. The app answers with `accept` or `reject`; `step` says where to go then."""

        def __init__(self, grid: Grid, key: str, text: str, step: Step) -> None:
            super().__init__(grid, key)
            self.text = text
            self.step = step

    class GaveUp(CellMessage):
        """The text being typed was dropped; the cell shows what it showed before."""

    class Refused(CellMessage):
        """Someone typed on a cell that can't be edited."""

    def __init__(self, table: Table, *, title: str = "", id: str | None = None) -> None:
        super().__init__(id=id)
        self._table = table
        self._title = title
        self._above = 0  # lines above the first row
        self._left = 0  # first column shown after the fixed ones
        self._cursor = self._first_place()  # row, column
        self._told = self.cursor_key  # the key that the app knows the cursor to be on
        self._draft: Draft | None = None
        self._step: Step = "stay"
        self._measure()

    # -- what the app calls

    @property
    def typing(self) -> bool:
        """Whether a text is being typed."""
        return self._draft is not None

    @property
    def cursor_key(self) -> str:
        """The key of the cell under the cursor, "" where there is none."""
        return self._cell(*self._cursor).key

    @property
    def cursor_row(self) -> int:
        """The row of the cursor, from 0."""
        return self._cursor[0]

    def show(self, table: Table, *, title: str | None = None) -> None:
        """Shows another table; the cursor stays on its key where that still exists. Answer `Accepted` first.

        Another `title` stands for another subject: the cursor then begins at its first cell.
        """
        key, before = self.cursor_key, self._table
        self._table = table
        if title is not None and title != self._title:
            self._begin(title)
        elif (before.columns, before.fixed, len(before.rows)) == (table.columns, table.fixed, len(table.rows)):
            self._repaint_differences(before)
        else:
            self._left = self._left if before.columns == table.columns else 0
            self._measure()
            self.refresh()
        self._follow(key)

    def _begin(self, title: str) -> None:
        self._title, self._left = title, 0
        self._draft = None
        self._cursor = self._first_place()
        self._measure()
        self.refresh()

    def move_to(self, key: str) -> bool:
        """Puts the cursor on the cell with this key, an editable one first; False where no cell has it."""
        place = self._place_of(key)
        if place is None:
            return False
        if self.typing and place != self._cursor:
            self._give_up()
        self._go_to(*place)
        return True

    def accept(self) -> None:
        """The typed text was taken: ends the typing and goes up or down where that was asked for."""
        if self._draft is None:
            return
        self._set_draft(None)
        row, column = self._cursor
        self._go_to(row + {"up": -1, "down": 1}.get(self._step, 0), column)

    def reject(self) -> None:
        """The typed text was not taken: it stays, to be mended."""
        self._step = "stay"

    # -- keys

    def on_key(self, event: events.Key) -> None:
        """Takes a key here at once, not through bindings, so that keys sent in one burst keep their order."""
        draft = self._draft
        taken = self._take_resting_key(event) if draft is None else self._take_typing_key(event, draft)
        if taken:
            event.stop()
            event.prevent_default()

    def on_paste(self, event: events.Paste) -> None:
        """Pasted text starts a new text or goes into the one being typed."""
        event.stop()
        if text := cleaned(event.text):
            self._insert(text)

    def _take_resting_key(self, event: events.Key) -> bool:
        cell, character = self._cell(*self._cursor), typed_character(event)
        if (place := self._place_after(event.key)) is not None:
            self._go_to(*place)
        elif event.key == "enter":
            self._change(Draft.starting(cell.edit or cell.text))
        elif character.strip():
            self._insert(character)
        else:
            return False
        return True

    def _take_typing_key(self, event: events.Key, draft: Draft) -> bool:
        if (step := STEPS.get(event.key)) is not None:
            self._step = step
            self.post_message(self.Accepted(self, self.cursor_key, draft.text, step))
        elif event.key == "escape":
            self._give_up()
        elif (edit := EDITS.get(event.key)) is not None:
            self._change(edit(draft))
        elif character := typed_character(event):
            self._insert(character)
        else:
            return False
        return True

    # -- the text being typed

    def _insert(self, piece: str) -> None:
        draft = self._draft or Draft("", 0)
        longer = draft.inserted(piece)
        if len(longer.text) < len(draft.text) + len(piece):
            self.app.bell()  # no room for all of it
        self._change(longer)

    def _change(self, draft: Draft) -> None:
        before, key = self._draft, self.cursor_key
        if before is None and not self._cell(*self._cursor).editable:
            self.post_message(self.Refused(self, key))
            return
        self._step = "stay"
        self._set_draft(draft)
        if before is None or before.text != draft.text:
            self.post_message(self.Typing(self, key, draft.text))

    def _give_up(self) -> None:
        self._set_draft(None)
        self.post_message(self.GaveUp(self, self.cursor_key))

    def _set_draft(self, draft: Draft | None) -> None:
        row, column = self._cursor
        covered = self._draft_end()
        self._draft = draft
        for span in self._spans():
            if span.column == column:
                self._repaint(row, span.x, max(covered, self._draft_end()))

    def _draft_end(self) -> int:
        """Where the text being typed ends: after as many columns as it needs, at most at the widget's edge."""
        ahead = [span for span in self._spans() if span.column >= self._cursor[1]]
        if not ahead:
            return 0
        wanted = ahead[0].x + (cell_len(self._draft.text) + 1 if self._draft else 0)
        return next((span.end for span in ahead if span.end >= wanted), self.size.width)

    # -- the cursor

    def _cell(self, row: int, column: int) -> Cell:
        return cell_at(self._table, row, column)

    def _first_place(self) -> tuple[int, int]:
        """The first cell that shows something with a key; without any, the first cell."""
        places = ((r, c) for r, cells in enumerate(self._table.rows) for c, cell in enumerate(cells) if cell.key)
        return next(places, (0, 0))

    def _place_of(self, key: str) -> tuple[int, int] | None:
        """Row and column of the cell with this key, an editable one if there is one."""
        places = [
            (not cell.editable, row, column)
            for row, cells in enumerate(self._table.rows)
            for column, cell in enumerate(cells)
            if key and cell.key == key
        ]
        return min(places)[1:] if places else None

    def _place_after(self, key: str) -> tuple[int, int] | None:
        """Where this key moves the cursor; None for keys that don't move it."""
        (row, column), page = self._cursor, max(1, self._lines - 1)
        places = {
            "up": (row - 1, column),
            "down": (row + 1, column),
            "left": (row, self._column_with_key(range(column - 1, -1, -1))),
            "right": (row, self._column_with_key(range(column + 1, len(self._table.columns)))),
            "home": (row, self._column_with_key(range(len(self._table.columns)))),
            "end": (row, self._column_with_key(range(len(self._table.columns) - 1, -1, -1))),
            "pageup": (row - page, column),
            "pagedown": (row + page, column),
        }
        return places.get(key)

    def _column_with_key(self, columns: range) -> int:
        """The first of these columns whose cell in the cursor's row shows something with a key; else the cursor's own."""
        row, column = self._cursor
        return next((other for other in columns if self._cell(row, other).key), column)

    def _go_to(self, row: int, column: int) -> None:
        rows, columns = len(self._table.rows), len(self._table.columns)
        before, self._cursor = self._cursor, (max(0, min(row, rows - 1)), max(0, min(column, columns - 1)))
        if before != self._cursor:
            self._repaint_cell(*before)
            self._repaint_cell(*self._cursor)
        self._reveal()
        if self.cursor_key != self._told:
            self._told = self.cursor_key
            self.post_message(self.Moved(self, self._told))

    def _follow(self, key: str) -> None:
        """After a new table: back to the key the cursor was on, or as near as the table still goes."""
        place = self._cursor if self.cursor_key == key else self._place_of(key)
        if self.typing and (place is None or not self._cell(*place).editable):
            self._draft = None
            self.post_message(self.GaveUp(self, key))
            self.refresh()
        elif self.typing and place != self._cursor:
            self.refresh()
        self._go_to(*(place or self._cursor))

    # -- what is in view

    def on_resize(self) -> None:
        """Begins at the first columns again and keeps the cursor in view."""
        self._left = 0
        self._reveal()

    @property
    def _lines(self) -> int:
        """Lines left for rows."""
        return max(0, self.size.height - self._above)

    def _measure(self) -> None:
        columns = self._table.columns
        self._above = bool(self._title) + max((len(column.heading) for column in columns), default=0)
        self.virtual_size = Size(sum(c.width + GAP for c in columns), self._above + len(self._table.rows))

    def _spans(self) -> tuple[Span, ...]:
        return in_view(self._table, left=self._left, width=self.size.width)

    def _reveal(self) -> None:
        """Scrolls as little as brings the cursor's cell into view, sideways by whole columns."""
        if not self.size:
            return
        row, column = self._cursor
        if self._lines:
            top = min(max(self.scroll_offset.y, row - self._lines + 1), row)
            self.scroll_to(y=top, animate=False, force=True)
        left = left_showing(self._table, column, left=self._left, width=self.size.width)
        if left != self._left:
            self._left = left
            self.refresh()

    # -- repainting; refresh without a region would repaint the whole widget

    def _repaint(self, row: int, start: int, end: int) -> None:
        y = self._above + row - self.scroll_offset.y
        if self._above <= y < self.size.height and start < end:
            self.refresh(Region(start, y, end - start, 1))

    def _repaint_cell(self, row: int, column: int) -> None:
        for span in self._spans():
            if span.column == column:
                self._repaint(row, span.x - GAP, span.end)

    def _repaint_differences(self, before: Table) -> None:
        top = self.scroll_offset.y
        for row in range(top, min(top + self._lines, len(before.rows))):
            for span in self._spans():
                if cell_at(before, row, span.column) != self._cell(row, span.column):
                    self._repaint(row, span.x, span.end)

    # -- painting

    def render_line(self, y: int) -> Strip:
        """One line of the widget: title, heading or row, as plain segments without a colour."""
        return joined(self._pieces(y), self.size.width)

    def _pieces(self, y: int) -> Iterator[Piece]:
        if y >= self._above:
            yield from self._row_pieces(y - self._above + self.scroll_offset.y)
        elif y == 0 and self._title:
            yield title_piece(self._title, self.size.width, focused=self.has_focus)
        else:
            yield from heading_pieces(self._table.columns, self._spans(), y - bool(self._title))

    def _row_pieces(self, row: int) -> Iterator[Piece]:
        if row >= len(self._table.rows):
            return
        free_from = 0  # the text being typed covers columns to its right
        for span in self._spans():
            under_cursor = (row, span.column) == self._cursor
            if under_cursor and self.has_focus:
                yield span.x - GAP, POINTER, BOLD
            if under_cursor and self._draft:
                free_from = self._draft_end()
                yield from draft_pieces(self._draft, span.x, free_from - span.x, focused=self.has_focus)
            elif span.x >= free_from:
                cell, right = self._cell(row, span.column), self._table.columns[span.column].right
                look = style_of(cell, under_cursor=under_cursor and self.has_focus)
                yield span.x, fitted(cell.text, span.width, right=right), look
