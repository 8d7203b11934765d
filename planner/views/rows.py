"""The sentences of every surface: head lines, the worst margin, gaps, reasons and what to type next."""

from __future__ import annotations

from planner.declare import Lock
from planner.evaluate import Evaluation
from planner.graph import givens
from planner.kinds import Quantity, in_unit
from planner.margins import SHORT, TIGHT, UNKNOWN, VERDICTS, Margin
from planner.plan import SECTIONS, Address, Plan, resolved, unit_shown
from planner.studies.typenext import TypeNext
from planner.views.numbers import best_unit, margin_text, number_in, plain, with_unit, without_origin

NO_GATE = "no gate: Rabi below the noise"


def device_line(plan: Plan) -> str:
    """Device and cooldown, as far as they are typed."""
    header = plan.header
    cooldown = f"cooldown {header.cooldown.text}" if header.cooldown is not None else ""
    return ", ".join(part for part in (header.device or "unnamed device", cooldown) if part)


def field_line(plan: Plan) -> str:
    """Set field and its direction."""
    assert plan.magnet.field is not None
    elevation, azimuth = (_angle(plan, name) for name in ("elevation", "azimuth"))
    size = without_origin(plan.magnet.field)
    if all(quantity.value == 0 for quantity in (elevation, azimuth)):
        return f"{size} along c1"
    return f"{size}, azimuth {_without_tolerance(azimuth)}, elevation {_without_tolerance(elevation)}"


def passed_line(plan: Plan) -> str:
    """The last moment that is behind us."""
    passed = passed_of(plan)
    return "nothing passed" if passed == "none" else f"{passed} passed"


def passed_of(plan: Plan) -> str:
    """The word of the last moment that is behind us."""
    return str(resolved(plan, Address("", None, "passed")).value)


def counts(evaluation: Evaluation) -> str:
    """How many margins have each verdict, and how many of the bad ones can be repaired only before closing."""
    every = [margin.code for margin in evaluation.margins]
    shown = "  ".join(f"{every.count(code)} {VERDICTS[code]}" for code in (SHORT, TIGHT, TIGHT + 1, UNKNOWN))
    return f"{shown}    {only_before_closing(evaluation)}"


def only_before_closing(evaluation: Evaluation) -> str:
    """Short and unknown margins whose last choice locks at closing or earlier."""
    if passed_of(evaluation.plan) in {"closing", "cooling", "ramp"}:
        return "closing is behind us"
    early = [margin.code for margin in evaluation.margins if margin.until is not None and margin.until <= Lock.CLOSING]
    return f"only before closing: {early.count(SHORT)} short, {early.count(UNKNOWN)} unknown"


def headline(evaluation: Evaluation, following: TypeNext | None) -> str:
    """The one sentence that matters most: the worst margin, or what to type next where nothing is short."""
    worst = evaluation.ranked[0] if evaluation.margins else None
    if worst is None:
        return "no margin is asked: no qubit is in use"
    if worst.code == UNKNOWN and following is not None:
        return type_next_line(following)
    return margin_line(evaluation, worst)


def type_next_line(following: TypeNext) -> str:
    """What to type next and what it is good for."""
    also = f" with {following.also}" if following.also else ""
    margins = "margin" if following.known == 1 else "margins"
    return f"type next: {following.key}{also} (makes {following.known} {margins} known)"


def margin_line(evaluation: Evaluation, margin: Margin) -> str:
    """A margin in a sentence: name, qubit, number, verdict, and the gap or reason."""
    subject = f"{margin.name} {margin.row}".rstrip()
    if margin.code == UNKNOWN:
        return f"{subject} unknown: {margin.reason}"
    return f"{subject} {margin_text(margin.value)} {margin.verdict}: {gap(evaluation, margin)}"


def gap(evaluation: Evaluation, margin: Margin) -> str:
    """How allowed and expected stand, and why a verdict is tempered; the reason of an unknown."""
    if margin.code == UNKNOWN or margin.allowed is None or margin.expected is None:
        return str(margin.reason or "")
    compare = margin.compare
    if compare.allowed == "coherence.reachable_gates" and margin.allowed < 1:
        return NO_GATE
    unit = unit_of(evaluation, margin)
    allowed, expected = (plain(in_unit(compare.kind, side, unit), 3) for side in (margin.allowed, margin.expected))
    text = compare.gap.format(allowed=allowed, expected=expected, unit=unit).replace("  ", " ")
    what = f"{compare.what}, " if compare.what and "{expected} of" in compare.gap else ""
    note = f"; {margin.note}" if margin.note and (margin.value or 0) < 1 else ""
    return f"{what}{text}{note}"


def unit_of(evaluation: Evaluation, margin: Margin) -> str:
    """The unit in which a margin's sides are shown: that of the given it compares with, else the one that reads best."""
    for key in (margin.compare.allowed, margin.compare.expected):
        table, _, name = key.rpartition(".")
        if key in givens() and table in SECTIONS:
            shown = unit_shown(evaluation.plan, Address(table, None, name))
            return shown if shown in margin.compare.kind.units else margin.compare.kind.first_unit
    return best_unit(margin.compare.kind, max(abs(margin.allowed or 0), abs(margin.expected or 0)))


def until_word(margin: Margin) -> str:
    """The moment until which a margin can be repaired."""
    return margin.until.word if margin.until is not None else "-"


def not_asked_line(evaluation: Evaluation) -> str:
    """The margins that are not asked, each with its reason, in one line; empty where there are none."""
    if not evaluation.not_asked:
        return ""
    return "not asked: " + ", ".join(f"{name} ({reason})" for name, reason in evaluation.not_asked.items())


def result_text(evaluation: Evaluation, key: str, row: int) -> str:
    """A result of one row in its unit of display, without the unit; `?` for an unknown."""
    derived = evaluation.derived(key)
    value = float(evaluation.columns[key].base()[row])
    if key == "coherence.reachable_gates" and value < 1:
        return "no gate"
    if derived.display:
        return number_in(derived.kind, value, derived.display, derived.digits)
    return with_unit(derived.kind, value, count=derived.digits)


def _angle(plan: Plan, name: str) -> Quantity:
    value = resolved(plan, Address("magnet", None, name)).value
    assert isinstance(value, Quantity)
    return value


def _without_tolerance(quantity: Quantity) -> str:
    text = without_origin(quantity)
    return f"{text.split('±')[0].rstrip()} {quantity.unit}" if "±" in text else text
