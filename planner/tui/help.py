"""The help: keys and actions, from the one table."""

from __future__ import annotations

from textual import events
from textual.app import ComposeResult
from textual.screen import ModalScreen
from textual.widgets import Static

from planner.tui.actions import help_lines


class Help(ModalScreen[None]):
    """Covers the screen with the help until any key is pressed."""

    def compose(self) -> ComposeResult:
        """One text."""
        yield Static("\n".join(["HELP (any key goes back)", "", *help_lines()]), markup=False)

    def on_key(self, event: events.Key) -> None:
        """Any key goes back."""
        event.stop()
        self.dismiss()
