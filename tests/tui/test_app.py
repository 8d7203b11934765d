"""The editor in the same process, key by key: what is typed, done, shown and saved."""

# ruff: noqa: ASYNC240 - nothing else waits while a test looks at its own small files

from __future__ import annotations

import asyncio
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from textual import events
from textual.geometry import Region, Size

from planner.plan import ROWS, SECTIONS, address_of, table_givens
from planner.planfile import load
from planner.soundness import edited
from planner.tui import app as editor
from planner.tui import desk
from planner.tui.actions import ACTIONS, CHOOSING, RESTING
from planner.tui.app import Planner
from planner.tui.grid import Grid
from planner.views.editing import NOT_TYPED
from planner.views.tables import PANES, pane_title, qubit_table
from tests.planmaking import BENCH, text_of

from .harness import keys, painted, paste, settle
from .inprocess import act, changed_lines, copied, done, foot, retype, screen, typed, use

# -- what is shown


def test_it_opens_on_the_field_with_the_worst_margin_on_top(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        lines = screen(app)
        assert lines[0].split("  ")[0] == "SQ6-03, cooldown 14" and lines[0].endswith(" saved")
        assert "420 mT along c1" in lines[0] and "wafer passed" in lines[0]
        assert lines[1].startswith("1 short")
        assert lines[2].startswith("valley Q4 0.34 short: ")
        assert " >420 mT" in "\n".join(lines)
        assert foot(app).startswith("magnet.field: ")
        assert lines[-1] == RESTING

    use(drafted, scenario)


def test_what_to_type_next_comes_from_the_worker_and_is_kept_out_of_what_was_overtaken(minimal: Path) -> None:
    async def scenario(app: Planner) -> None:
        assert screen(app)[2].startswith("type next: ")
        overtaken, wrong = app.evaluation, app.following
        await paste(app, "400 mT")
        await keys(app, "enter")
        await done(app)
        right = app.following
        app.look_back(overtaken, wrong._replace(key="of an older plan") if wrong else None)
        assert app.following is right

    use(minimal, scenario)


def test_a_given_that_is_typed_next_makes_as_many_margins_known_as_was_said(minimal: Path) -> None:
    async def scenario(app: Planner) -> None:
        while app.following is not None:
            before = sum(margin.verdict == "unknown" for margin in app.evaluation.margins)
            following, plan = app.following, app.session.plan
            for key in filter(None, (following.key, following.also)):
                address = address_of(plan, key)
                app.take(editor.sessions.typed(app.session, address, address.given.example))
            await done(app)
            assert sum(margin.verdict == "unknown" for margin in app.evaluation.margins) == before - following.known
        assert app.evaluation.verdict != "unknown"

    use(minimal, scenario)


def test_a_wide_window_shows_the_margins_beside_and_a_narrow_one_below_in_turn(drafted: Path) -> None:
    async def wide(app: Planner) -> None:
        titles = next(line for line in screen(app) if "-- magnet" in line)
        assert "-- margins" in titles

    async def narrow(app: Planner) -> None:
        assert "-- margins" not in "\n".join(screen(app))
        await act(app, "m")
        await painted(app)
        assert "-- margins" in "\n".join(screen(app)) and "-- magnet" not in "\n".join(screen(app))

    use(drafted, wide, size=(140, 45))
    use(drafted, narrow)


def test_another_size_rearranges_at_once(drafted: Path) -> None:
    async def resized(app: Planner, width: int, height: int) -> list[str]:
        app.post_message(events.Resize(Size(width, height), Size(width, height)))
        while app.screen.size != (width, height):  # noqa: ASYNC110 - Textual gathers sizes before it lays out
            await asyncio.sleep(0.01)
        await painted(app)
        return screen(app)

    async def scenario(app: Planner) -> None:
        lines = await resized(app, 140, 45)
        assert any("-- magnet" in line and "-- margins" in line for line in lines)
        assert len(lines[0]) == 140 and lines[0].endswith(" saved")
        lines = await resized(app, 59, 24)
        assert " ".join(lines).strip() == "The window has 59 columns and 24 lines: the planner needs 60 and 16."
        lines = await resized(app, 60, 16)
        assert lines[0].endswith(" saved") and len(lines[0]) == 60
        assert lines[2].startswith("valley Q4 0.34 short")
        assert any(" >420 mT" in line for line in lines)
        await act(app, "n")
        lines = await resized(app, 40, 10)
        lines = await resized(app, 80, 24)
        assert "Q7" in lines[-3]  # the question stands and still has the keyboard
        await keys(app, "enter")
        assert len(app.session.plan.qubit) == 7
        await act(app, "h")
        lines = await resized(app, 100, 30)
        assert lines[0].startswith("-- HELP")
        await keys(app, "escape")
        await painted(app)
        assert len(screen(app)[0]) == 100 and app.focused is app.desk.qubits

    use(drafted, scenario)


def test_however_long_the_names_the_state_stays_in_view(tmp_path: Path) -> None:
    path = copied("minimal", tmp_path)
    path.write_text(path.read_text().replace("format = 1", f'format = 1\ndevice = "{"long " * 40}"'))

    async def scenario(app: Planner) -> None:
        assert screen(app)[0].endswith("  saved")

    use(path, scenario)


def test_tab_goes_through_all_panes_and_back(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        seen = []
        for _ in desk.STOPS:
            seen.append(app.desk.stop)
            await keys(app, "tab")
            await painted(app)
            assert f"-- {pane_title(app.desk.stop)} " in "\n".join(screen(app))
            assert isinstance(app.focused, Grid) and (app.focused.cursor_key or app.desk.stop == "pair")
        assert sorted(seen) == sorted(desk.STOPS) and app.desk.stop == "magnet"
        for stop in reversed(seen):
            await keys(app, "shift+tab")
            assert app.desk.stop == stop

    use(drafted, scenario)


def test_the_help_and_the_actions_line_come_from_the_one_table(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, "space")
        assert screen(app)[-1] == "  ".join(f"{a.letter} {a.word}" for a in ACTIONS) and len(screen(app)[-1]) <= 80
        await keys(app, "h")
        await painted(app)
        shown = screen(app)
        for action in ACTIONS:
            assert any(
                line.split() == ["Space", action.letter, *action.control.split(), *action.help.split()]
                for line in shown
            )
        assert all(len(line) <= 80 for line in editor.Help.compose.__globals__["help_lines"]())
        await keys(app, "x")
        await painted(app)
        assert screen(app)[-1] == RESTING and len(app.session.plan.qubit) == 6

    use(drafted, scenario)


def test_in_the_smallest_window_the_help_scrolls_and_the_actions_are_all_there(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, "space")
        await painted(app)
        shown = "  ".join(screen(app)[-2:])
        assert all(f"{action.letter} {action.word}" in shown for action in ACTIONS)
        await keys(app, "h", "end")
        await painted(app)
        shown = "\n".join(screen(app))
        assert "leave the editor" in shown and "arrows, Home" not in shown and " of " in screen(app)[0]
        await keys(app, "home")
        await painted(app)
        assert "arrows, Home" in "\n".join(screen(app))
        await keys(app, "escape")
        await painted(app)
        assert screen(app)[-1] == RESTING

    use(drafted, scenario, size=(60, 16))


def test_a_line_too_long_for_the_foot_is_marked_where_it_is_cut(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        app.foot.say("word " * 40)
        await painted(app)
        assert len(screen(app)) == 24 and screen(app)[-2].endswith("word~") and len(screen(app)[-2]) <= 80
        app.foot.say("word " * 16 + "end")
        await painted(app)
        assert foot(app).endswith("end")

    use(drafted, scenario)


def test_every_action_can_be_done_from_its_letter(drafted: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    methods: list[str] = []
    action_do = Planner.action_do
    monkeypatch.setattr(Planner, "action_do", lambda app, method: (methods.append(method), action_do(app, method))[1])
    monkeypatch.setattr(Planner, "exit", lambda *_args, **_options: None)

    async def scenario(app: Planner) -> None:
        for action in ACTIONS:
            await act(app, action.letter)
            if action.method in {"save_as", "add_row", "why", "help"}:  # these wait for a key
                await keys(app, "escape")
        assert methods == [action.method for action in ACTIONS]

    use(drafted, scenario)


def test_the_actions_line_closes_with_escape_and_waits_on_other_letters(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        before = foot(app)
        await act(app, "q")
        await painted(app)
        assert foot(app) == CHOOSING and screen(app)[-1].startswith("u undo  r redo")
        await keys(app, "escape")
        await painted(app)
        assert screen(app)[-1] == RESTING and foot(app) == before
        assert app.focused is app.desk.pane and app.session.plan == app.session.document.plan

    use(drafted, scenario)


# -- typing


def test_typing_edits_and_enter_takes(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, *"350")
        assert foot(app).startswith("350 mT = 0.35 T. Then: ") and "valley" not in foot(app)
        assert screen(app)[2].startswith("valley Q4 0.34 short")  # the rest waits
        await keys(app, "enter")
        await painted(app)
        assert typed(app, "magnet.field") == "350 mT"
        assert screen(app)[0].endswith(" not saved") and "350 mT along c1" in screen(app)[0]
        assert any(line.startswith(" Q1      13.886") for line in screen(app))
        assert foot(app).startswith("magnet.field: ")

    use(drafted, scenario)


def test_enter_edits_the_present_text_and_escape_gives_up(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, "down", "enter")
        assert app.desk.pane.typing
        await keys(app, *" CD14", "escape")
        await painted(app)
        assert not app.desk.pane.typing and not app.session.past
        assert foot(app).startswith("magnet.elevation: ")
        await keys(app, "enter", *["backspace"] * len("correction"), *"CD14", "enter")
        assert typed(app, "magnet.elevation") == "0 ± 0.5 deg; estimate after the mount CD14"

    use(drafted, scenario)


def test_a_text_longer_than_can_be_typed_is_not_cut_by_editing_it(tmp_path: Path) -> None:
    note = "word " * 80 + "end"
    path = copied("minimal", tmp_path)
    path.write_text(path.read_text().replace("format = 1", f'format = 1\nnote = "{note}"'))

    async def scenario(app: Planner) -> None:
        app.visit("")
        await settle(app)
        assert app.desk.pane.move_to("note")
        await keys(app, "enter", "backspace", "enter")
        assert typed(app, "note") == note[:-1]

    use(path, scenario)


REFUSED_FIELDS = {
    "350 GHz": "use mT",
    "0,35 T": "0,35 T",
    "abc": "does not read as a number",
    "-1 T": "out of range",
    "9**9 T": "is not a unit of field",
    "": "is required",
    "nan T": "nan",
    "1 T" + " " * 90 + "x": "characters",
}


def test_a_refused_text_stays_to_be_mended_and_the_message_says_how(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        for text, part in REFUSED_FIELDS.items():
            await keys(app, "enter", *["backspace"] * len("420 mT"))
            await paste(app, text)
            while_typing = foot(app)
            await keys(app, "tab")
            await painted(app)
            assert app.desk.pane.typing and app.desk.stop == "magnet" and not app.session.past
            assert foot(app) == while_typing and part in foot(app)
            await keys(app, "escape")
        await keys(app, *"350", "enter")
        assert typed(app, "magnet.field") == "350 mT"

    use(drafted, scenario)


def test_results_and_margins_are_not_typed(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, "shift+tab", "5")
        assert app.desk.stop == "margins" and foot(app) == NOT_TYPED
        await keys(app, "shift+tab", "right", "5")
        assert app.desk.stop == "qubit" and foot(app) == NOT_TYPED
        assert not app.session.past

    use(drafted, scenario)


def test_up_down_and_tab_take_the_text_and_go_on(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, "down", "down", *"5 deg", "up")
        assert app.desk.pane.cursor_key == "magnet.elevation"
        await keys(app, *"1 deg", "down")
        assert app.desk.pane.cursor_key == "magnet.azimuth"
        await keys(app, *"6 deg", "tab")
        assert app.desk.stop == "coil"
        assert [typed(app, f"magnet.{name}") for name in ("azimuth", "elevation")] == ["6 deg", "1 deg"]
        assert len(app.session.past) == 3

    use(drafted, scenario)


def test_an_empty_text_brings_the_default_back(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        app.desk.pane.move_to("magnet.mode")
        await keys(app, "enter", *["backspace"] * len("persistent"))
        assert foot(app).startswith("removed")
        await keys(app, "enter")
        await painted(app)
        assert typed(app, "magnet.mode") is None
        assert any(line.startswith(" mode             >driven      defau") for line in screen(app))

    use(drafted, scenario)


@pytest.mark.parametrize("pane", [pane for pane in PANES if pane in SECTIONS], ids=lambda pane: pane or "plan")
def test_every_given_of_every_pane_is_reached_with_the_arrows_and_edited(tmp_path: Path, pane: str) -> None:
    path = tmp_path / "bench.toml"
    path.write_text(text_of(BENCH))

    async def scenario(app: Planner) -> None:
        app.visit(pane)
        await settle(app)
        reached = [key async for key in walked(app, app.desk.pane)]
        assert sorted(reached) == sorted(f"{pane}.{name}" if pane else name for name in table_givens(pane))

    use(path, scenario)


async def walked(app: Planner, grid: Grid) -> Any:
    """The keys of a pane's cells by arrows and Home alone, each edited by its example."""
    for _ in range(len(grid._table.rows)):
        await keys(app, "home")
        for _ in range(2):
            key = grid.cursor_key
            if not key:
                break
            yield key
            await example_typed(app, grid, key)
            await keys(app, "right")
            if grid.cursor_key == key:
                break
        await keys(app, "home", "down")


async def example_typed(app: Planner, grid: Grid, key: str) -> None:
    before, address = app.session.plan, address_of(app.session.plan, key)
    example = address.given.example or next(iter(address.given.options), "some words")
    await paste(app, example)
    assert grid.typing
    await keys(app, "enter")
    if grid.typing:  # an example may contradict this plan; then the reason says so
        assert foot(app).strip() and app.session.plan == before
        await keys(app, "escape")
    else:
        assert app.session.plan == edited(before, address, example)


def test_every_given_of_a_qubit_is_reached_in_its_row(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        app.visit("qubit")
        await settle(app)
        await keys(app, "down", "home")
        reached = {app.desk.qubits.cursor_key}
        for _ in app.desk.qubits._table.columns:
            await keys(app, "right")
            reached.add(app.desk.qubits.cursor_key)
        assert {f"qubit.Q2.{name}" for name in table_givens("qubit")} <= reached
        app.desk.qubits.move_to("qubit.Q2.valley_splitting")
        await keys(app, *"90", "enter")
        assert typed(app, "qubit.Q2.valley_splitting") == "90 ueV"

    use(drafted, scenario)


def test_panes_cover_all_tables_of_givens() -> None:
    assert {*SECTIONS, *ROWS} == {*desk.STOPS} - {"margins"}


# -- undo, redo, and what they show


@pytest.mark.parametrize(("undo", "redo"), [(("space", "u"), ("space", "r")), (("ctrl+z",), ("ctrl+y",))])
def test_undo_and_redo_bring_plan_and_screen_back(drafted: Path, undo: tuple[str, ...], redo: tuple[str, ...]) -> None:
    async def scenario(app: Planner) -> None:
        await painted(app)
        before = screen(app)
        await keys(app, *"350", "enter", "enter", "backspace", "backspace", "backspace", "backspace", *"1 mT", "enter")
        assert typed(app, "magnet.field") == "351 mT"
        await keys(app, *undo, *undo)
        await done(app)
        assert screen(app) == before  # undone to the file: saved again
        await keys(app, *undo)
        assert app.session.plan == app.session.document.plan
        await keys(app, *redo)
        assert typed(app, "magnet.field") == "350 mT"
        await keys(app, *redo, *redo)
        assert typed(app, "magnet.field") == "351 mT"

    use(drafted, scenario)


@pytest.mark.parametrize("elsewhere", ["shift+tab", "shift+tab shift+tab"], ids=["margins", "qubits"])
def test_givens_in_view_follow_an_undo_from_another_pane(drafted: Path, elsewhere: str) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter", *elsewhere.split(), "space", "u")
        await painted(app)
        pane = "\n".join(screen(app)[4:])
        assert "420 mT" in pane and "350 mT" not in pane

    use(drafted, scenario, size=(140, 45))


def test_a_text_being_typed_outlives_an_undo(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter", "down", *"3", "ctrl+z", *" deg", "enter")
        assert (typed(app, "magnet.field"), typed(app, "magnet.elevation")) == ("420 mT", "3 deg")

    use(drafted, scenario)


# -- what is repainted and computed


def test_an_edit_repaints_only_the_cells_that_changed(drafted: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[tuple[str | None, tuple[Region, ...]]] = []
    refresh = Grid.refresh

    def noted(grid: Grid, *regions: Region, **options: Any) -> Any:
        asked.append((grid.id, regions))
        return refresh(grid, *regions, **options)

    async def scenario(app: Planner) -> None:
        await paste(app, "350 mT")
        before = qubit_table(app.evaluation)
        monkeypatch.setattr(Grid, "refresh", noted)
        await keys(app, "enter")
        await done(app)
        monkeypatch.setattr(Grid, "refresh", refresh)
        after, grid = qubit_table(app.evaluation), app.desk.qubits
        changed = {
            Region(span.x, grid._above + row, span.width, 1)
            for row in range(6)
            for span in grid._spans()
            if before.rows[row][span.column] != after.rows[row][span.column]
        }
        assert {region for id_, regions in asked if id_ == "qubits" for region in regions} == changed
        assert 0 < len(changed) < 20
        assert all(regions for id_, regions in asked if id_ in {"qubits", "pane"})

    use(drafted, scenario)


def test_an_accepted_edit_is_one_evaluation_and_a_move_none(drafted: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    plans: list[Any] = []
    evaluate = editor.evaluate
    monkeypatch.setattr(editor, "evaluate", lambda plan: (plans.append(plan), evaluate(plan))[1])

    async def scenario(app: Planner) -> None:
        plans.clear()
        await keys(app, "down", "up", "tab", "shift+tab", *"350", "enter")
        await done(app)
        assert plans == [app.session.plan]

    use(drafted, scenario)


def test_a_thousand_qubits_are_edited_like_six(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "thousand.toml"
    rows = (f'[[qubit]]\nname = "N{row}"\nlocal_field = "{row / 10}, 0, 0 mT"\n' for row in range(999))
    shared = {key.replace("qubit.Q1", "all_qubits"): value for key, value in BENCH.items()}
    path.write_text(text_of({**shared, "qubit.Q1.role": "use"}) + "\n" + "\n".join(rows))
    painted_lines: list[int] = []
    render_line = Grid.render_line
    monkeypatch.setattr(Grid, "render_line", lambda grid, y: (painted_lines.append(y), render_line(grid, y))[1])

    async def scenario(app: Planner) -> None:
        await paste(app, "350 mT")
        painted_lines.clear()
        await keys(app, "enter")
        await done(app)
        assert len(painted_lines) < 100  # the lines in view, not the rows of the plan
        app.visit("qubit")
        await settle(app)
        app.desk.qubits.move_to("qubit.N990.name")
        await keys(app, "pagedown", "pagedown", "right")
        await painted(app)
        assert app.desk.qubits.cursor_key == "larmor.frequency@N998"
        assert any(line.startswith(" N998 >") for line in screen(app))

    use(path, scenario)


# -- saving and leaving


@pytest.mark.parametrize("save", [("space", "s"), ("ctrl+s",)])
def test_saving_changes_the_one_line(drafted: Path, save: tuple[str, ...]) -> None:
    before = drafted.read_bytes()

    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter", *save)
        await painted(app)
        assert screen(app)[0].endswith(" saved") and not screen(app)[0].endswith("not saved")
        assert foot(app).startswith("saved ")
        await keys(app, "space", "u")
        await painted(app)
        assert screen(app)[0].endswith("not saved")

    use(drafted, scenario)
    assert changed_lines(before, drafted.read_bytes()) == ['-field = "420 mT"', '+field = "350 mT"']


def test_saving_under_another_name_goes_on_with_that_file(drafted: Path) -> None:
    before = drafted.read_bytes()
    other = drafted.with_name("other plan.toml")

    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter", "space", "f")
        await retype(app, str(other))
        await painted(app)
        assert app.session.path == other and app.session.saved
        await keys(app, *"360", "enter", "ctrl+s")

    use(drafted, scenario)
    assert drafted.read_bytes() == before
    assert changed_lines(before, other.read_bytes()) == ['-field = "420 mT"', '+field = "360 mT"']


@pytest.mark.parametrize(("name", "part"), [("", "needs a name"), ("no/such/folder/x.toml", "Not saved")])
def test_a_name_that_can_not_be_written_loses_nothing(drafted: Path, name: str, part: str) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter", "space", "f")
        await retype(app, name and str(drafted.parent / name))
        await painted(app)
        assert part in foot(app) and not app.session.saved
        await keys(app, "escape")
        assert typed(app, "magnet.field") == "350 mT"

    use(drafted, scenario)


def test_a_file_changed_on_disk_is_overwritten_only_on_demand(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter")
        drafted.write_text("# of someone else\n" + drafted.read_text())
        others = drafted.read_bytes()
        await act(app, "s")
        await painted(app)
        assert "not the file that was loaded" in foot(app) and screen(app)[-1].startswith(
            "f save under another name  o overwrite"
        )
        await keys(app, "escape")
        assert drafted.read_bytes() == others and not app.session.saved
        await keys(app, "space", "s", "o")
        assert app.session.saved and b"someone else" not in drafted.read_bytes()

    use(drafted, scenario)


def test_a_file_changed_on_disk_is_left_alone_under_another_name(drafted: Path) -> None:
    mine = drafted.with_name("mine.toml")

    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter")
        drafted.write_text("# of someone else\n" + drafted.read_text())
        await keys(app, "space", "s", "f")
        await retype(app, str(mine))
        assert app.session.path == mine and app.session.saved

    use(drafted, scenario)
    assert drafted.read_text().startswith("# of someone else")
    assert load(mine).plan != load(drafted).plan


def test_an_existing_file_is_not_written_over_by_another_name(drafted: Path) -> None:
    other = copied("minimal", drafted.parent)
    before = other.read_bytes()

    async def scenario(app: Planner) -> None:
        await act(app, "f")
        await retype(app, str(other))
        await painted(app)
        assert "exists already" in foot(app)
        await keys(app, "escape")

    use(drafted, scenario)
    assert other.read_bytes() == before


@pytest.fixture
def left(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[bool]]:
    """Whether the plan was saved, for each time the editor is told to end."""
    found: list[bool] = []
    monkeypatch.setattr(Planner, "exit", lambda app, *_a, **_k: found.append(app.session.saved))
    yield found
    monkeypatch.undo()


def test_leaving_asks_only_with_work_that_is_not_saved(drafted: Path, left: list[bool]) -> None:
    before = drafted.read_bytes()

    async def scenario(app: Planner) -> None:
        await act(app, "l")
        assert left == [True]
        await keys(app, *"350", "enter", "space", "l")
        assert left == [True] and foot(app) == "The plan is not saved."
        await keys(app, "escape", "ctrl+c", "d")
        assert left == [True, False] and drafted.read_bytes() == before
        await keys(app, "space", "l", "s")
        assert left == [True, False, True] and drafted.read_bytes() != before

    use(drafted, scenario)


def test_leaving_waits_where_saving_has_trouble(drafted: Path, left: list[bool]) -> None:
    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter")
        drafted.unlink()
        await keys(app, "space", "l", "s")
        assert left == [] and "not the file that was loaded" in foot(app)
        await keys(app, "o")
        assert left == [True] and drafted.exists()

    use(drafted, scenario)


def test_a_file_that_can_not_be_changed_by_lines_is_rewritten_only_after_a_word(tmp_path: Path) -> None:
    path = tmp_path / "dotted.toml"
    path.write_text(
        '# kept?\nformat = 1\nmagnet = { field = "500 mT" }\nchip.material = "si-sige-natural"\nworkload.gates = 100\n'
        'qubit = [{ name = "Q1", g = 2.0 }]\n'
    )

    async def scenario(app: Planner) -> None:
        await keys(app, *"350", "enter", "space", "s")
        await painted(app)
        assert "loses its comments" in foot(app) and "# kept?" in path.read_text()
        await keys(app, "w")
        assert app.session.saved

    use(path, scenario)
    assert load(path).plan.magnet.field is not None and 'field = "350 mT"' in path.read_text()


# -- untrusted text


def test_names_notes_and_origins_are_literal(tmp_path: Path) -> None:
    path = copied("minimal", tmp_path)
    text = path.read_text().replace(
        "format = 1", 'format = 1\ndevice = "[red]D[/]\\u001b]0;x\\u0007"\nnote = "a[/b]c \\u202e"'
    )
    text = text.replace('"500 mT"', '"500 mT; [b]m\\u001b[31m"').replace('"Q1"', '"[b]Q[/b]"')
    path.write_text(text)

    async def scenario(app: Planner) -> None:
        shown = screen(app)
        assert shown[0].startswith("[red]D[/]\ufffd]0;x\ufffd")
        assert any(line.startswith(" [b]Q[/b]") for line in shown)
        assert any("[b]m\ufffd[31m" in line for line in shown)
        await keys(app, "shift+tab", "shift+tab")
        assert "qubit.[b]Q[/b].name: " in foot(app)
        app.visit("")
        await painted(app)
        assert any("a[/b]c \ufffd" in line for line in screen(app))
        assert all(line.isprintable() for line in [*shown, *screen(app)])
        app.visit("magnet")
        await keys(app, "enter")
        await painted(app)
        assert any("[b]m\ufffd[31m" in line for line in screen(app)) and all(line.isprintable() for line in screen(app))

    use(path, scenario, size=(140, 30))


def test_lines_that_do_not_count_are_said_on_opening(minimal: Path) -> None:
    minimal.write_text(minimal.read_text().replace("[chip]", "[chip]\nmateriel = 1"))

    async def scenario(app: Planner) -> None:
        assert "materiel" in foot(app) and "does not count" in foot(app)

    use(minimal, scenario, size=(160, 24))
