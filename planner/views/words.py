"""The dictionary: every given, result and margin with what it means, made from the declarations."""

from __future__ import annotations

from planner.declare import OWN, Form, Given, Missing, law_of
from planner.graph import givens, graph
from planner.plan import ROWS, SECTIONS, table_givens
from planner.references import references
from planner.values import bounds_text


def dictionary() -> list[str]:
    """All words, one entry of two lines each, in the order of the file and of the results."""
    lines = ["GIVENS", ""]
    for table in (*SECTIONS, *ROWS):
        if table != "all_qubits":
            lines += [
                line for name, given in table_givens(table).items() for line in given_entry(_key(table, name), given)
            ]
    lines += ["", "RESULTS", ""]
    for derived in sorted(graph().order, key=lambda derived: derived.key):
        if derived.shown and derived.key not in givens():
            declared = law_of(derived.law)
            source = "" if declared.reference == OWN else f" [{references()[declared.reference].text}]"
            lines += [f"{derived.key}  ({declared.result.si})", f"    {derived.help}{source}"]
    lines += ["", "MARGINS (allowed / expected, larger is better)", ""]
    for limit in graph().limits:
        lines += [limit.name, f"    {limit.meaning}"]
    return lines


def given_entry(key: str, given: Given) -> list[str]:
    """Two lines on a given: its key, kind, nature and lock; what it is, what is accepted and what its absence means."""
    locks = f", locks at {given.locks.word}" if given.locks is not None else ""
    first = f"{key}  ({kind_text(given)}; {given.nature.value}{locks})"
    parts = [
        given.help,
        bounds_of(given),
        f"usual: {given.sensible}" if given.sensible else "",
        missing_text(given),
    ]
    return [first, "    " + "; ".join(part for part in parts if part)]


def help_line(key: str, given: Given) -> str:
    """One line on the given under the cursor."""
    locks = f" {given.locks.word}" if given.locks is not None else ""
    usual = f" {given.sensible}." if given.sensible else ""
    return f"{key}: {given.help}.{usual} {given.nature.value}{locks}"


def kind_text(given: Given) -> str:
    """Kind of a given in words: units, words to choose from, text or date."""
    if given.kind is not None:
        size = {(1,): "", (3,): ", three numbers", (1, 3): ", one or three numbers"}.get(given.sizes, ", a list")
        return f"{given.kind.name} in {given.kind.choices}{size}" if given.kind.choices else f"{given.kind.name}{size}"
    return ", ".join(given.options) if given.form is Form.CHOICE else given.form.value


def bounds_of(given: Given) -> str:
    """What is accepted, in words; empty without bounds."""
    bounds = bounds_text(given, given.kind.first_unit) if given.kind is not None else ""
    return f"accepted: {bounds}" if bounds else ""


def missing_text(given: Given) -> str:
    """What its absence means."""
    return {
        Missing.REQUIRED: "required",
        Missing.UNKNOWN: "if missing: results that need it are unknown",
        Missing.OFF: "if missing: not counted",
        Missing.DEFAULT: f"if missing: {given.default}",
        Missing.MATERIAL: "if missing: the material's value",
        Missing.FOUND: "if missing: found from results",
    }[given.missing]


def _key(table: str, name: str) -> str:
    if not table:
        return name
    return f"{table}.NAME.{name}" if table in ROWS else f"{table}.{name}"
