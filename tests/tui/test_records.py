"""Panes of records: what they show, rows that come and go, and what is saved of them."""

# ruff: noqa: ASYNC240 - nothing else waits while a test looks at its own small files

from __future__ import annotations

from pathlib import Path

import pytest

from planner import session as sessions
from planner.plan import ROWS, table_givens
from planner.planfile import load
from planner.tui.app import Planner
from planner.views.editing import NOT_ON_A_ROW, NOTHING_TO_EXPLAIN, READING
from planner.views.tables import pane_title

from .harness import keys, painted, paste, settle
from .inprocess import act, changed_lines, copied, done, foot, retype, screen, typed, use

# -- qubits come and go


def test_a_qubit_is_added_as_a_copy_below_the_cursor(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        app.visit("qubit")
        await settle(app)
        await keys(app, "down", "space", "n")
        await painted(app)
        assert screen(app)[-3].startswith("name of the new qubit, a copy of Q2: Q7")
        await keys(app, "enter")
        await done(app)
        assert [row.name for row in app.session.plan.qubit] == ["Q1", "Q2", "Q7", "Q3", "Q4", "Q5", "Q6"]
        assert app.desk.qubits.cursor_key == "qubit.Q7.name" and app.desk.qubits.has_focus
        assert typed(app, "qubit.Q7.valley_splitting") == typed(app, "qubit.Q2.valley_splitting")

    use(drafted, scenario)


@pytest.mark.parametrize(("name", "part"), [("Q1", "twice"), ("a.b", "can't be a name"), ("  ", "name")])
def test_a_name_that_can_not_be_is_refused(drafted: Path, name: str, part: str) -> None:
    async def scenario(app: Planner) -> None:
        await act(app, "n")
        await retype(app, name)
        await painted(app)
        assert part in foot(app)
        assert not app.session.past

    use(drafted, scenario)


def test_a_prompt_can_be_given_up_and_takes_no_control_characters(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await act(app, "n")
        await paste(app, "\x1b[31m\nred")
        await painted(app)
        assert "Q7\ufffd[31m red" in screen(app)[-3] and "\x1b" not in "".join(screen(app))
        await keys(app, "escape")
        assert not app.session.past and app.focused is app.desk.pane

    use(drafted, scenario)


def test_a_qubit_is_removed_under_the_cursor_and_brought_back(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        app.visit("qubit")
        await settle(app)
        await keys(app, "down", "down", "space", "x")
        await done(app)
        assert [row.name for row in app.session.plan.qubit] == ["Q1", "Q2", "Q4", "Q5", "Q6"]
        assert foot(app) == "removed Q3; Space u brings it back"
        await act(app, "u")
        assert app.session.plan == app.session.document.plan
        await keys(app, "down")
        assert not foot(app).startswith("removed")

    use(drafted, scenario)


def test_no_qubit_is_removed_while_the_cursor_is_elsewhere_nor_the_last(minimal: Path) -> None:
    async def scenario(app: Planner) -> None:
        await act(app, "x")
        assert foot(app) == NOT_ON_A_ROW
        app.visit("qubit")
        await settle(app)
        await act(app, "x")
        assert "at least one" in foot(app)
        assert len(app.session.plan.qubit) == 1

    use(minimal, scenario)


# -- other records


@pytest.fixture
def full(tmp_path: Path) -> Path:
    """A plan with every kind of record but pairs."""
    return copied("sq6-03", tmp_path)


def titles(app: Planner) -> list[str]:
    """The titles of the panes that are shown."""
    return [line for line in screen(app) if line.startswith("-- ")]


def told(app: Planner) -> str:
    """The explanation that is shown, unfolded."""
    return " ".join(line.strip() for line in app.desk.reader._folded)


async def visit(app: Planner, stop: str) -> None:
    app.visit(stop)
    await painted(app)


@pytest.mark.parametrize("table", [table for table in ROWS if table not in {"qubit", "pair"}])
def test_a_pane_shows_all_records_and_every_given_is_reached(full: Path, table: str) -> None:
    async def scenario(app: Planner) -> None:
        await visit(app, table)
        assert f"-- {pane_title(table)} " in "\n".join(screen(app))
        reached = set()
        for _ in app.session.plan.rows(table):
            await keys(app, "home")
            reached.add(app.desk.pane.cursor_key)
            for _ in app.desk.pane._table.columns:
                await keys(app, "right")
                reached.add(app.desk.pane.cursor_key)
            await keys(app, "down")
        rows = [getattr(row, "name", str(place + 1)) for place, row in enumerate(app.session.plan.rows(table))]
        assert {f"{table}.{row}.{name}" for row in rows for name in table_givens(table)} <= reached

    use(full, scenario)


def test_results_stand_beside_the_givens_and_follow_an_edit(full: Path) -> None:
    """350 mT through 70 mT/A are 5 A, 140 mT/A would be 2.5 A."""

    async def scenario(app: Planner) -> None:
        await visit(app, "coil")
        assert any(line.split()[:3] in (["z", "350", "5.00"], [">z", "350", "5.00"]) for line in screen(app))
        assert app.desk.pane.move_to("coil.z.field_per_current")
        await keys(app, *"140", "enter")
        await painted(app)
        assert typed(app, "coil.z.field_per_current") == "140 mT/A"
        assert any(line.split()[:3] == ["z", "350", "2.50"] for line in screen(app))
        app.desk.pane.move_to("coil.current@z")
        await settle(app)
        assert foot(app).startswith("coil.current: ")

    use(full, scenario)


@pytest.mark.parametrize("table", [table for table in ROWS if table != "qubit"])
def test_an_empty_pane_says_how_to_add_a_row_and_its_first_row_is_sound(drafted: Path, table: str) -> None:
    async def scenario(app: Planner) -> None:
        for _ in app.session.plan.rows(table):
            app.take(app_without(app, table))
        await visit(app, table)
        before = app.session
        assert f">no {pane_title(table)}: Space n adds a row" in screen(app)
        await keys(app, "5")
        assert app.session is before
        await act(app, "x")
        assert foot(app) == NOT_ON_A_ROW
        await act(app, "n")
        if table != "phase_noise":
            await keys(app, "enter")
        await painted(app)
        (row,) = app.session.plan.rows(table)
        assert getattr(row, "name", None) == (None if table == "phase_noise" else f"{table}1")
        assert app.desk.stop == table and app.desk.pane.cursor_key.startswith(f"{table}.") and app.desk.pane.has_focus
        await keys(app, "ctrl+s")
        assert load(drafted).plan == app.session.plan
        assert f"\n[[{table}]]\n" in drafted.read_text()
        await keys(app, "ctrl+z", "ctrl+s")
        assert f"[[{table}]]" not in drafted.read_text()

    use(drafted, scenario)


def app_without(app: Planner, table: str) -> sessions.Session:
    return sessions.without_row(app.session, table, 0)


def test_a_record_is_added_below_the_cursor_and_saved_as_a_block(full: Path) -> None:
    before = full.read_bytes()

    async def scenario(app: Planner) -> None:
        await visit(app, "part")
        await act(app, "n")
        await painted(app)
        assert screen(app)[-3].startswith("name of the new part, a copy of readout inductor: part1")
        await retype(app, "solder")
        await done(app)
        assert [row.name for row in app.session.plan.part] == ["readout inductor", "solder", "bond wires"]
        assert app.desk.pane.cursor_key == "part.solder.name"
        await keys(app, "ctrl+s")

    use(full, scenario)
    assert sorted(changed_lines(before, full.read_bytes())) == [
        "+", "+[[part]]", '+critical_in_plane = "2.0 T; estimate"', '+critical_normal = "0.10 T; estimate"',
        '+must = "superconduct"', '+name = "solder"',
    ]  # fmt: skip


def test_records_without_names_come_and_go_without_a_question(full: Path) -> None:
    before = full.read_bytes()

    async def scenario(app: Planner) -> None:
        await visit(app, "phase_noise")
        await keys(app, "down", "space", "n")
        await painted(app)
        assert [row.offset.text for row in app.session.plan.phase_noise][:4] == ["100 Hz", "1 kHz", "1 kHz", "10 kHz"]
        assert app.desk.pane.cursor_key == "phase_noise.3.offset"
        await paste(app, "3 kHz")
        await keys(app, "enter", "space", "x")
        await painted(app)
        assert foot(app) == "removed row 3; Space u brings it back"
        await keys(app, "down")
        assert not foot(app).startswith("removed")
        await keys(app, "ctrl+s")
        assert app.session.saved

    use(full, scenario)
    assert full.read_bytes() == before


def test_the_last_row_of_a_pane_may_go_and_comes_back(full: Path) -> None:
    async def scenario(app: Planner) -> None:
        await visit(app, "part")
        await keys(app, "space", "x", "space", "x")
        await painted(app)
        assert foot(app) == "removed bond wires; Space u brings it back" and app.session.plan.part == ()
        await keys(app, "space", "u", "space", "u")
        await painted(app)
        assert app.session.plan == app.session.document.plan and app.desk.pane.cursor_key.startswith("part.")

    use(full, scenario)


def test_a_stage_takes_its_attenuators_along(full: Path) -> None:
    async def scenario(app: Planner) -> None:
        await visit(app, "stage")
        await keys(app, "down", "space", "n", "enter")
        assert typed(app, "line.readout.attenuation") == "0, 20, 0, 0, 10, 10 dB"
        await keys(app, "space", "u", "up", "space", "x")
        assert typed(app, "line.readout.attenuation") == "0, 0, 10, 10 dB"

    use(full, scenario)


# -- the explanation


@pytest.mark.parametrize("size", [(80, 24), (140, 45), (60, 16)])
@pytest.mark.parametrize(
    ("stop", "key", "title"),
    [
        ("magnet", "magnet.field", "magnet.field"),
        ("qubit", "larmor.frequency@Q2", "larmor.frequency of Q2"),
        ("qubit", "margin.wait@Q3", "wait of Q3"),
        ("qubit", "qubit.Q3.t1", "qubit.Q3.t1"),
        ("margins", "margin.valley", "valley"),
        ("margins", "margin.pair", "pair"),
        ("coil", "coil.current@z", "coil.current of z"),
        ("phase_noise", "phase_noise.2.level", "phase_noise.2.level"),
        ("line", "line.drive.attenuation", "line.drive.attenuation"),
    ],
)
def test_the_number_under_the_cursor_is_explained_until_escape(
    full: Path, stop: str, key: str, title: str, size: tuple[int, int]
) -> None:
    async def scenario(app: Planner) -> None:
        await visit(app, stop)
        assert app.desk.grid.move_to(key)
        await painted(app)
        before = titles(app)
        await act(app, "w")
        await painted(app)
        assert any(f"-- why {title} " in line for line in screen(app)) and app.focused is app.desk.reader
        assert app.desk.reader._lines and len(screen(app)) == size[1]
        await keys(app, "5")
        assert foot(app) == READING
        await keys(app, "escape")
        await painted(app)
        assert titles(app) == before and app.desk.grid.has_focus and app.desk.grid.cursor_key == key

    use(full, scenario, size=size)


def test_an_explanation_scrolls_and_says_where_it_is(full: Path) -> None:
    async def scenario(app: Planner) -> None:
        await visit(app, "qubit")
        app.desk.qubits.move_to("larmor.frequency@Q2")
        await act(app, "w")
        await painted(app)
        reader = app.desk.reader
        count, room = len(reader._folded), reader.size.height - 1
        assert count > room and f"(lines 1 to {room} of {count})" in "\n".join(screen(app))
        for key, top in (("down", 1), ("down", 2), ("up", 1), ("pagedown", room), ("home", 0), ("up", 0)):
            await keys(app, key)
            assert reader._top == min(top, count - room)
        await keys(app, "end")
        await painted(app)
        assert f"to {count} of {count})" in "\n".join(screen(app))
        assert reader._folded[-1] in "\n".join(screen(app))

    use(full, scenario)


def test_an_explanation_follows_an_edit_and_closes_where_the_number_is_gone(full: Path) -> None:
    async def scenario(app: Planner) -> None:
        await act(app, "w")
        await painted(app)
        assert "magnet.field = 350 mT" in told(app)
        await keys(app, "tab", *"351", "enter")
        await painted(app)
        assert app.desk.stop == "magnet" and "magnet.field = 351 mT" in told(app)
        await visit(app, "coil")
        app.desk.pane.move_to("coil.current@x")
        await settle(app)
        await act(app, "w")
        await keys(app, "tab")
        await act(app, "x")
        await painted(app)
        assert [row.name for row in app.session.plan.coil] == ["z", "y"]
        assert "-- why" not in "\n".join(screen(app)) and "-- margins" in "\n".join(screen(app))
        assert app.desk.pane.has_focus

    use(full, scenario, size=(140, 45))


def test_going_to_what_an_explanation_covers_closes_it(full: Path) -> None:
    async def wide(app: Planner) -> None:
        await act(app, "w")
        await visit(app, "clock")
        assert "-- why magnet.field" in "\n".join(screen(app))
        await visit(app, "margins")
        assert "-- why" not in "\n".join(screen(app)) and app.desk.margins.has_focus

    async def narrow(app: Planner) -> None:
        await act(app, "w")
        await visit(app, "qubit")
        assert "-- why magnet.field" in "\n".join(screen(app)) and app.desk.qubits.has_focus
        await visit(app, "clock")
        assert "-- why" not in "\n".join(screen(app)) and app.desk.pane.has_focus

    use(full, wide, size=(140, 45))
    use(full, narrow)


def test_where_there_is_no_number_nothing_is_explained(drafted: Path) -> None:
    async def scenario(app: Planner) -> None:
        await visit(app, "pair")
        await act(app, "w")
        await painted(app)
        assert foot(app) == NOTHING_TO_EXPLAIN and app.desk.pane.has_focus

    use(drafted, scenario)
