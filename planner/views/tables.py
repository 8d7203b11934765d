"""The grids: qubits and other records with results and givens in one row, a chapter's givens, the margins."""

from __future__ import annotations

from collections.abc import Iterator
from math import isfinite

from planner.declare import Derived, Missing, Per
from planner.evaluate import Evaluation
from planner.graph import givens
from planner.kinds import Quantity, clean
from planner.margins import CLEAR, SHORT, TIGHT, UNKNOWN, VERDICTS, number_or_none
from planner.plan import ROWS, Address, Plan, key_of, resolved, table_givens, unit_shown
from planner.views.numbers import margin_text, with_unit, without_origin
from planner.views.rows import gap, result_text, until_word
from planner.views.table import Cell, Column, Table, Tone

FIRST_RESULTS = ("larmor.frequency", "larmor.spacing", "noise.total", "coherence.allowed_noise", "coherence.t2_star")
VERDICT_TONES = {SHORT: Tone.SHORT, UNKNOWN: Tone.UNKNOWN, TIGHT: Tone.TIGHT, CLEAR: Tone.PLAIN}
PANES = (
    "margins",
    "magnet",
    "coil",
    "clock",
    "phase_noise",
    "source",
    "chip",
    "part",
    "model",
    "workload",
    "calibration",
    "stage",
    "line",
    "all_qubits",
    "pair",
    "",
)
LOUD = 10.0  # a quiet margin above this tells nothing on a first look
TWO_BESIDE = 78  # columns from which two givens stand beside each other
LONGEST_VALUE = 22
LONGEST_ROW = 8  # characters of a row's name beside its margin, unless qubits have longer ones
PANE_TITLES = {
    "": "plan",
    "all_qubits": "all qubits",
    "qubit": "qubits",
    "coil": "coils",
    "phase_noise": "phase noise",
    "part": "parts",
    "stage": "stages",
    "line": "lines",
    "pair": "pairs",
}


def pane_title(pane: str) -> str:
    """Title of a pane."""
    return PANE_TITLES.get(pane, pane)


def qubit_table(evaluation: Evaluation) -> Table:
    """One row a qubit of the plan: name, first results, its worst margin, its givens, the other results."""
    worst = _worst_by_row(evaluation)
    places = _places(evaluation, "qubit")
    cells = [worst.get(place, Cell("dead" if place is None else "spare", Tone.FAINT)) for place in places]
    return record_table(evaluation, "qubit", FIRST_RESULTS, ((Column(("worst of this qubit", ""), 21), tuple(cells)),))


def record_table(
    evaluation: Evaluation,
    table: str,
    first: tuple[str, ...] | None = None,
    extra: tuple[tuple[Column, tuple[Cell, ...]], ...] = (),
) -> Table:
    """One row a record of a list of tables: its name, the `first` results (None: all), `extra` columns, givens, other results.

    A record without a name begins with its first given. Without any record one line says how to add one.
    """
    plan = evaluation.plan
    if not plan.rows(table):
        line = f"no {pane_title(table)}: Space n adds a row"
        return Table((Column((), len(line)),), ((Cell(line, Tone.FAINT),),))
    listed = [derived for derived in evaluation.graph.order if _listed(derived, table)]
    before = listed if first is None else [evaluation.derived(key) for key in first]
    after = [] if first is None else [derived for derived in listed if derived.key not in first]
    name, *fields = table_givens(table)
    columns = (
        Column(("", "") if name == "name" else (name, ""), _name_width(plan, table, name)),
        *map(_result_column, before),
        *(column for column, _ in extra),
        *(_given_column(plan, table, field) for field in fields),
        *map(_result_column, after),
    )
    cells = tuple(
        (
            _given_cell(plan, Address(table, row, name)),
            *(_result_cell(evaluation, derived, place) for derived in before),
            *(column[row] for _, column in extra),
            *(_given_cell(plan, Address(table, row, field)) for field in fields),
            *(_result_cell(evaluation, derived, place) for derived in after),
        )
        for row, place in enumerate(_places(evaluation, table))
    )
    return Table(columns, cells, fixed=1)


