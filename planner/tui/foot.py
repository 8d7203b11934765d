"""The two lines at the bottom: help or messages, and the actions line with its questions and prompts."""

from __future__ import annotations

import re
import textwrap
from collections.abc import Callable, Mapping

from rich.text import Text
from textual import events
from textual.widget import Widget
from textual.widgets import Static

from planner.tui.actions import ACTIONS, CHOOSING, RESTING, actions_line
from planner.tui.draft import EDITS, Draft, cleaned
from planner.tui.grid import typed_character
from planner.tui.lines import CUT

Then = Callable[[], None]


class Foot(Static, can_focus=True):
    """Shows one line of text and one of keys. While it asks, it has the keyboard and gives it back afterwards."""

    def __init__(self) -> None:
        super().__init__(markup=False)
        self._line = ""
        self._bad = False
        self._before = ("", False)
        self._keys = RESTING
        self._answers: Mapping[str, Then] = {}
        self._prompt: tuple[str, Draft, Callable[[str], None]] | None = None
        self._back: Then = lambda: None

    @property
    def asking(self) -> bool:
        """Whether it waits for an answer."""
        return bool(self._answers) or self._prompt is not None

    def say(self, line: str, *, bad: bool = False) -> None:
        """Shows a line of help or a message; `bad` for one that asks to be mended."""
        self._line, self._bad = line, bad
        self._paint()

    def choose(self, do: Callable[[str], None]) -> None:
        """Opens the actions; the letter typed next does one, by its method's name."""
        before = (self._line, self._bad)
        self.say(CHOOSING)
        self._ask(actions_line(), {action.letter: _bound(do, action.method) for action in ACTIONS})
        self._before = before

    def ask(self, question: str, keys: str, answers: Mapping[str, Then]) -> None:
        """Asks a question to be answered by one key; Escape answers nothing."""
        before = (self._line, self._bad)
        self.say(question, bad=True)
        self._ask(f"{keys}  Esc", answers)
        self._before = before

    def prompt(self, question: str, text: str, then: Callable[[str], None]) -> None:
        """Asks for a text, to begin with `text`."""
        self._prompt, self._before = (question, Draft.starting(text), then), (self._line, self._bad)
        self._take_keyboard()

    def on_key(self, event: events.Key) -> None:
        """While asking, every key is an answer."""
        if not self.asking:
            return
        event.stop()
        event.prevent_default()
        if event.key == "escape":
            self._end()
        elif self._prompt is not None:
            self._type(event, *self._prompt)
        elif (then := self._answers.get(event.character or "")) is not None:
            self._end()
            then()

    def on_paste(self, event: events.Paste) -> None:
        """Pasted text goes into the prompt."""
        if self._prompt is not None:
            question, draft, then = self._prompt
            self._prompt = (question, draft.inserted(cleaned(event.text)), then)
            self._paint()

    def _type(self, event: events.Key, question: str, draft: Draft, then: Callable[[str], None]) -> None:
        if event.key == "enter":
            self._end()
            then(draft.text)
            return
        edit = EDITS.get(event.key)
        self._prompt = (question, edit(draft) if edit else draft.inserted(typed_character(event)), then)
        self._paint()

    def _ask(self, keys: str, answers: Mapping[str, Then]) -> None:
        self._keys, self._answers, self._before = keys, answers, (self._line, self._bad)
        self._take_keyboard()

    def _take_keyboard(self) -> None:
        focused = self.screen.focused
        if focused is not None and focused is not self:
            self._back = lambda: _focus(focused)
        self.focus(scroll_visible=False)
        self._paint()

    def _end(self) -> None:
        self._keys, self._answers, self._prompt = RESTING, {}, None
        self._line, self._bad = self._before
        self._back()
        self._paint()

    def _paint(self) -> None:
        width = max(1, self.size.width)
        line = Text(self._line, style="bold" if self._bad else "")
        if self._prompt is not None:
            question, draft, _ = self._prompt
            line = Text.assemble(
                (f"{question}: ", "bold"),
                draft.text[: draft.at],
                (draft.text[draft.at : draft.at + 1] or " ", "reverse"),
                draft.text[draft.at + 1 :],
            )
            self.update(Text("\n").join([line, Text("Enter accept  Esc give up")]), layout=False)
            return
        keys = _folded_keys(self._keys, width)
        room = max(1, self.size.height - len(keys))
        shown = _cut(list(line.wrap(self.app.console, width)), room, width)
        self.update(
            Text("\n").join([*shown, *[Text("")] * (room - len(shown)), *map(Text, keys)]),
            layout=False,
        )

    def on_resize(self) -> None:
        """Another width, another cut."""
        self._paint()


def _folded_keys(keys: str, width: int) -> list[str]:
    """The line of keys in pieces of at most `width` characters, each key together with what it does."""
    whole = re.sub(r"(?<! ) (?! )", "\xa0", keys)
    return [piece.replace("\xa0", " ") for piece in textwrap.wrap(whole, width)]


def _cut(folds: list[Text], room: int, width: int) -> list[Text]:
    """As many folds of a line as there is room for, marked where that is not all of it."""
    if len(folds) <= room:
        return folds
    last = folds[room - 1].copy()
    last.rstrip()
    last.truncate(width - 1)
    return [*folds[: room - 1], last.append(CUT)]


def _focus(widget: Widget) -> None:
    widget.focus(scroll_visible=False)


def _bound(do: Callable[[str], None], method: str) -> Then:
    return lambda: do(method)
