"""The grid in the same process, key by key, and on a pseudo-terminal in a small program of its own."""

from __future__ import annotations

import asyncio
import os
import signal
import subprocess
import sys
from collections.abc import Callable, Coroutine
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len
from rich.style import Style
from textual.app import App, ComposeResult
from textual.geometry import Region

from planner.tui import terminal
from planner.tui.draft import EDITS, LONGEST_TEXT, Draft, cleaned
from planner.tui.grid import Grid
from planner.tui.lines import fitted
from planner.views.table import Cell, Column, Table, Tone

from .harness import BACKSPACE, DOWN, ENTER, PASTE_BEGINS, PASTE_ENDS, Terminal, keys, painted, paste, settle

ROOT = Path(__file__).parents[2]


class WatchedGrid(Grid):
    """A grid that notes which parts it asks to have repainted: () is the whole widget."""

    def __init__(self, table: Table, **options: Any) -> None:
        self.asked: list[tuple[Region, ...]] = []
        self.lines_painted: list[int] = []
        super().__init__(table, **options)

    def refresh(self, *regions: Region, repaint: bool = True, layout: bool = False, recompose: bool = False) -> Any:
        self.asked.append(regions)
        return super().refresh(*regions, repaint=repaint, layout=layout, recompose=recompose)

    def render_line(self, y: int) -> Any:
        self.lines_painted.append(y)
        return super().render_line(y)

    def screen_lines(self) -> list[str]:
        return [super(WatchedGrid, self).render_line(y).text.rstrip() for y in range(self.size.height)]

    def looks(self, text: str) -> Style:
        """The style of the first piece of the widget that holds this text."""
        for y in range(self.size.height):
            for segment in super().render_line(y):
                if text in segment.text:
                    return segment.style or Style()
        raise AssertionError(f"{text!r} is not shown")


class Bench(App[None]):
    """Shows one grid, notes its messages, takes every text but those that begin with 'x'."""

    ENABLE_COMMAND_PALETTE = False

    def __init__(self, table: Table, **options: Any) -> None:
        super().__init__()
        self.table = table
        self.grid = WatchedGrid(table, **options)
        self.heard: list[tuple[str, ...]] = []
        self.bubbled: list[str] = []

    def compose(self) -> ComposeResult:
        yield self.grid

    def on_key(self, event: Any) -> None:
        self.bubbled.append(event.key)

    def note(self, message: Any, *more: str) -> None:
        assert message.grid is self.grid and message.control is self.grid
        self.heard.append((type(message).__name__, message.key, *more))

    def on_grid_moved(self, message: Grid.Moved) -> None:
        self.note(message)

    def on_grid_typing(self, message: Grid.Typing) -> None:
        self.note(message, message.text)

    def on_grid_gave_up(self, message: Grid.GaveUp) -> None:
        self.note(message)

    def on_grid_refused(self, message: Grid.Refused) -> None:
        self.note(message)

    def on_grid_accepted(self, message: Grid.Accepted) -> None:
        self.note(message, message.text, message.step)
        if message.text.startswith("x"):
            message.grid.reject()
            return
        message.grid.accept()
        self.table = with_text(self.table, message.key, message.text)
        message.grid.show(self.table)


def with_text(table: Table, key: str, text: str) -> Table:
    rows = tuple(tuple(replace(cell, text=text) if cell.key == key else cell for cell in row) for row in table.rows)
    return replace(table, rows=rows)


def numbers(rows: int, columns: int = 4, *, fixed: int = 1, width: int = 8) -> Table:
    """Names in the first column, then numbers 'row.column' of which all but the last column are editable."""
    heads = (Column(("", ""), 4), *(Column((f"c{c}", "GHz"), width, right=True) for c in range(1, columns)))
    body = tuple(
        (
            Cell(f"Q{r}"),
            *(Cell(f"{r}.{c}", key=f"Q{r}.{c}", editable=c < columns - 1) for c in range(1, columns)),
        )
        for r in range(rows)
    )
    return Table(heads, body, fixed)


