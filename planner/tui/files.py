"""Saving and leaving: what is asked when a file changed on disk, exists already, or can't be written."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from planner import session as sessions
from planner.durable import ReadError, SaveError
from planner.planfile import ChangedOnDisk, text_of
from planner.tui.editor import Editor


def save(app: Editor, then: Callable[[], None] = lambda: None) -> None:
    """Save under the present name; asks first where comments would be lost. `then` follows when it is saved."""
    _, in_house_form = text_of(app.session.document, app.session.plan)
    if in_house_form:
        app.foot.ask(
            "This file can't be changed line by line: writing it anew loses its comments.",
            "w write it anew",
            {"w": lambda: write(app, app.session.path, then)},
        )
    else:
        write(app, app.session.path, then)


def save_as(app: Editor, then: Callable[[], None] = lambda: None) -> None:
    """Ask for a name and save there."""
    app.foot.prompt("save as", str(app.session.path), lambda text: _to_name(app, text, then))


def leave(app: Editor) -> None:
    """End the editor; with edits that are not saved, ask first."""
    if app.session.saved:
        app.exit()
    else:
        app.foot.ask(
            "The plan is not saved.",
            "s save and leave  d drop the edits and leave",
            {"s": lambda: save(app, app.exit), "d": app.exit},
        )


def write(app: Editor, path: Path, then: Callable[[], None], *, overwrite: bool = False) -> None:
    """Write the plan; on any trouble ask what to do, with the plan still in memory."""
    try:
        app.take(sessions.saved(app.session, path, overwrite=overwrite))
    except ChangedOnDisk as trouble:
        app.foot.ask(
            f"{trouble}.",
            "f save under another name  o overwrite it",
            {"f": lambda: save_as(app, then), "o": lambda: write(app, path, then, overwrite=True)},
        )
    except (SaveError, ReadError) as trouble:
        app.foot.ask(f"Not saved. {trouble}", "f save under another name", {"f": lambda: save_as(app, then)})
    else:
        app.foot.say(f"saved {path}")
        then()


def _to_name(app: Editor, text: str, then: Callable[[], None]) -> None:
    name = text.strip()
    if not name or "\0" in name:
        app.foot.say("Not saved: a file needs a name.", bad=True)
        return
    write(app, Path(name).expanduser(), then)
