"""What dialogs may ask of the editor."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Protocol

from planner.session import Session
from planner.tui.desk import Desk
from planner.tui.foot import Foot


class Editor(Protocol):
    """The running editor as its dialogs see it."""

    session: Session
    desk: Desk
    foot: Foot
    news: str

    def take(self, session: Session) -> None:
        """Go on with another session."""

    def attempt(self, make: Callable[[], Session], before: Callable[[], None] = ...) -> bool:
        """Go on with the session that `make` returns, or say why it can't be."""

    def visit(self, stop: str) -> None:
        """Go to a pane."""

    def exit(self, *results: Any) -> None:
        """End the editor."""