def run(
    scenario: Callable[[Bench], Coroutine[Any, Any, None]],
    table: Table | None = None,
    *,
    size: tuple[int, int] = (80, 24),
    **options: Any,
) -> Bench:
    app = Bench(numbers(5) if table is None else table, **options)

    async def session() -> None:
        async with app.run_test(size=size):
            await painted(app)
            app.grid.asked.clear()
            app.grid.lines_painted.clear()
            app.heard.clear()
            await scenario(app)

    asyncio.run(session())
    return app


# -- drawing


def test_title_headings_and_rows_stand_below_each_other() -> None:
    async def scenario(app: Bench) -> None:
        assert app.grid.screen_lines()[:5] == [
            "-- qubits " + "-" * 70,
            "            c1       c2       c3",
            "           GHz      GHz      GHz",
            " Q0  >     0.1      0.2      0.3",
            " Q1        1.1      1.2      1.3",
        ]
        assert app.grid.looks("qubits").bold  # has the keyboard

    run(scenario, title="qubits")


def test_text_is_literal_and_cut_text_is_marked() -> None:
    rows = ((Cell("[b]x[/b]"), Cell("[@click=app.quit]far too long[/]")), (Cell("a[/b]c"),))

    async def scenario(app: Bench) -> None:
        assert app.grid.screen_lines()[1:3] == [">[b]x[/b] [@click=app~", " a[/b]c"]

    run(scenario, Table((Column(("",), 8), Column(("",), 12)), rows))


def test_wide_and_combining_characters_move_no_column() -> None:
    texts = ("plain", "温度計", "e\u0301te\u0301", "温温温温温温温温")
    rows = tuple((Cell(text), Cell("end")) for text in texts)

    async def scenario(app: Bench) -> None:
        for line in app.grid.screen_lines()[1:5]:
            assert cell_len(line[: line.index("end")]) == 10

    run(scenario, Table((Column(("name",), 8), Column(("",), 3)), rows))


@given(st.text(st.characters(exclude_categories=("Cc", "Cs"))), st.integers(1, 40), st.booleans())
def test_a_fitted_text_fills_its_width_exactly(text: str, width: int, right: bool) -> None:
    assert cell_len(fitted(text, width, right=right)) == width


@pytest.mark.parametrize(
    ("tone", "looks"),
    [
        (Tone.PLAIN, Style()),
        (Tone.SHORT, Style(reverse=True, bold=True)),
        (Tone.TIGHT, Style(bold=True)),
        (Tone.UNKNOWN, Style(underline=True)),
        (Tone.ASSUMED, Style(dim=True)),
        (Tone.GUESS, Style(italic=True)),
        (Tone.FAINT, Style(dim=True)),
    ],
)
def test_tones_are_attributes_without_colour(tone: Tone, looks: Style) -> None:
    async def scenario(app: Bench) -> None:
        assert app.grid.looks("value") == looks

    run(scenario, Table((Column((), 5), Column((), 8)), ((Cell("here"), Cell("value", tone)),)))


@pytest.mark.parametrize("tone", list(Tone))
def test_the_cursor_is_told_from_every_tone_without_colour(tone: Tone) -> None:
    """Under the cursor a cell is reversed, differs from the same cell elsewhere, and has a pointer beside it."""
    table = Table((Column((), 8),), ((Cell("under", tone, "a"),), (Cell("other", tone, "b"),)))

    async def scenario(app: Bench) -> None:
        assert app.grid.looks("under").reverse
        assert app.grid.looks("under") != app.grid.looks("other")
        assert app.grid.screen_lines()[:2] == [">under", " other"]

    run(scenario, table)


def test_the_cursor_is_shown_only_while_focused() -> None:
    async def scenario(app: Bench) -> None:
        assert app.grid.looks("0.1").reverse
        app.screen.set_focus(None)
        await settle(app)
        assert not app.grid.looks("0.1").reverse
        assert ">" not in "".join(app.grid.screen_lines())

    run(scenario)


# -- moving


def test_arrows_move_one_cell_and_stop_at_the_edges() -> None:
    async def scenario(app: Bench) -> None:
        assert app.grid.cursor_key == "Q0.1"
        await keys(app, "down", "right", "right", "right", "up", "up")
        assert app.grid.cursor_key == "Q0.3"
        await keys(app, "left")

    app = run(scenario)
    assert app.heard == [("Moved", key) for key in ("Q1.1", "Q1.2", "Q1.3", "Q0.3", "Q0.2")]
    assert app.bubbled == []


