"""Everything above the foot: head, qubits, a pane of givens and the margins, as many beside each other as there is room for."""

from __future__ import annotations

from textual import events
from textual.app import ComposeResult
from textual.containers import Horizontal, Vertical
from textual.widgets import Static

from planner.evaluate import Evaluation
from planner.studies.typenext import TypeNext
from planner.tui.grid import Grid
from planner.tui.head import Head
from planner.views.first_screen import head_lines, too_small
from planner.views.tables import PANES, margin_table, pane_table, pane_title, qubit_table

WIDE = 120  # columns from which the margins stand beside the other panes
STOPS = ("qubits", *PANES)


class Desk(Vertical):
    """Shows an evaluation; `stop` is the pane with the keyboard, `chapter` the givens shown below the qubits."""

    def __init__(self, evaluation: Evaluation) -> None:
        super().__init__()
        self.stop = self.chapter = "magnet"
        self._evaluation = evaluation
        self.head, self.narrow = Head(), Static("", id="narrow", markup=False)
        self.qubits = Grid(qubit_table(evaluation), title="qubits", id="qubits")
        self.pane = Grid(pane_table(evaluation, self.chapter, 80), title=pane_title(self.chapter), id="pane")
        self.margins = Grid(margin_table(evaluation, 80), title="margins", id="margins")

    def compose(self) -> ComposeResult:
        """The parts from top to bottom; the last one stands alone where the window is too small."""
        yield self.head
        yield self.qubits
        yield Horizontal(self.pane, self.margins, id="lower")
        yield self.narrow

    @property
    def grid(self) -> Grid:
        """The grid that has the keyboard while nothing is asked."""
        return {"qubits": self.qubits, "margins": self.margins}.get(self.stop, self.pane)

    def show(self, evaluation: Evaluation) -> None:
        """Show another evaluation."""
        self._evaluation = evaluation
        self.qubits.show(qubit_table(evaluation))
        self.lay_out()

    def show_head(self, following: TypeNext | None, *, saved: bool) -> None:
        """Show the lines on top."""
        self.head.show(head_lines(self._evaluation, following, "saved" if saved else "not saved", self.app.size.width))

    def lay_out(self) -> None:
        """Show givens and margins, as wide as there is room for."""
        width, height = self.app.size
        wide, on_margins = width >= WIDE, self.stop == "margins"
        self.margins.display, self.pane.display = wide or on_margins, wide or not on_margins
        half = width // 2 if wide else width
        self.qubits.styles.max_height = max(5, height // 2 - 2)
        self.margins.show(margin_table(self._evaluation, half))
        self.pane.show(pane_table(self._evaluation, self.chapter, half), title=pane_title(self.chapter))

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
        self.stop = stop
        self.chapter = self.chapter if stop in {"qubits", "margins"} else stop
        self.lay_out()
        self.take_keyboard()

    def take_keyboard(self) -> None:
        """Give the keyboard to the pane that should have it."""
        self.grid.focus(scroll_visible=False)

    def beside(self, step: int) -> str:
        """The pane that many steps on."""
        return STOPS[(STOPS.index(self.stop) + step) % len(STOPS)]
