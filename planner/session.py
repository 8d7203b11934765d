"""A plan being edited: frozen; every accepted edit makes a new session with one more step to undo."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

from planner import planfile, records
from planner.plan import Address, Plan, unit_shown
from planner.planfile import Document
from planner.soundness import edited, refuse_new_problems


@dataclass(frozen=True, slots=True)
class Session:
    """The plan now, the plans before and after it, and the document it was read from or last saved to."""

    document: Document
    plan: Plan
    past: tuple[Plan, ...] = ()
    future: tuple[Plan, ...] = ()

    @property
    def saved(self) -> bool:
        """Whether the file holds this plan."""
        return self.plan == self.document.plan

    @property
    def path(self) -> Path:
        """Where the plan is saved."""
        assert self.document.path is not None
        return self.document.path


def opened(document: Document) -> Session:
    """A session on a document as it was read."""
    return Session(document, document.plan)


def typed(session: Session, address: Address, text: str) -> Session:
    """The session after a given was typed; a bare number gets the unit that its cell shows. Raises GivenError."""
    return changed(session, edited(session.plan, address, text, assume=unit_shown(session.plan, address)))


def changed(session: Session, plan: Plan) -> Session:
    """The session with another plan; the same plan makes no step."""
    if plan == session.plan:
        return session
    return replace(session, plan=plan, past=(*session.past, session.plan), future=())


def undone(session: Session) -> Session:
    """One step back; the same session where there is none."""
    if not session.past:
        return session
    return replace(session, plan=session.past[-1], past=session.past[:-1], future=(session.plan, *session.future))


def redone(session: Session) -> Session:
    """One step forward again; the same session where there is none."""
    if not session.future:
        return session
    return replace(session, plan=session.future[0], past=(*session.past, session.plan), future=session.future[1:])


def with_row(session: Session, table: str, after: int, name: str = "") -> Session:
    """The session with one more record of a table, behind row `after`; see `records.with_row`. Raises GivenError."""
    return _checked(session, records.with_row(session.plan, table, after, name))


def without_row(session: Session, table: str, index: int) -> Session:
    """The session without one record. Raises GivenError where another rests on it."""
    return _checked(session, records.without_row(session.plan, table, index))


def saved(session: Session, path: Path, *, overwrite: bool = False) -> Session:
    """The session after writing the plan to `path`. Raises as `planfile.save`."""
    return replace(session, document=planfile.save(session.document, session.plan, path, overwrite=overwrite))


def _checked(session: Session, plan: Plan) -> Session:
    refuse_new_problems(session.plan, plan)
    return changed(session, plan)