def test_home_and_end_go_to_the_first_and_last_column() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "down", "end")
        assert app.grid.cursor_key == "Q1.3"
        await keys(app, "home")
        assert app.grid.cursor_key == "Q1.1"  # the name of the row has no key

    run(scenario)


def test_a_move_repaints_the_two_cells_only() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "down")
        assert app.grid.asked == [(Region(5, 2, 9, 1),), (Region(5, 3, 9, 1),)]
        await painted(app)
        assert set(app.grid.lines_painted) == {2, 3}

    run(scenario)


def test_a_thousand_rows_paint_only_what_is_seen() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "pagedown")
        assert app.grid.cursor_key == "Q21.1"  # 22 lines for rows, one of them stays in view
        await keys(app, *["pagedown"] * 60)
        assert app.grid.cursor_key == "Q999.1"
        assert app.grid.screen_lines()[-1].startswith(" Q999")
        app.grid.lines_painted.clear()
        await keys(app, *["pageup"] * 60)
        assert app.grid.screen_lines()[:3][-1].startswith(" Q0")
        assert max(app.grid.lines_painted) < 24
        app.grid.asked.clear()
        app.grid.show(with_text(app.table, "Q500.2", "off the screen"))
        assert app.grid.asked == []

    run(scenario, numbers(1000))


def test_sideways_by_whole_columns_beside_the_fixed_ones() -> None:
    async def scenario(app: Bench) -> None:
        assert app.grid.screen_lines()[:3] == [
            "            c1       c2       c3>",
            "           GHz      GHz      GHz",
            " Q0  >     0.1      0.2      0.3",
        ]
        await keys(app, *["right"] * 3)
        assert app.grid.cursor_key == "Q0.4"
        assert app.grid.screen_lines()[:3] == [
            "     <      c2       c3       c4>",
            "           GHz      GHz      GHz",
            " Q0        0.2      0.3>     0.4",
        ]
        await keys(app, "end")
        assert app.grid.screen_lines()[0] == "     <      c7       c8       c9"
        await keys(app, "home")
        assert app.grid.screen_lines()[0] == "            c1       c2       c3>"

    run(scenario, numbers(3, 10), size=(34, 10))


def test_fixed_columns_scroll_too_where_they_would_leave_no_room() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "right", "right")
        assert app.grid.screen_lines()[2] == ">     0.3"

    run(scenario, numbers(3, 5, fixed=3), size=(12, 10))


def test_another_size_keeps_the_cursor_in_view() -> None:
    async def scenario(app: Bench) -> None:
        app.grid.move_to("Q80.8")
        await settle(app)
        app.grid.styles.width, app.grid.styles.height = 30, 8
        await painted(app)
        assert (app.grid.size.width, app.grid.size.height) == (30, 8)
        assert app.grid.looks("80.8").reverse

    run(scenario, numbers(100, 10))


def test_a_table_without_rows_or_columns_stands_still() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "down", "end", "enter", "5", "pagedown")
        assert app.grid.cursor_key == ""
        app.grid.show(Table((), ()))
        await keys(app, "left", "home")

    assert run(scenario, numbers(0)).heard == [("Refused", ""), ("Refused", "")]


def test_move_to_finds_a_key_and_prefers_the_editable_cell() -> None:
    row = (Cell("field", key="magnet.field"), Cell("420 mT", key="magnet.field", editable=True), Cell("", key="other"))

    async def scenario(app: Bench) -> None:
        assert app.grid.move_to("magnet.field")
        assert app.grid.looks("420 mT").reverse
        assert not app.grid.move_to("magnet.mode")
        assert not app.grid.move_to("")
        assert app.grid.cursor_key == "magnet.field"

    run(scenario, Table((Column((), 9), Column((), 9), Column((), 9)), ((Cell("text"),), row)))


# -- another table


def test_only_the_cells_that_differ_are_repainted() -> None:
    async def scenario(app: Bench) -> None:
        app.grid.show(with_text(with_text(app.table, "Q2.2", "7"), "Q4.3", "8"))
        assert app.grid.asked == [(Region(15, 4, 8, 1),), (Region(24, 6, 8, 1),)]
        await painted(app)
        assert set(app.grid.lines_painted) == {4, 6}
        assert app.heard == []

    run(scenario)


