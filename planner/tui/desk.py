"""Everything above the foot: head, qubits, a pane and the margins, as many beside each other as there is room for.

An explanation stands in place of the margins, in a narrow window in place of the pane; going to what it covers closes it.
"""

from __future__ import annotations

from textual import events
from textual.app import ComposeResult
from textual.containers import Horizontal, Vertical
from textual.widgets import Static

from planner.evaluate import Evaluation
from planner.studies.typenext import TypeNext
from planner.tui.grid import Grid
from planner.tui.head import Head
from planner.tui.reader import Reader
from planner.views.editing import why_at
from planner.views.first_screen import head_lines, too_small
from planner.views.tables import PANES, margin_table, pane_table, pane_title, qubit_table

WIDE = 120  # columns from which the margins stand beside the other panes
STOPS = ("qubit", *PANES)


class Desk(Vertical):
    """Shows an evaluation.

    `stop` is the pane with the keyboard, `chapter` the table shown below the qubits. `explained` is the key of the cell that
    is explained ("" none); while it is `reading`, the explanation has the keyboard.
    """

    def __init__(self, evaluation: Evaluation) -> None:
        super().__init__()
        self.stop = self.chapter = "magnet"
        self.explained, self.reading = "", False
        self._evaluation = evaluation
        self.head, self.narrow = Head(), Static("", id="narrow", markup=False)
        self.qubits = Grid(qubit_table(evaluation), title="qubits", id="qubits")
        self.pane = Grid(pane_table(evaluation, self.chapter, 80), title=pane_title(self.chapter), id="pane")
        self.margins = Grid(margin_table(evaluation, 80), title="margins", id="margins")
        self.reader = Reader(id="reader")

    def compose(self) -> ComposeResult:
        """The parts from top to bottom; the last one stands alone where the window is too small."""
        yield self.head
        yield self.qubits
        yield Horizontal(self.pane, self.margins, self.reader, id="lower")
        yield self.narrow

    @property
    def grid(self) -> Grid:
        """The grid with the cursor that actions are about."""
        return self.grid_of(self.stop)

    def grid_of(self, stop: str) -> Grid:
        """The grid that shows a pane, once that is visited."""
        return {"qubit": self.qubits, "margins": self.margins}.get(stop, self.pane)

    def show(self, evaluation: Evaluation) -> None:
        """Show another evaluation."""
        self._evaluation = evaluation
        self.qubits.show(qubit_table(evaluation))
        self.lay_out()

    def show_head(self, following: TypeNext | None, *, saved: bool) -> None:
        """Show the lines on top."""
        self.head.show(head_lines(self._evaluation, following, "saved" if saved else "not saved", self.app.size.width))

    def lay_out(self) -> None:
        """Show pane, margins and explanation, as wide as there is room for."""
        width, height = self.app.size
        wide, on_margins = width >= WIDE, self.stop == "margins"
        half = width // 2 if wide else width
        explaining = self._explain(half, covered=on_margins if wide else self.stop != "qubit")
        self.margins.display = (wide or on_margins) and not explaining
        self.pane.display = wide or not (on_margins or explaining)
        self.qubits.styles.max_height = max(5, height // 2 - 2 if wide or not explaining else height // 4)
        self.margins.show(margin_table(self._evaluation, half))
        self.pane.show(pane_table(self._evaluation, self.chapter, half), title=pane_title(self.chapter))

    def _explain(self, width: int, *, covered: bool) -> bool:
        """Show the explanation, unless what it explains is gone or it `covered` the pane with the keyboard; whether it shows."""
        if covered and not self.reading:
            self.explained = ""
        lines = why_at(self._evaluation, self.explained, width - 2) if self.explained else []
        gone = self.reading and not lines
        self.explained, self.reading = (self.explained, self.reading) if lines else ("", False)
        self.reader.display = bool(lines)
        self.reader.show(f"why {self.explained.removeprefix('margin.').replace('@', ' of ', 1)}", lines)
        if gone:
            self.call_next(self.take_keyboard)
        return bool(lines)

    def explain(self) -> bool:
        """Explain the number under the cursor; False where there is none."""
        self.explained, self.reading = self.grid.cursor_key, True
        self.lay_out()
        self.take_keyboard()
        return self.reading

    def close(self) -> None:
        """Take the explanation away."""
        self.explained = ""
        self.visit(self.stop)

    def resize(self, event: events.Resize) -> bool:
        """Show the one line where the window is too small; whether it is large enough."""
        message = too_small(event.size.width, event.size.height)
        for part in (self.head, self.qubits, self.query_one("#lower")):
            part.display = not message
        self.narrow.display = bool(message)
        self.narrow.update(message)
        return not message

    def visit(self, stop: str) -> None:
        """Give a pane the keyboard."""
        self.stop, self.reading = stop, False
        self.chapter = self.chapter if stop in {"qubit", "margins"} else stop
        self.lay_out()
        self.take_keyboard()

    def take_keyboard(self) -> None:
        """Give the keyboard to the explanation or the pane that should have it."""
        (self.reader if self.reading else self.grid).focus(scroll_visible=False)

    def beside(self, step: int) -> str:
        """The pane that many steps on; from an explanation, the one it was opened from."""
        step = 0 if self.reading else step
        return STOPS[(STOPS.index(self.stop) + step) % len(STOPS)]
