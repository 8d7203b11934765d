"""Adding and removing qubits: what is asked and said around these two edits."""

from __future__ import annotations

from typing import TYPE_CHECKING

from planner import session as sessions
from planner.views.editing import NOT_ON_A_QUBIT

if TYPE_CHECKING:
    from planner.tui.app import Planner


def add(app: Planner) -> None:
    """Ask for a name and add a qubit below the one under the cursor, as its copy."""
    row, plan = app.qubits.cursor_row, app.session.plan
    app.foot.prompt(
        f"name of the new qubit, a copy of {plan.qubit[row].name}",
        sessions.free_name(plan),
        lambda name: _added(app, name, row),
    )


def _added(app: Planner, name: str, row: int) -> None:
    """Add the qubit and go to it."""
    if app.attempt(lambda: sessions.with_qubit(app.session, name, row)):
        app.visit("qubits")
        app.qubits.move_to(f"qubit.{app.session.plan.qubit[row + 1].name}.name")


def drop(app: Planner) -> None:
    """Remove the qubit under the cursor, where that can be seen."""
    if app.stop != "qubits":
        app.foot.say(NOT_ON_A_QUBIT, bad=True)
        return
    row = app.qubits.cursor_row
    name = app.session.plan.qubit[row].name
    if app.attempt(lambda: sessions.without_qubit(app.session, row)):
        app.news = f"removed {name}; Space u brings it back"