def test_an_equal_table_repaints_nothing_and_a_longer_one_everything() -> None:
    async def scenario(app: Bench) -> None:
        app.grid.show(numbers(5))
        assert app.grid.asked == []
        app.grid.show(numbers(6))
        assert () in app.grid.asked
        await settle(app)
        assert app.grid.screen_lines()[7].startswith(" Q5")

    run(scenario)


def test_the_cursor_stays_on_its_key() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "down", "down", "right")
        app.heard.clear()
        app.grid.show(replace(app.table, rows=app.table.rows[::-1][1:] + app.table.rows[:0]))
        await settle(app)
        assert app.grid.cursor_key == "Q2.2" and app.heard == []
        assert app.grid.looks("2.2").reverse
        app.grid.show(replace(app.table, rows=app.table.rows[:2]))
        await settle(app)
        assert app.heard == [("Moved", "Q1.2")]  # gone: as near as the table goes

    run(scenario)


def test_a_shorter_table_leaves_no_scrolled_emptiness() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, *["pagedown"] * 10)
        app.grid.show(numbers(4))
        await settle(app)
        assert [line[:3] for line in app.grid.screen_lines()[2:7]] == [" Q0", " Q1", " Q2", " Q3", ""]

    run(scenario, numbers(100))


def test_typing_survives_a_table_that_keeps_its_cell_and_ends_with_one_that_does_not() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "5")
        app.grid.show(with_text(app.table, "Q0.1", "new"))
        assert app.grid.typing and app.heard == [("Typing", "Q0.1", "5")]
        app.grid.show(replace(app.table, rows=app.table.rows[1:]))
        await settle(app)
        assert not app.grid.typing
        assert app.heard[1:] == [("GaveUp", "Q0.1"), ("Moved", "Q1.1")]

    run(scenario)


# -- typing


def test_a_character_starts_a_new_text_and_enter_has_it_accepted() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, *"42 mT")
        assert app.grid.typing
        assert app.grid.screen_lines()[2].startswith(" Q0  >42 mT")
        await keys(app, "enter")
        assert not app.grid.typing
        assert app.grid.screen_lines()[2].startswith(" Q0  >   42 mT")

    app = run(scenario)
    typed = [("Typing", "Q0.1", text) for text in ("4", "42", "42 ", "42 m", "42 mT")]
    assert app.heard == [*typed, ("Accepted", "Q0.1", "42 mT", "stay")]


@pytest.mark.parametrize(
    ("key", "step", "after"),
    [
        ("enter", "stay", "Q1.2"),
        ("up", "up", "Q0.2"),
        ("down", "down", "Q2.2"),
        ("tab", "next", "Q1.2"),
        ("shift+tab", "previous", "Q1.2"),
    ],
)
def test_keys_that_accept_and_where_they_lead(key: str, step: str, after: str) -> None:
    async def scenario(app: Bench) -> None:
        app.grid.move_to("Q1.2")
        await keys(app, "7", key)
        assert app.grid.cursor_key == after

    app = run(scenario)
    assert ("Accepted", "Q1.2", "7", step) in app.heard
    assert app.bubbled == []


def test_a_rejected_text_stays_to_be_mended() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, *"x1", "down")
        assert app.grid.typing and app.grid.cursor_key == "Q0.1"
        await keys(app, "home", "delete", "down")
        assert not app.grid.typing and app.grid.cursor_key == "Q1.1"

    app = run(scenario)
    assert ("Accepted", "Q0.1", "1", "down") in app.heard


def test_escape_gives_up() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "9", "escape")
        assert not app.grid.typing
        assert app.grid.screen_lines()[2].startswith(" Q0  >     0.1")
        await keys(app, "escape")

    app = run(scenario)
    assert app.heard == [("Typing", "Q0.1", "9"), ("GaveUp", "Q0.1")]
    assert app.bubbled == ["escape"]  # the second one only


