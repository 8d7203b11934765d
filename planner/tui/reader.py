"""A text to be read: folded to the width, scrolled with the arrows and page keys. Knows keys and lines, computes nothing."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

from textual import events
from textual.strip import Strip
from textual.widget import Widget

from planner.tui.lines import PLAIN, joined, title_piece


class Reader(Widget, can_focus=True, inherit_bindings=False):
    """Shows lines under a title, which says how much there is when not all of it fits. Other keys are left to the app."""

    def __init__(self, title: str = "", lines: Sequence[str] = (), *, id: str | None = None) -> None:
        super().__init__(id=id)
        self._title, self._lines = title, tuple(lines)
        self._folded: list[str] = []
        self._top = 0  # first line in view

    def show(self, title: str, lines: Sequence[str]) -> None:
        """Shows other lines; another title stands for another text, which is read from its beginning."""
        self._top = self._top if title == self._title else 0
        self._title, self._lines = title, tuple(lines)
        self._fold()

    def on_resize(self) -> None:
        """Another width, other folds."""
        self._fold()

    def on_key(self, event: events.Key) -> None:
        """Takes the keys that scroll."""
        page = max(1, self._room - 1)
        tops = {
            "up": self._top - 1,
            "down": self._top + 1,
            "pageup": self._top - page,
            "pagedown": self._top + page,
            "home": 0,
            "end": len(self._folded),
        }
        if event.key in tops:
            event.stop()
            self._scroll(tops[event.key])

    @property
    def _room(self) -> int:
        """Lines below the title."""
        return max(0, self.size.height - 1)

    def _fold(self) -> None:
        self._folded = [piece for line in self._lines for piece in folded(line, self.size.width - 1)]
        self._scroll(self._top)
        self.refresh()

    def _scroll(self, top: int) -> None:
        top = max(0, min(top, len(self._folded) - self._room))
        if top != self._top:
            self._top = top
            self.refresh()

    def render_line(self, y: int) -> Strip:
        """Title or one line of the text, literal."""
        width, last = self.size.width, self._top + self._room
        if y == 0:
            part = (
                f" (lines {self._top + 1} to {last} of {len(self._folded)})" if len(self._folded) > self._room else ""
            )
            return joined(iter([title_piece(self._title + part, width, focused=self.has_focus)]), width)
        place = self._top + y - 1
        text = self._folded[place] if place < len(self._folded) else ""
        return joined(iter([(1, text, PLAIN)]), width)


def folded(line: str, width: int) -> list[str]:
    """The line in pieces of at most `width` characters, the later ones a little further in than the first."""
    indent = " " * (len(line) - len(line.lstrip()) + 2)
    if width <= len(indent) or len(line) <= width:
        return [line]
    return textwrap.wrap(line, width, subsequent_indent=indent, drop_whitespace=True) or [""]
