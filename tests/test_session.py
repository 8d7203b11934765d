"""A plan being edited: every accepted edit is one step, what is refused is none, and what is saved is said to be."""

from __future__ import annotations

from dataclasses import FrozenInstanceError, replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner import session as sessions
from planner.kinds import Quantity
from planner.plan import Address, Plan, address_of, stated
from planner.planfile import ChangedOnDisk, Document, load
from planner.session import Session, opened, redone, saved, typed, undone, with_row, without_row
from planner.values import GivenError
from tests.planmaking import BENCH, Entry, plan_of, second, text_of


def session_of(changes: dict[str, Entry] | None = None) -> Session:
    return opened(Document(None, "", plan_of(changes)))


def after(session: Session, key: str, text: str) -> Session:
    return typed(session, address_of(session.plan, key), text)


def text(session: Session, key: str) -> str | None:
    """What is typed at a key."""
    value = stated(session.plan, address_of(session.plan, key))
    return value.text if isinstance(value, Quantity) else value


FIELD = "magnet.field"


# -- typing


def test_an_opened_session_is_saved_and_has_no_steps() -> None:
    session = session_of()
    assert (session.saved, session.past, session.future) == (True, (), ())
    assert undone(session) is session
    assert redone(session) is session


@pytest.mark.parametrize(("key", "typing", "stands"), [
    (FIELD, "350", "350 mT"),  # its cell shows 500 mT
    (FIELD, "0.35 T; measured", "0.35 T; measured"),
    (FIELD, "350 ± 2", "350 ± 2 mT"),
    (FIELD, "350 ± 1 %", "350 mT ± 1 %"),
    (FIELD, "  350 mT ", "350 mT"),
    ("magnet.since_ramp", "5", "5 h"),  # an empty cell shows the unit of the given's example
    ("magnet.noise_driven", "1, 2, 3; guess", "1, 2, 3 uT; guess"),  # the default is 1 uT
    ("qubit.Q1.g", "1.98", "1.98"),
    ("workload.gates", "1e6", "1000000"),
    ("device", " SQ6 ", "SQ6"),
    ("closing_date", "2027-02-01", "2027-02-01"),
])  # fmt: skip
def test_a_bare_number_gets_the_unit_of_its_cell(key: str, typing: str, stands: str) -> None:
    assert text(after(session_of(), key, typing), key) == stands


def test_an_empty_text_takes_a_given_out() -> None:
    session = after(session_of(), "magnet.rating", "  ")
    assert text(session, "magnet.rating") is None
    assert session.past == (session_of().plan,)


def test_a_g_may_be_taken_out_where_all_qubits_have_one() -> None:
    assert text(after(session_of({"all_qubits.g": 2.0}), "qubit.Q1.g", ""), "qubit.Q1.g") is None
    with pytest.raises(GivenError, match=r"qubit\.Q1\.g: is required: g-factor"):
        after(session_of(), "qubit.Q1.g", "")


@pytest.mark.parametrize(("key", "typing"), [
    (FIELD, "0"), (FIELD, ""), (FIELD, "5 MHz"), ("workload.gates", "0"), ("qubit.Q1.name", "a.b"), ("qubit.Q1.role",
        "dead"),
    ("source.low", "20 GHz"), ("workload.gate_time", "1 ns"),
])  # fmt: skip
def test_what_is_refused_changes_nothing(key: str, typing: str) -> None:
    session = after(session_of(), FIELD, "1 T")
    before = replace(session)
    with pytest.raises(GivenError):
        after(session, key, typing)
    assert session == before


def test_a_session_can_not_be_changed_in_place() -> None:
    with pytest.raises(FrozenInstanceError):
        session_of().plan = Plan()  # type: ignore[misc]


# -- steps


def test_every_edit_is_one_step_back_and_forth() -> None:
    first = session_of()
    second_ = after(first, FIELD, "1 T")
    third = after(second_, FIELD, "2 T")
    assert (text(third, FIELD), third.past) == ("2 T", (first.plan, second_.plan))
    assert undone(third).plan is second_.plan
    assert undone(undone(third)).plan is first.plan
    assert undone(undone(undone(third))).plan is first.plan
    assert redone(redone(undone(undone(third)))) == third


def test_a_new_edit_drops_what_was_taken_back() -> None:
    session = after(undone(after(session_of(), FIELD, "1 T")), FIELD, "2 T")
    assert session.future == ()
    assert redone(session) is session


