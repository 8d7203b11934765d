"""The editor: holds a session, shows its evaluation in grids, and hands keys to the session. It computes nothing."""

from __future__ import annotations

from collections.abc import Callable
from typing import ClassVar

from textual import events, work
from textual.app import App, ComposeResult
from textual.binding import Binding, BindingType

from planner import session as sessions
from planner.evaluate import Evaluation, evaluate
from planner.planfile import Document
from planner.session import Session
from planner.studies.typenext import TypeNext, type_next
from planner.tui import files, records, terminal
from planner.tui.actions import ACTIONS
from planner.tui.desk import Desk
from planner.tui.foot import Foot
from planner.tui.grid import Grid
from planner.tui.help import Help
from planner.tui.reader import Reader
from planner.values import GivenError
from planner.views.editing import NOT_TYPED, NOTHING_TO_EXPLAIN, READING, given_at, help_at, typing_line


class Planner(App[None], inherit_bindings=False):
    """One plan in the editor."""

    CSS_PATH = "planner.tcss"
    ENABLE_COMMAND_PALETTE = False
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding(action.control, f"do('{action.method}')", show=False, priority=True)
        for action in ACTIONS
        if action.control
    ]

    def __init__(self, document: Document) -> None:
        super().__init__(driver_class=terminal.driver_class(), ansi_color=True)
        self.theme = "ansi-dark"
        self.session: Session = sessions.opened(document)
        self.evaluation: Evaluation = evaluate(document.plan)
        self.following: TypeNext | None = None
        self.news = ""  # what the next move of the cursor, which an action caused, must not wipe out
        self.desk, self.foot = Desk(self.evaluation), Foot()

    def compose(self) -> ComposeResult:
        """Desk and foot."""
        yield self.desk
        yield self.foot

    def on_mount(self) -> None:
        """The field is what people look for first."""
        terminal.install_signal_handlers(self)
        self.visit("magnet")
        self.look_ahead(self.evaluation)
        for note in self.session.document.ignored[:1]:
            self.foot.say(note, bad=True)

    def on_resize(self, event: events.Resize) -> None:
        """Another size: other panes beside each other, or one line where it is too small."""
        self.foot.display = self.desk.resize(event)
        self.call_next(self.resume)  # the app knows its new size only after this message

    def resume(self) -> None:
        """Arrange for the new size; what was hidden has lost the keyboard."""
        self.desk.lay_out()
        self.show_head()
        if self.foot.asking:
            self.foot.focus(scroll_visible=False)
        else:
            self.desk.take_keyboard()

    # -- showing

    def take(self, session: Session) -> None:
        """Go on with another session: evaluate its plan once and show what changed."""
        plan_changed = session.plan is not self.session.plan
        self.session = session
        if plan_changed:
            self.evaluation, self.following = evaluate(session.plan), None
            self.desk.show(self.evaluation)
            self.look_ahead(self.evaluation)
        self.show_head()

    def show_head(self) -> None:
        """Show the lines on top."""
        self.desk.show_head(self.following, saved=self.session.saved)

    @work(thread=True, exclusive=True)
    def look_ahead(self, evaluation: Evaluation) -> None:
        """Find what to type next, beside the typing; dropped where the plan has moved on."""
        following = type_next(evaluation) if evaluation.verdict == "unknown" else None
        self.call_from_thread(self.look_back, evaluation, following)

    def look_back(self, evaluation: Evaluation, following: TypeNext | None) -> None:
        """Show what was found, on its line alone."""
        if evaluation is self.evaluation:
            self.following = following
            self.show_head()

    def visit(self, stop: str) -> None:
        """Go to a pane."""
        self.desk.visit(stop)
        self.foot.say(help_at(self.evaluation, self.desk.grid.cursor_key))

    # -- keys and what comes of them

    def on_key(self, event: events.Key) -> None:
        """Keys that no pane takes: Space opens the actions, Tab goes on. A key while none has the keyboard is not lost."""
        if not isinstance(self.focused, Grid | Reader):
            self.desk.take_keyboard()
            self.desk.grid.post_message(events.Key(event.key, event.character))
        elif event.key == "space":
            self.foot.choose(self.action_do)
        elif event.key in {"tab", "shift+tab"}:
            self.visit(self.desk.beside(1 if event.key == "tab" else -1))
        elif event.key == "escape" and self.desk.explained:
            self.desk.close()
            self.foot.say(help_at(self.evaluation, self.desk.grid.cursor_key))
        elif self.desk.reading:
            self.foot.say(READING)

    def on_grid_moved(self, message: Grid.Moved) -> None:
        """The help line follows the cursor."""
        if message.grid.has_focus:
            self.foot.say(self.news or help_at(self.evaluation, message.key))
            self.news = ""

    def on_grid_typing(self, message: Grid.Typing) -> None:
        """Say what is understood while it is typed."""
        address = given_at(self.evaluation, message.key)
        if address is not None:
            line, fine = typing_line(self.evaluation, address, message.text)
            self.foot.say(line, bad=not fine)

    def on_grid_accepted(self, message: Grid.Accepted) -> None:
        """Take what was typed, or say what is wrong and keep the text."""
        address = given_at(self.evaluation, message.key)
        assert address is not None
        if not self.attempt(lambda: sessions.typed(self.session, address, message.text), message.grid.accept):
            message.grid.reject()
        elif message.step in {"next", "previous"}:
            self.visit(self.desk.beside(1 if message.step == "next" else -1))
        else:
            self.foot.say(help_at(self.evaluation, message.grid.cursor_key))

    def on_grid_gave_up(self, message: Grid.GaveUp) -> None:
        """Back to help."""
        self.foot.say(help_at(self.evaluation, message.key))

    def on_grid_refused(self) -> None:
        """Results aren't typed."""
        self.foot.say(NOT_TYPED)

    def attempt(self, make: Callable[[], Session], before: Callable[[], None] = lambda: None) -> bool:
        """Go on with the session that `make` returns, or say why it can't be; whether it could."""
        try:
            session = make()
        except GivenError as error:
            self.foot.say(str(error), bad=True)
            return False
        before()
        self.take(session)
        return True

    def explain(self) -> None:
        """Show why the number under the cursor is what it is."""
        if not self.desk.explain():
            self.foot.say(NOTHING_TO_EXPLAIN, bad=True)

    # -- the actions, by their names in the table

    def action_do(self, method: str) -> None:
        """Do one action of the table."""
        actions: dict[str, Callable[[], object]] = {
            "undo": lambda: self.take(sessions.undone(self.session)),
            "save": lambda: files.save(self),
            "redo": lambda: self.take(sessions.redone(self.session)),
            "save_as": lambda: files.save_as(self),
            "add_row": lambda: records.add(self),
            "drop_row": lambda: records.drop(self),
            "margins": lambda: self.visit("margins"),
            "why": self.explain,
            "leave": lambda: files.leave(self),
            "help": lambda: self.push_screen(Help()),
        }
        actions[method]()


def run(document: Document, *, mouse: bool = False) -> int:
    """Run the editor until it is left; the exit status."""
    app = Planner(document)
    app.run(mouse=mouse)
    return 1 if app.return_code is None else app.return_code
