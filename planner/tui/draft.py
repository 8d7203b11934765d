"""The text being typed into a cell: a value with an insertion point, without any widget around it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from rich.cells import cell_len, set_cell_size

LONGEST_TEXT = 200


def cleaned(text: str) -> str:
    """Pasted text on one line: white space becomes blanks, other characters without a shape become U+FFFD."""
    return "".join(" " if c.isspace() else c if c.isprintable() else "\ufffd" for c in text.strip("\r\n"))


@dataclass(frozen=True, slots=True)
class Draft:
    """The text being typed and the place in it where the next character goes."""

    text: str
    at: int

    @classmethod
    def starting(cls, text: str) -> Draft:
        """A text to go on with at its end; one that is longer than can be typed stays whole."""
        return cls(text, len(text))

    def inserted(self, piece: str) -> Draft:
        """As much of the piece as the longest allowed text leaves room for."""
        piece = piece[: max(0, LONGEST_TEXT - len(self.text))]
        return Draft(self.text[: self.at] + piece + self.text[self.at :], self.at + len(piece))

    def left(self) -> Draft:
        """One character back; marks drawn on top of a character are passed together with it."""
        at = max(0, self.at - 1)
        while at and not cell_len(self.text[at]):
            at -= 1
        return Draft(self.text, at)

    def right(self) -> Draft:
        """One character on, with the marks drawn on top of it."""
        at = min(len(self.text), self.at + 1)
        while at < len(self.text) and not cell_len(self.text[at]):
            at += 1
        return Draft(self.text, at)

    def first(self) -> Draft:
        """Before the first character."""
        return Draft(self.text, 0)

    def last(self) -> Draft:
        """After the last character."""
        return Draft(self.text, len(self.text))

    def without_before(self) -> Draft:
        """Without the character before the insertion point."""
        before = self.left().at
        return Draft(self.text[:before] + self.text[self.at :], before)

    def without_after(self) -> Draft:
        """Without the character at the insertion point."""
        return Draft(self.text[: self.at] + self.text[self.right().at :], self.at)

    def window(self, width: int) -> tuple[str, str, str]:
        """What `width` terminal cells show: text before the insertion point, the character at it, text after it."""
        start, ahead = 0, min(len(self.text), self.at + width // 3)
        while start < self.at and cell_len(self.text[start:ahead] + " ") > width:
            start += 1
        before, after = self.text[start : self.at], self.right().at
        at_point = self.text[self.at : after]
        if not 0 < cell_len(at_point) <= width - cell_len(before):
            at_point = " "
        return before, at_point, set_cell_size(self.text[after:], max(0, width - cell_len(before + at_point)))


EDITS: dict[str, Callable[[Draft], Draft]] = {
    "left": Draft.left,
    "right": Draft.right,
    "home": Draft.first,
    "end": Draft.last,
    "backspace": Draft.without_before,
    "delete": Draft.without_after,
}