def test_the_same_value_is_no_step() -> None:
    session = session_of()
    assert after(session, FIELD, "500 mT") is session
    assert after(session, "magnet.since_ramp", "") is session
    undone_once = undone(after(session, FIELD, "1 T"))
    assert after(undone_once, FIELD, "500") is undone_once  # what was taken back can still be made again


EDITS = st.one_of(
    st.sampled_from(["undo", "redo"]),
    st.tuples(st.sampled_from([FIELD, "magnet.rating"]), st.sampled_from(["300", "1 T", "0", "", "2 T"])),
)


@given(st.lists(EDITS, max_size=20))
@settings(max_examples=60, deadline=None)
def test_steps_are_those_of_a_list_with_a_place_in_it(edits: list[str | tuple[str, str]]) -> None:
    """The history by its plainest model: all plans of the present line and the place of the one shown."""
    session = session_of()
    plans, place = [session.plan], 0
    for edit in edits:
        if isinstance(edit, str):
            session = undone(session) if edit == "undo" else redone(session)
            place = max(0, place - 1) if edit == "undo" else min(len(plans) - 1, place + 1)
        else:
            try:
                session = after(session, *edit)
            except GivenError:
                continue
            if session.plan != plans[place]:
                plans, place = [*plans[: place + 1], session.plan], place + 1
        assert session.plan == plans[place]
        assert (*session.past, session.plan, *session.future) == tuple(plans)


# -- rows


def test_a_new_qubit_is_a_copy_of_the_one_above() -> None:
    session = with_row(session_of({**second()}), "qubit", 0, " left ")
    first, new, last = session.plan.qubit
    assert (first.name, new.name, last.name) == ("Q1", "left", "Q2")
    assert replace(new, name="Q1") == first
    assert undone(session).plan == plan_of({**second()})


@pytest.mark.parametrize(("name", "sentence"), [
    ("Q1", "the name 'Q1' is used twice"), ("", "'' can't be a name"), ("a=b", "'a=b' can't be a name"),
    ("a\x1b", "'a\ufffd' can't be a name"), ("Q" * 501, "the text has 501 characters"),
])  # fmt: skip
def test_a_new_qubit_needs_a_name_of_its_own(name: str, sentence: str) -> None:
    session = session_of()
    with pytest.raises(GivenError, match=sentence.replace("(", r"\(")):
        with_row(session, "qubit", 0, name)
    assert session == session_of()


def test_a_qubit_is_removed_but_not_the_last_in_use() -> None:
    session = without_row(session_of({**second(), **second("Q3", role="spare")}), "qubit", 0)
    assert [row.name for row in session.plan.qubit] == ["Q2", "Q3"]
    with pytest.raises(GivenError, match="no qubit is in use"):
        without_row(session, "qubit", 0)
    alone = session_of()
    with pytest.raises(GivenError, match="at least one"):
        without_row(alone, "qubit", 0)


# -- saving


@pytest.fixture
def path(tmp_path: Path) -> Path:
    path = tmp_path / "plan.toml"
    path.write_text(text_of(BENCH), encoding="utf-8")
    return path


def test_saved_follows_the_plan_and_the_file(path: Path) -> None:
    session = after(opened(load(path)), FIELD, "1 T")
    assert not session.saved
    assert undone(session).saved
    written = saved(session, path)
    assert (written.saved, written.path) == (True, path)
    assert (written.plan, written.past) == (session.plan, session.past)
    assert load(path).plan == session.plan
    assert not undone(written).saved  # the file holds the later plan
    assert saved(undone(written), path).saved
    assert path.read_text(encoding="utf-8") == text_of(BENCH).replace("'500 mT'", '"500 mT"')  # a new value, new quotes


def test_another_name_becomes_the_present_one(path: Path) -> None:
    other = path.with_name("other.toml")
    session = saved(after(opened(load(path)), FIELD, "1 T"), other)
    assert session.path == other
    assert saved(after(session, FIELD, "2 T"), session.path).saved
    assert path.read_text(encoding="utf-8") == text_of(BENCH)


def test_what_is_not_saved_leaves_the_session_as_it_was(path: Path) -> None:
    session = after(opened(load(path)), FIELD, "1 T")
    path.write_text("# someone else's", encoding="utf-8")
    with pytest.raises(ChangedOnDisk):
        saved(session, path)
    assert not session.saved
    assert saved(session, path, overwrite=True).saved


def test_a_problem_of_several_givens_is_told_by_its_key() -> None:
    with pytest.raises(GivenError, match=r"^source\.high: '18 GHz' is not above source\.low '20 GHz'"):
        sessions.typed(session_of(), Address("source", None, "low"), "20")
