"""The line below the grids: help on what is under the cursor, what is understood of a text being typed, and what it does."""

from __future__ import annotations

from planner.declare import Form
from planner.evaluate import Evaluation, evaluate
from planner.graph import graph
from planner.kinds import Quantity
from planner.plan import Address, UnknownKey, address_of, resolved, unit_shown
from planner.soundness import edited
from planner.values import GivenError
from planner.views.numbers import understood, without_origin
from planner.views.rows import headline, margin_line
from planner.views.why import explanation
from planner.views.words import help_line

NOT_TYPED = "results aren't typed: they follow from the givens"
NOT_ON_A_ROW = "nothing removed: go to the row of a qubit, coil or the like first, with Tab and the arrows"
NOTHING_TO_EXPLAIN = "nothing to explain here: go to a number first, with Tab and the arrows"
READING = "this is an explanation: Tab goes to what it explains, Escape closes it"
REMOVED = "removed"


def given_at(evaluation: Evaluation, key: str) -> Address | None:
    """The given with this key, None for results and margins."""
    try:
        return address_of(evaluation.plan, key)
    except UnknownKey:
        return None


def help_at(evaluation: Evaluation, key: str) -> str:
    """One line on the given, result or margin under the cursor."""
    address = given_at(evaluation, key)
    if address is not None:
        return help_line(key, address.given)
    name, _, row = key.partition("@")
    if name.startswith("margin."):
        margin = evaluation.margin(name.removeprefix("margin."))
        limit = next((limit for limit in graph().limits if f"margin.{limit.name}" == name), None)
        return (
            f"{margin_line(evaluation, margin)}. {sentence(margin.limit.meaning)}"
            if margin and not row
            else limit.meaning
            if limit
            else ""
        )
    derived = next((derived for derived in evaluation.graph.order if derived.key == name), None)
    if derived is None:
        return ""
    names = evaluation.tables[derived.per.value]
    reason = evaluation.columns[name].why.get(names.index(row)) if row in names else None
    return f"{name}: {derived.help}" + (f". Unknown: {reason}" if reason else "")


def why_at(evaluation: Evaluation, key: str, width: int) -> list[str]:
    """The explanation of the given, result or margin with this key of a cell; empty where there is no such number."""
    if given_at(evaluation, key) is not None:
        return explanation(evaluation, key, width=width)
    name, _, row = key.partition("@")
    if name.startswith("margin."):
        known = any(name == f"margin.{limit.name}" for limit in evaluation.graph.limits)
        rows = ("", *evaluation.names)
    else:
        derived = next((derived for derived in evaluation.graph.order if derived.key == name), None)
        known, rows = derived is not None, evaluation.tables[derived.per.value] if derived else ()
    return explanation(evaluation, name.removeprefix("margin."), row, width=width) if known and row in rows else []


def sentence(text: str) -> str:
    """The text with a capital, to follow another sentence."""
    return text[:1].upper() + text[1:]


def typing_line(evaluation: Evaluation, address: Address, text: str) -> tuple[str, bool]:
    """What is understood of a text being typed and what the worst margin would become, or why it is not accepted.

    The flag tells whether it would be accepted.
    """
    unit = unit_shown(evaluation.plan, address)
    try:
        plan = edited(evaluation.plan, address, text, assume=unit)
    except GivenError as error:
        return str(error), False
    value = resolved(plan, address).value
    read = REMOVED if not text.strip() else str(value)
    if isinstance(value, Quantity) and address.given.kind is not None:
        read = f"{without_origin(value)} = {understood(address.given.kind, value)}"
        read = read if text.strip() else f"{REMOVED}: now {read}"
    elif address.given.form is Form.CHOICE and text.strip():
        read = f"{value}: {address.given.options[str(value)]}"
    return f"{read}. Then: {headline(evaluate(plan), None)}", True
