"""The one table of what can be done: the actions line and the help are made from it."""

from __future__ import annotations

from typing import NamedTuple


class Action(NamedTuple):
    """One action: its letter after Space, its word on the actions line, the app's method, its help, a control key."""

    letter: str
    word: str
    method: str
    help: str
    control: str = ""


ACTIONS = (
    Action("u", "undo", "undo", "take back the last edit", "ctrl+z"),
    Action("r", "redo", "redo", "make the edit taken back again", "ctrl+y"),
    Action("s", "save", "save", "save the plan: only the lines that changed are written", "ctrl+s"),
    Action("f", "file", "save_as", "save under another name"),
    Action("n", "new", "add_row", "add a qubit, coil or the like: a copy of the one here"),
    Action("x", "drop", "drop_row", "remove the qubit, coil or the like under the cursor"),
    Action("m", "margins", "margins", "go to the margins"),
    Action("w", "why", "why", "explain the number under the cursor"),
    Action("h", "help", "help", "this help"),
    Action("l", "leave", "leave", "leave the editor; asks when the plan is not saved", "ctrl+c"),
)

RESTING = "Space actions   Enter edit   Tab next pane"
CHOOSING = "The next key does one of these; Escape closes them."
KEYS = (
    ("arrows, Home, End, Page up/down", "move"),
    ("Tab, Shift-Tab", "next pane, previous pane"),
    ("any character", "begins a new text for the given at the cursor"),
    ("Enter", "edits the present text; accepts a new one"),
    ("Up, Down, Tab", "accept the text being typed and go on"),
    ("Escape", "gives up the text; closes what Space opened"),
    ("an empty text", "removes the given: its default counts again"),
    ("Space", "opens the actions, the next key does one:"),
)


def actions_line() -> str:
    """All actions with their letters, in one line."""
    return "  ".join(f"{action.letter} {action.word}" for action in ACTIONS)


def help_lines() -> list[str]:
    """The keys and the actions, a line each."""
    keys = [f"{key:<32} {what}" for key, what in KEYS]
    return keys + [f"    Space {action.letter:<4}{action.control:<10} {action.help}" for action in ACTIONS]