def test_enter_edits_the_present_text() -> None:
    cells = (Cell("0.42", key="a", editable=True, edit="420 mT ± 1 mT"), Cell("15", key="b", editable=True))

    async def scenario(app: Bench) -> None:
        await keys(app, "enter", "escape", "right", "enter", "backspace", "6", "enter")

    app = run(scenario, Table((Column((), 8), Column((), 8)), (cells,)))
    assert [heard for heard in app.heard if heard[0] in ("Typing", "Accepted")] == [
        ("Typing", "a", "420 mT ± 1 mT"),
        ("Typing", "b", "15"),
        ("Typing", "b", "1"),
        ("Typing", "b", "16"),
        ("Accepted", "b", "16", "stay"),
    ]


def test_keys_inside_the_text_move_and_erase() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, *"abcd", "left", "left", "X", "home", "delete", "right", "backspace", "end", "Y", "enter")

    app = run(scenario)
    assert app.heard[-1] == ("Accepted", "Q0.1", "XcdY", "stay")
    assert app.grid.cursor_key == "Q0.1"


def test_the_insertion_point_is_the_reversed_character() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, *"wxyz", "left", "left")
        assert app.grid.looks("y").reverse
        assert not app.grid.looks("wx").reverse and not app.grid.looks("z").reverse

    run(scenario)


def test_results_are_not_typed() -> None:
    async def scenario(app: Bench) -> None:
        app.grid.move_to("Q0.3")
        await settle(app)
        app.heard.clear()
        await keys(app, "5", "enter")
        await paste(app, "7")
        assert not app.grid.typing

    assert run(scenario).heard == [("Refused", "Q0.3")] * 3


def test_space_tab_and_commands_are_left_to_the_app() -> None:
    names = ("space", "tab", "shift+tab", "ctrl+s", "f1")

    async def scenario(app: Bench) -> None:
        await keys(app, " ", *names[1:])
        app.grid.focus()
        await settle(app)
        await keys(app, "5", "ctrl+s", "pagedown")

    app = run(scenario)
    assert app.bubbled == [*names, "ctrl+s", "pagedown"]
    assert app.heard == [("Typing", "Q0.1", "5")]


def test_a_character_with_alt_held_is_a_command() -> None:
    async def scenario(app: Bench) -> None:
        from textual import events

        app.post_message(events.Key("alt+a", "a"))
        await settle(app)
        assert not app.grid.typing

    assert run(scenario).bubbled == ["alt+a"]


def test_a_paste_starts_a_text_or_goes_into_it() -> None:
    async def scenario(app: Bench) -> None:
        await paste(app, "420\u00a0mT\n")
        await keys(app, "home")
        await paste(app, "-\x1b[31m\t\u202e")
        await keys(app, "enter")

    app = run(scenario)
    assert app.heard[-1] == ("Accepted", "Q0.1", "-\ufffd[31m \ufffd420 mT", "stay")


def test_a_text_has_at_most_two_hundred_characters() -> None:
    async def scenario(app: Bench) -> None:
        await paste(app, "1" * 300)
        await keys(app, "2", "enter")

    assert run(scenario).heard[-1] == ("Accepted", "Q0.1", "1" * 200, "stay")


def test_a_long_text_covers_the_columns_to_its_right_and_shows_its_end() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, *"measured")  # eight characters and the insertion point: one column is not enough
        assert app.grid.screen_lines()[2] == " Q0  >measured               0.3"
        await paste(app, " on 3 May with the lock-in, wiring as in CD12")
        assert app.grid.screen_lines()[2] == " Q0  >with the lock-in, wiring as in CD12"
        await keys(app, "home")
        assert app.grid.screen_lines()[2] == " Q0  >measured on 3 May with the lock-in,"
        await keys(app, "escape")
        assert app.grid.screen_lines()[2] == " Q0  >     0.1      0.2      0.3"

    run(scenario, size=(42, 10))


def test_typing_repaints_only_what_the_text_covers() -> None:
    async def scenario(app: Bench) -> None:
        await keys(app, "1")
        assert app.grid.asked == [(Region(6, 2, 8, 1),)]

    run(scenario)


texts = st.text(st.characters(exclude_categories=("Cc", "Cs")), max_size=LONGEST_TEXT)


