"""What a grid shows: rows of cells as plain text with a tone, ready for a terminal, a report or a test.

A view builds a `Table`; whoever paints it adds nothing of its own. Text in a cell is literal and already
cleaned of control characters.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


class Tone(Enum):
    """How a cell differs from plain text. Tones are attributes of the terminal, never a colour alone."""

    PLAIN = "plain"
    SHORT = "short"  # reverse bold
    TIGHT = "tight"  # bold
    UNKNOWN = "unknown"  # underlined
    ASSUMED = "assumed"  # dim: a default or a material's value that nobody typed
    GUESS = "guess"  # italic: typed, but only a guess
    FAINT = "faint"  # dim: units, origins, notes beside the number


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell. `key` names the given, result or margin it shows ("" none), `edit` the text that Enter starts from."""

    text: str
    tone: Tone = Tone.PLAIN
    key: str = ""
    editable: bool = False
    edit: str = ""  # what editing starts from where it differs from the text shown; "" means the text


@dataclass(frozen=True, slots=True)
class Column:
    """Heading lines (top to bottom), width in terminal cells, and whether the text stands at the right."""

    heading: tuple[str, ...]
    width: int
    right: bool = False


@dataclass(frozen=True, slots=True)
class Table:
    """Columns and rows; the first `fixed` columns stay in view when the rest scrolls sideways."""

    columns: tuple[Column, ...]
    rows: tuple[tuple[Cell, ...], ...]
    fixed: int = 0
