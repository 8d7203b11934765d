"""The help: keys and actions, from the one table."""

from __future__ import annotations

from textual import events
from textual.app import ComposeResult
from textual.screen import ModalScreen

from planner.tui.actions import help_lines
from planner.tui.reader import Reader


class Help(ModalScreen[None]):
    """Covers the screen with the help until a key is pressed that does not scroll it."""

    def compose(self) -> ComposeResult:
        """One text."""
        yield Reader("HELP, Escape goes back", help_lines())

    def on_mount(self) -> None:
        """The text takes the keys that scroll."""
        self.query_one(Reader).focus()

    def on_key(self, event: events.Key) -> None:
        """Any other key goes back."""
        event.stop()
        self.dismiss()
