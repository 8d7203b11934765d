"""Numbers with what stands behind them: value and unit, origin, range, status and reference."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from planner.columns import Column
from planner.declare import Derived, Given
from planner.evaluate import Evaluation
from planner.graph import HOST
from planner.kinds import Kind, Quantity, QuantityError, clean
from planner.margins import number_or_none
from planner.materials import Nucleus, Sourced, material
from planner.physics import Array
from planner.plan import ROWS, Address, Plan, resolved, row_name
from planner.ranges import span
from planner.references import references
from planner.views.numbers import UNKNOWN, with_unit, without_origin
from planner.views.words import missing_text

SEEN = {
    "read": "read",
    "abstract": "only its abstract was read",
    "memory": "not read again: check it before relying on it",
    "own": "",
}
MOST_NAMED = 8  # rows whose values stand in one line
# What the material says of itself, as a meaning; `planner.graph.HOST` has their kinds.
HOST_MEANINGS = {
    "host.hole": "1 for a hole, 0 for an electron",
    "host.valleys": "1 where the host has valleys",
    "host.moment": "sum of w A^2 I (I + 1)/3 over the isotopes of the well",
    "host.barrier_moment": "w A^2 I (I + 1)/3 of the barrier's isotope",
}


def reference_text(key: str, place: str = "") -> str:
    """A reference with the place in it and how far it was read."""
    found = references()[key]
    return "; ".join(part for part in (found.text, place, SEEN[found.seen]) if part)


def sourced_text(value: Sourced) -> str:
    """Behind a shipped value: its known range, status and reference."""
    known = f"known to lie from {value.low} to {value.high}, " if value.low is not None else ""
    return f"{known}{value.status}: {reference_text(value.reference)}"


def result_value(evaluation: Evaluation, derived: Derived, row: int) -> str:
    """A result of one row with its unit, `?` where it is unknown, and how far it may lie off."""
    value = column_value(evaluation.columns[derived.key], derived.kind, row, derived.display, derived.digits)
    return value if value == UNKNOWN else value + _spread(evaluation, derived, row)


def column_value(column: Column, kind: Kind, row: int, unit: str = "", count: int = 3) -> str:
    """The number, vector or matrix of one row with its unit."""
    base = column.base()[row]
    if np.ndim(base):
        return numbers_text(kind, np.ravel(base).tolist(), unit, count)
    return shown(kind, number_or_none(float(base)), unit, count)


def numbers_text(kind: Kind, numbers: Sequence[float], unit: str, count: int) -> str:
    """Several numbers in the unit that suits the largest."""
    if any(np.isnan(number) for number in numbers):
        return UNKNOWN
    largest = max(numbers, key=abs)
    unit = unit or shown(kind, largest, "", count).partition(" ")[2]
    return (
        ", ".join(shown(kind, number, unit, count).removesuffix(unit).rstrip() for number in numbers)
        + f" {unit}".rstrip()
    )


def shown(kind: Kind, value: float | None, unit: str = "", count: int = 3) -> str:
    """A value with its unit; a level of nothing in SI units."""
    if not unit and "" not in kind.units and kind.si not in kind.units:
        unit = kind.first_unit
    try:
        return with_unit(kind, value, unit, count)
    except QuantityError:
        return f"{value:g} {kind.si}"


def given_value(plan: Plan, address: Address) -> tuple[str, str]:
    """The text of a given as it counts, and where that comes from."""
    given = address.given
    value, source = resolved(plan, address)
    if value is None:
        return UNKNOWN, f"not typed; {missing_text(given)}"
    text = clean(without_origin(value) if isinstance(value, Quantity) else value)
    origin = clean(value.origin) if isinstance(value, Quantity) else ""
    behind = {
        "typed": "typed",
        "all_qubits": "typed for all qubits",
        "default": "default",
        "material": f"of the material {plan.chip.material}",
    }[source]
    if source in {"typed", "all_qubits"}:
        return text, f"{behind}; {origin or _no_origin(given)}"
    return text, behind + _shipped(plan, address, source)


def address_in(plan: Plan, key: str, row: str) -> Address | None:
    """The place of a given of the plan or of this row; None where there is no such row."""
    table, _, name = key.rpartition(".")
    if table not in ROWS:
        return Address(table, None, name)
    names = [row_name(plan, table, place) for place in range(len(plan.rows(table)))]
    return Address(table, names.index(row), name) if row in names else None


def host_lines(plan: Plan, key: str) -> list[str]:
    """What stands behind a value of the material itself."""
    host = material(plan.chip.material or "")
    lines = [f"of the material {host.name}, {host.title}"]
    if key in {"host.moment", "host.barrier_moment"}:
        nuclei = host.nuclei if key == "host.moment" else (host.barrier,)
        lines += [_nucleus_line(nucleus) for nucleus in nuclei]
    return lines


def host_value(evaluation: Evaluation, key: str) -> str:
    """A value of the material itself."""
    return column_value(evaluation.columns[key], HOST[key], 0)


def per_row(names: Sequence[str], values: Sequence[str]) -> str:
    """Values of several rows in one line."""
    parts = [f"{clean(name)} {value}" for name, value in zip(names, values, strict=True)]
    more = f" and {len(parts) - MOST_NAMED} more" if len(parts) > MOST_NAMED else ""
    return ", ".join(parts[:MOST_NAMED]) + more if parts else "none"


def _spread(evaluation: Evaluation, derived: Derived, row: int) -> str:
    """The range of a result by tolerances and ranges, where it is one to see."""
    column = evaluation.columns[derived.key]
    if derived.trailing or not column.has_lead or not evaluation.leads:
        return ""
    ends: list[Array] = list(evaluation.range_of(derived.key))
    low, high = (shown(derived.kind, float(end[row]), derived.display, derived.digits) for end in ends)
    return f" (may be {low} to {high})" if low != high else ""


def _no_origin(given: Given) -> str:
    return "its origin is not said" if given.kind is not None and given.nature.value == "fact" else "no origin"


def _shipped(plan: Plan, address: Address, source: str) -> str:
    """Range, status and reference of a value that nobody typed."""
    key = f"{address.table}.{address.field}" if address.table else address.field
    if source == "material":
        return f", {sourced_text(material(plan.chip.material or '').values[key])}"
    known = span(key, plan.chip.material)
    if known is None:
        return ""
    ends = " to ".join(map(without_origin, (known.low, known.high)))
    return f", known to lie from {ends}, {known.status}: {reference_text(known.reference)}"


def _nucleus_line(nucleus: Nucleus) -> str:
    return (
        f"from {nucleus.isotope}: spin {nucleus.spin:g}, weight {nucleus.weight:g}, coupling {nucleus.source.text}, "
        f"{sourced_text(nucleus.source)}"
    )
