"""Adding and removing records: what is asked and said around these two edits."""

from __future__ import annotations

from planner import session as sessions
from planner.plan import NAMED, ROWS, Address, key_of, table_givens
from planner.records import free_name
from planner.tui.editor import Editor
from planner.views.editing import NOT_ON_A_ROW


def add(app: Editor) -> None:
    """Add a record below the one under the cursor, as its copy; asks for its name where it has one.

    In a pane without records it is a qubit.
    """
    table = app.desk.stop if app.desk.stop in ROWS else "qubit"
    rows, after = app.session.plan.rows(table), app.desk.grid_of(table).cursor_row
    if table not in NAMED:
        _add(app, table, after)
        return
    copied = f", a copy of {rows[after].name}" if rows else ""
    app.foot.prompt(
        f"name of the new {table}{copied}",
        free_name(app.session.plan, table),
        lambda name: _add(app, table, after, name),
    )


def drop(app: Editor) -> None:
    """Remove the record under the cursor, where that can be seen."""
    table, plan = app.desk.stop, app.session.plan
    if table not in ROWS or not plan.rows(table):
        app.foot.say(NOT_ON_A_ROW, bad=True)
        return
    grid = app.desk.grid_of(table)
    row, key = grid.cursor_row, grid.cursor_key
    if app.attempt(lambda: sessions.without_row(app.session, table, row)):
        said = f"removed {getattr(plan.rows(table)[row], 'name', f'row {row + 1}')}; Space u brings it back"
        app.foot.say(said)
        app.news = said if grid.cursor_key != key else ""


def _add(app: Editor, table: str, after: int, name: str = "") -> None:
    """Add the record and go to it."""
    row = after + 1 if app.session.plan.rows(table) else 0
    if app.attempt(lambda: sessions.with_row(app.session, table, after, name)):
        app.visit(table)
        app.desk.grid_of(table).move_to(key_of(app.session.plan, Address(table, row, next(iter(table_givens(table))))))