def pane_table(evaluation: Evaluation, pane: str, width: int) -> Table:
    """The records of a pane, or the givens of a chapter with value and origin, two beside each other where they fit."""
    if pane == "margins":
        return margin_table(evaluation, width)
    if pane in ROWS:
        return record_table(evaluation, pane)
    names = list(table_givens(pane))
    height = -(-len(names) // 2) if width >= TWO_BESIDE else len(names)
    halves = [
        [_given_cells(evaluation, Address(pane, None, name)) for name in names[start : start + height]]
        for start in range(0, len(names), height)
    ]
    blank = (Cell(""),) * 3
    rows = tuple(
        tuple(cell for half in halves for cell in (half[row] if row < len(half) else blank)) for row in range(height)
    )
    return Table(tuple(_half_columns(halves, width)), rows)


def _half_columns(halves: list[list[tuple[Cell, ...]]], width: int) -> Iterator[Column]:
    """Name, value and origin of each half: names whole, values as wide as they are up to a limit, origins what is left.

    A blank stays behind each name, so that the cursor's pointer is not read as a comparison.
    """
    needs = [[max(len(row[place].text) for row in half) for place in range(3)] for half in halves]
    needs = [[name + 1, value, origin] for name, value, origin in needs]
    values = [min(need[1], LONGEST_VALUE) for need in needs]
    room = width - 3 * len(halves) - sum(need[0] for need in needs) - sum(values)
    for place, (need, value) in enumerate(zip(needs, values, strict=True)):
        origin = max(1, min(need[2], room // (len(halves) - place)))
        room -= origin
        yield from (Column((), need[0]), Column((), value), Column((), origin))


def margin_table(evaluation: Evaluation, width: int, *, brief: bool = False) -> Table:
    """The asked margins, worst first, then those not asked; `brief` leaves out quiet ones that are far from their bound."""
    name = max(len(limit.name) for limit in evaluation.graph.limits)
    names = [len(name) for name in evaluation.names if len(name) < 12]
    row_width = max([*names, *(min(len(margin.row), LONGEST_ROW) for margin in evaluation.margins), 2])
    text = max(10, width - name - row_width - 7 - 8 - 8 - 6)
    columns = (
        Column(("margin",), name),
        Column(("of",), row_width),
        Column(("",), 7, right=True),
        Column(("",), 8),
        Column(("until",), 8),
        Column(("",), text),
    )
    rows = [
        (
            Cell(margin.name, key=f"margin.{margin.name}"),
            Cell(margin.row, key=f"margin.{margin.name}"),
            Cell(margin_text(margin.value), key=f"margin.{margin.name}"),
            Cell(margin.verdict, VERDICT_TONES[margin.code], key=f"margin.{margin.name}"),
            Cell(until_word(margin), Tone.FAINT),
            Cell(gap(evaluation, margin)),
        )
        for margin in evaluation.ranked
        if not (brief and margin.limit.quiet and (margin.value or 0.0) > LOUD)
    ]
    rows += [
        (
            Cell(margin, Tone.FAINT, key=f"margin.{margin}"),
            Cell(""),
            Cell(""),
            Cell(""),
            Cell(""),
            Cell(f"not asked: {reason}", Tone.FAINT),
        )
        for margin, reason in evaluation.not_asked.items()
    ]
    return Table(columns, tuple(rows))


def given_text(plan: Plan, address: Address) -> str:
    """The value of a given as a cell shows it: without its origin, or the unit of an empty one."""
    value = resolved(plan, address).value
    if isinstance(value, Quantity):
        return without_origin(value)
    return value if value is not None else unit_shown(plan, address)


def found_text(evaluation: Evaluation, address: Address) -> str:
    """What was found from results for a given that nobody typed: one value, or the range over the qubits."""
    key = f"{address.table}.{address.field}"
    if key not in evaluation.columns or givens()[key].missing is not Missing.FOUND:
        return ""
    derived = evaluation.derived(key)
    values = [float(value) for value in evaluation.columns[key].base() if isfinite(value)]
    ends = (
        [with_unit(derived.kind, value, derived.display, derived.digits) for value in (min(values), max(values))]
        if values
        else []
    )
    return " to ".join(dict.fromkeys(ends))


def _listed(derived: Derived, table: str) -> bool:
    return derived.shown and derived.per.value == table and derived.key not in givens()


def _places(evaluation: Evaluation, table: str) -> list[int | None]:
    """Where each record of the plan stands in the columns of results; None for a dead qubit."""
    rows = range(len(evaluation.plan.rows(table)))
    places = {row: place for place, row in enumerate(evaluation.rows if table == "qubit" else rows)}
    return [places.get(row) for row in rows]


def _name_width(plan: Plan, table: str, name: str) -> int:
    texts = [given_text(plan, Address(table, row, name)) for row in range(len(plan.rows(table)))]
    return min(16, max(4, 0 if name == "name" else len(name), *(len(text) + 1 for text in texts)))


def _result_column(derived: Derived) -> Column:
    heading = derived.heading or derived.key.rpartition(".")[2]
    return Column(
        (heading, derived.display), max(len(heading), len(derived.display), 8 if derived.display else 9), right=True
    )


def _given_column(plan: Plan, table: str, name: str) -> Column:
    texts = [given_text(plan, Address(table, row, name)) for row in range(len(plan.rows(table)))]
    return Column((name, ""), max(len(name), min(24, max(map(len, texts)))), right=False)


def _result_cell(evaluation: Evaluation, derived: Derived, place: int | None) -> Cell:
    if place is None:
        return Cell("")
    text = result_text(evaluation, derived.key, place)
    tone = Tone.UNKNOWN if text == "?" else Tone.PLAIN
    return Cell(text, tone, key=f"{derived.key}@{evaluation.tables[derived.per.value][place]}")


def _worst_by_row(evaluation: Evaluation) -> dict[int | None, Cell]:
    """The worst margin of each qubit in use."""
    found: dict[int | None, Cell] = {}
    for position, row in enumerate(evaluation.used):
        ranked = [
            (int(margin.codes[position]), float(margin.margins[position]), margin.name)
            for margin in evaluation.margins
            if margin.limit.per is Per.QUBIT
        ]
        code, value, name = min(ranked, key=lambda entry: (entry[0], entry[1] if isfinite(entry[1]) else 0.0))
        number = margin_text(number_or_none(value))
        found[row] = Cell(
            f"{name} {number} {VERDICTS[code]}", VERDICT_TONES[code], key=f"margin.{name}@{evaluation.names[row]}"
        )
    return found


def _given_cells(evaluation: Evaluation, address: Address) -> tuple[Cell, ...]:
    plan = evaluation.plan
    cell = _given_cell(plan, address)
    found = found_text(evaluation, address) if resolved(plan, address).value is None else ""
    if found:
        cell = Cell(found, Tone.ASSUMED, cell.key, editable=True, edit=" ")
    return Cell(address.field, Tone.FAINT), cell, Cell(origin_text(plan, address), Tone.FAINT)


def origin_text(plan: Plan, address: Address) -> str:
    """Where the value of a given comes from, or what its absence means."""
    value, source = resolved(plan, address)
    if source == "typed":
        return clean(value.origin) if isinstance(value, Quantity) else ""
    if source:
        return {"all_qubits": "all qubits", "material": "material", "default": "default"}[source]
    missing = address.given.missing
    return {Missing.OFF: "off", Missing.FOUND: "found", Missing.REQUIRED: "required"}.get(missing, "unknown")


def _given_cell(plan: Plan, address: Address) -> Cell:
    value, source = resolved(plan, address)
    typed = source == "typed"
    tone = Tone.PLAIN if typed else Tone.ASSUMED
    if isinstance(value, Quantity) and typed and value.origin_class == "guess":
        tone = Tone.GUESS
    edit = (value.text if isinstance(value, Quantity) else value) if typed and value is not None else " "
    return Cell(clean(given_text(plan, address)), tone, key_of(plan, address), editable=True, edit=clean(edit))
