"""Adding and removing qubits: what is asked and said around these two edits."""

from __future__ import annotations

from planner import session as sessions
from planner.tui.editor import Editor
from planner.views.editing import NOT_ON_A_QUBIT


def add(app: Editor) -> None:
    """Ask for a name and add a qubit below the one under the cursor, as its copy."""
    row, plan = app.desk.qubits.cursor_row, app.session.plan
    app.foot.prompt(
        f"name of the new qubit, a copy of {plan.qubit[row].name}",
        sessions.free_name(plan),
        lambda name: _added(app, name, row),
    )


def _added(app: Editor, name: str, row: int) -> None:
    """Add the qubit and go to it."""
    if app.attempt(lambda: sessions.with_qubit(app.session, name, row)):
        app.visit("qubits")
        app.desk.qubits.move_to(f"qubit.{app.session.plan.qubit[row + 1].name}.name")


def drop(app: Editor) -> None:
    """Remove the qubit under the cursor, where that can be seen."""
    if app.desk.stop != "qubits":
        app.foot.say(NOT_ON_A_QUBIT, bad=True)
        return
    row = app.desk.qubits.cursor_row
    name = app.session.plan.qubit[row].name
    if app.attempt(lambda: sessions.without_qubit(app.session, row)):
        app.news = f"removed {name}; Space u brings it back"