@given(texts, st.lists(st.sampled_from(sorted(EDITS)), max_size=20), st.integers(4, 40))
def test_a_draft_shows_its_insertion_point_in_exactly_its_width(text: str, edits: list[str], width: int) -> None:
    draft = Draft.starting(text)
    for edit in edits:
        draft = EDITS[edit](draft)
        assert 0 <= draft.at <= len(draft.text) <= LONGEST_TEXT
    before, at_point, after = draft.window(width)
    assert cell_len(at_point) >= 1
    assert cell_len(before) + cell_len(at_point) + cell_len(after) == width
    assert draft.text[: draft.at].endswith(before)


@given(st.text())
def test_pasted_text_is_one_printable_line(text: str) -> None:
    assert cleaned(text).isprintable()


# -- what the terminal needs


def test_the_escape_delay_is_set_unless_the_user_chose_one(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("ESCDELAY", raising=False)
    terminal.prepare_environment()
    assert os.environ["ESCDELAY"] == "400"
    monkeypatch.setenv("ESCDELAY", "50")
    terminal.prepare_environment()
    assert os.environ["ESCDELAY"] == "50"


def test_the_terminal_module_comes_before_textual() -> None:
    code = "import sys, planner.tui.terminal; print('textual' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout == "False\n"


def test_this_textual_has_the_inner_names_that_are_replaced() -> None:
    assert terminal.inner_names_known()


@pytest.mark.parametrize(
    ("term", "encoding", "ascii_only"),
    [
        ("xterm-256color", "utf-8", False),
        ("xterm", "UTF8", False),
        ("xterm", "latin-1", True),
        ("linux", "utf-8", True),
        ("vt220", "utf-8", True),
    ],
)
def test_when_plain_ascii_is_drawn(monkeypatch: pytest.MonkeyPatch, term: str, encoding: str, ascii_only: bool) -> None:
    monkeypatch.setenv("TERM", term)
    monkeypatch.setattr(sys, "__stderr__", FakeStream(encoding))
    assert terminal.plain_ascii() is ascii_only


@pytest.mark.parametrize("missing", [None, "stdin", "stdout", "stderr"])
def test_a_full_screen_needs_all_three_streams(monkeypatch: pytest.MonkeyPatch, missing: str | None) -> None:
    monkeypatch.setenv("TERM", "xterm")
    for name in ("stdin", "stdout", "stderr"):
        monkeypatch.setattr(sys, f"__{name}__", FakeStream(is_terminal=name != missing))
    assert terminal.usable() is (missing is None)
    monkeypatch.setenv("TERM", "dumb")
    assert not terminal.usable()


class FakeStream:
    def __init__(self, encoding: str = "utf-8", *, is_terminal: bool = True) -> None:
        self.encoding = encoding
        self.is_terminal = is_terminal

    def isatty(self) -> bool:
        return self.is_terminal


# -- on a pseudo-terminal

TOY = """
import os, signal, sys, threading
from pathlib import Path
from planner.tui import terminal
terminal.prepare_environment()
from textual.app import App
from textual.widgets import Static
from planner.tui.grid import Grid
from planner.views.table import Cell, Column, Table


class Toy(App):
    ENABLE_COMMAND_PALETTE = False
    CSS = "Grid { height: 1fr; } Static { height: 1; }"
    texts = {f"row{r}": "empty" for r in range(40)}
    actions = False

    def table(self):
        rows = tuple((Cell(key), Cell(text, key=key, editable=True)) for key, text in self.texts.items())
        return Table((Column(("name",), 8), Column(("text",), 30)), rows, 1)

    def compose(self):
        yield Grid(self.table(), title="toy")
        yield Static("ready", markup=False)

    def on_mount(self):
        self.theme = "ansi-dark"
        before = lambda: Path(sys.argv[1]).write_text("kept")
        terminal.install_signal_handlers(self, before_exit=before, patience=float(sys.argv[2]))

    def on_grid_accepted(self, message):
        self.texts = {**self.texts, message.key: message.text}
        message.grid.accept()
        message.grid.show(self.table())

    def on_key(self, event):
        if event.key == "space":
            self.set_focus(None)
            self.query_one(Static).update("actions")
        elif event.key == "q":
            self.exit()
        elif event.key == "ctrl+x":
            os.kill(os.getpid(), signal.SIGTERM)
            threading.Event().wait()  # the loop stands still


if "DETACHED" in os.environ and (child := os.fork()):
    signal.signal(signal.SIGHUP, signal.SIG_IGN)
    sys.exit(os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]))
if "DETACHED" in os.environ:
    os.setsid()  # nothing signals this process when the terminal goes
app = Toy(driver_class=terminal.driver_class())
app.run(mouse=False)
sys.exit(app.return_code)
"""


@pytest.fixture
def toy(tmp_path: Path) -> Any:
    def started(*, patience: float = 60.0, **options: Any) -> Terminal:
        script = tmp_path / "toy.py"
        script.write_text(TOY)
        argv = [sys.executable, str(script), str(tmp_path / "kept"), str(patience)]
        env = {"PYTHONPATH": str(ROOT), "COLORTERM": "truecolor", **options.pop("env", {})}
        return Terminal(argv, cwd=tmp_path, env=env, **options)

    return started


def test_editing_on_a_terminal_in_one_burst(toy: Any) -> None:
    with toy() as session:
        session.wait_for("ready")
        assert session.screen()[0] == "-- toy " + "-" * 73
        assert session.looks("empty").reverse
        session.send(f"50 mT{DOWN}60 mT{DOWN}{PASTE_BEGINS}70 mT\n{PASTE_ENDS}{BACKSPACE}K{ENTER}")
        session.wait_for(lambda lines: lines[2:5] == [" row0     50 mT", " row1     60 mT", " row2    >70 mK"])
        session.send(" q")  # Space takes the keyboard from the grid; q is not typed into it
        assert session.wait_until_ended() == 0
        assert b"\x1b[?1049l" in session.output


def test_a_move_writes_few_bytes_and_no_colour(toy: Any) -> None:
    with toy() as session:
        session.wait_for("ready")
        for row in range(1, 6):  # the first moves may share their frames with the end of the start
            before = len(session.output)
            session.send(DOWN)
            session.wait_for(f"row{row}    >empty")
            session.wait_for(lambda _: session.output.endswith(b"\x1b[1;1H"))  # the frame is complete
        written = bytes(session.output[before:])
        assert len(written) < 200  # 82 bytes were measured for cells of 10 characters, ours have 30
        assert b"38;2" not in session.output and b"48;2" not in session.output


def test_a_smaller_window_keeps_the_cursor_in_view(toy: Any) -> None:
    with toy() as session:
        session.wait_for("ready")
        session.send(DOWN * 20)
        session.wait_for("row20   >")
        session.resize(8, 44)
        session.wait_for(lambda lines: len(lines) == 8 and any("row20   >" in line for line in lines))
        session.send("here" + ENTER)
        session.wait_for("row20   >here")


def test_bad_bytes_and_bad_key_codes_end_nothing(toy: Any) -> None:
    with toy() as session:
        session.wait_for("ready")
        session.send(b"5\xff\xe9m")
        session.wait_for(">5\ufffd\ufffdm")
        session.send("\x1b[999999999u")
        session.send("6" + ENTER)
        session.wait_for(lambda lines: lines[2] == " row0    >5\ufffd\ufffdm6")


@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGHUP])
def test_a_signal_ends_in_order(toy: Any, tmp_path: Path, number: signal.Signals) -> None:
    with toy() as session:
        session.wait_for("ready")
        session.process.send_signal(number)
        assert session.wait_until_ended() == 128 + number
        assert (tmp_path / "kept").read_text() == "kept"
        assert b"\x1b[?1049l" in session.output


def test_a_signal_ends_even_a_loop_that_stands_still(toy: Any, tmp_path: Path) -> None:
    with toy(patience=0.2) as session:
        session.wait_for("ready")
        session.send("\x18")
        assert session.wait_until_ended() == 128 + signal.SIGTERM
        assert (tmp_path / "kept").read_text() == "kept"
        assert session.output.endswith(terminal.LEAVING)


@pytest.mark.parametrize("env", [{}, {"DETACHED": "1"}], ids=["signalled", "watched"])
def test_a_lost_terminal_ends_in_order_signalled_or_not(toy: Any, tmp_path: Path, env: dict[str, str]) -> None:
    with toy(env=env) as session:
        session.wait_for("ready")
        session.hang_up()
        assert session.wait_until_ended() == 128 + signal.SIGHUP
        assert (tmp_path / "kept").read_text() == "kept"
