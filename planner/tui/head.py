"""The three lines on top: device, field and state; the counts; the sentence that matters most."""

from __future__ import annotations

import re

from rich.text import Text
from textual.widgets import Static

VERDICT_LOOKS = {"short": "bold reverse", "tight": "bold", "unknown": "underline"}
_VERDICT = re.compile(r"(?<=\d )(short|tight|unknown)(?=:)|(unknown)(?=:)")


class Head(Static):
    """Shows the head lines; repaints only when they change."""

    # A folded line would push the one that matters most out of sight.
    DEFAULT_CSS = "Head { text-wrap: nowrap; text-overflow: clip; }"

    def __init__(self) -> None:
        super().__init__(markup=False)
        self._lines: list[str] = []

    def show(self, lines: list[str]) -> None:
        """Shows these lines."""
        if lines != self._lines:
            self._lines = lines
            self.update(Text("\n").join([Text(lines[0]), Text(lines[1]), _worst(lines[2])]), layout=False)


def _worst(line: str) -> Text:
    text = Text(line)
    found = _VERDICT.search(line)
    if found is not None:
        text.stylize(VERDICT_LOOKS[found.group()], found.start(), found.end())
    return text
