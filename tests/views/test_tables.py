"""The grids: qubits, the givens of a chapter, the margins."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from pathlib import Path

import pytest

from planner.evaluate import Evaluation, evaluate
from planner.graph import givens
from planner.plan import ROWS, Address, addresses, key_of, table_givens
from planner.planfile import load
from planner.views.table import Cell, Table, Tone
from planner.views.tables import (
    PANES,
    found_text,
    given_text,
    margin_table,
    origin_text,
    pane_table,
    pane_title,
    qubit_table,
    record_table,
)
from tests.planmaking import Entry, plan_of, second

PLANS = Path(__file__).parents[2] / "plans"


def evaluation_of(changes: Mapping[str, Entry] | None = None) -> Evaluation:
    return evaluate(plan_of(changes))


def cells(table: Table) -> Iterator[Cell]:
    return (cell for row in table.rows for cell in row)


def cell(table: Table, key: str) -> Cell:
    return next(cell for cell in cells(table) if cell.key == key)


def test_every_given_that_has_a_pane_is_one_editable_cell() -> None:
    evaluation = evaluation_of(second("Q2"))
    found = [
        cell.key
        for pane in PANES
        if pane != "margins"
        for cell in cells(pane_table(evaluation, pane, 80))
        if cell.editable
    ]
    found += [cell.key for cell in cells(qubit_table(evaluation)) if cell.editable]
    assert sorted(found) == sorted(key_of(evaluation.plan, address) for address in addresses(evaluation.plan))


@pytest.mark.parametrize("width", [60, 77, 78, 80, 120])
@pytest.mark.parametrize("pane", [pane for pane in PANES if pane != "margins" and pane not in ROWS], ids=pane_title)
def test_a_pane_fits_its_width_with_names_whole(pane: str, width: int) -> None:
    table = pane_table(evaluation_of(), pane, width)
    assert all(len(row) == len(table.columns) for row in table.rows)
    if width >= 78:
        assert sum(column.width + 1 for column in table.columns) <= width
    names = [
        name
        for place, column in enumerate(table.columns)
        if place % 3 == 0
        for row in table.rows
        if len(name := row[place].text) <= column.width and name
    ]
    assert sorted(names) == sorted(table_givens(pane))


@pytest.mark.parametrize(
    ("value", "text", "origin", "tone", "edit"),
    [
        ("7 ppm/h; measured CD12", "7 ppm/h", "measured CD12", Tone.PLAIN, "7 ppm/h; measured CD12"),
        ("7 ppm/h; guess", "7 ppm/h", "guess", Tone.GUESS, "7 ppm/h; guess"),
        ("7 ± 1 ppm/h", "7 ± 1 ppm/h", "", Tone.PLAIN, "7 ± 1 ppm/h"),
        (None, "5 ppm/h", "default", Tone.ASSUMED, " "),
    ],
)
def test_typed_guessed_and_assumed_values_differ(
    value: str | None, text: str, origin: str, tone: Tone, edit: str
) -> None:
    evaluation = evaluation_of({"magnet.drift_driven": value})
    shown = cell(pane_table(evaluation, "magnet", 80), "magnet.drift_driven")
    assert (shown.text, shown.tone, shown.edit, shown.editable) == (text, tone, edit, True)
    assert origin_text(evaluation.plan, Address("magnet", None, "drift_driven")) == origin


@pytest.mark.parametrize(
    ("table", "name", "text", "origin"),
    [
        ("magnet", "rating", "T", "unknown"),
        ("magnet", "since_ramp", "h", "off"),
        ("model", "nuclei", "4", "material"),
        ("workload", "readout", "parity", "default"),
        ("source", "lo", "", "found"),
        ("", "note", "", "off"),
    ],
)
def test_what_an_absent_given_shows(table: str, name: str, text: str, origin: str) -> None:
    plan = plan_of({"magnet.rating": None})
    assert given_text(plan, Address(table, None, name)).startswith(text)
    assert origin_text(plan, Address(table, None, name)) == origin


def test_a_qubit_shows_what_it_takes_from_all_qubits() -> None:
    evaluation = evaluation_of({"all_qubits.t1": "80 ms; measured", "qubit.Q1.t1": None})
    shown = cell(qubit_table(evaluation), "qubit.Q1.t1")
    assert (shown.text, shown.tone) == ("80 ms", Tone.ASSUMED)
    assert origin_text(evaluation.plan, Address("qubit", 0, "t1")) == "all qubits"


def test_defaults_found_from_results_are_shown_and_begin_an_empty_text() -> None:
    """Half a Rabi period of 2 MHz and of 4 MHz."""
    evaluation = evaluation_of(second("Q2", rabi_frequency="4 MHz"))
    assert found_text(evaluation, Address("workload", None, "gate_time")) == "125 ns to 250 ns"
    assert found_text(evaluation_of(), Address("workload", None, "gate_time")) == "250 ns"
    assert found_text(evaluation, Address("magnet", None, "field")) == ""
    shown = cell(pane_table(evaluation, "workload", 80), "workload.gate_time")
    assert (shown.text, shown.tone, shown.edit) == ("125 ns to 250 ns", Tone.ASSUMED, " ")


def test_qubits_have_a_row_each_with_results_worst_margin_and_givens() -> None:
    evaluation = evaluation_of(
        {**second("Q2", valley_splitting="59 ueV"), **second("Q3", role="spare"), **second("Q4", role="dead")}
    )
    table = qubit_table(evaluation)
    assert [row[0].text for row in table.rows] == ["Q1", "Q2", "Q3", "Q4"]
    assert [column.heading[0] for column in table.columns[1:7]] == [
        "frequency",
        "spacing",
        "noise",
        "stands",
        "T2*",
        "worst of this qubit",
    ]
    worst = [row[6] for row in table.rows]
    assert worst[1].text.startswith("valley 0.") and worst[1].tone is Tone.SHORT and worst[1].key == "margin.valley@Q2"
    assert [entry.text for entry in worst[2:]] == ["spare", "dead"]
    assert table.rows[2][1].text and not table.rows[3][1].text  # a spare one has results, a dead one has none
    assert all(len(row) == len(table.columns) for row in table.rows) and table.fixed == 1


def test_the_worst_of_a_qubit_is_the_worst_of_its_margins() -> None:
    evaluation = evaluation_of({"workload.longest_wait": None, **second("Q2", frequency_noise="40 kHz/rtHz")})
    for position, row in enumerate(evaluation.used):
        codes = [int(margin.codes[position]) for margin in evaluation.margins if margin.limit.per.value == "qubit"]
        tones = (Tone.SHORT, Tone.UNKNOWN, Tone.TIGHT, Tone.PLAIN)
        assert qubit_table(evaluation).rows[row][6].tone is tones[min(codes)]


def test_unknown_results_are_underlined_question_marks() -> None:
    shown = cell(qubit_table(evaluation_of({"workload.longest_wait": None})), "coherence.wait_phase@Q1")
    assert (shown.text, shown.tone, shown.editable) == ("?", Tone.UNKNOWN, False)


def test_margins_stand_worst_first_then_those_not_asked() -> None:
    evaluation = evaluation_of({"magnet.rating": None, "qubit.Q1.valley_splitting": "58 ueV"})
    table = margin_table(evaluation, 80)
    asked = [row for row in table.rows if row[3].text]
    assert [row[0].text for row in asked] == [margin.name for margin in evaluation.ranked]
    order = ["short", "unknown", "tight", "clear"]
    assert [row[3].text for row in asked] == sorted((row[3].text for row in asked), key=order.index)
    assert {row[3].text: row[3].tone for row in asked}["short"] is Tone.SHORT
    assert [row[0].text for row in table.rows[len(asked) :]] == list(evaluation.not_asked)
    assert all(row[5].text.startswith("not asked: ") for row in table.rows[len(asked) :])


def test_cells_hold_no_control_characters() -> None:
    evaluation = evaluation_of(
        {"note": "a\\u001b[31m\u202e", "magnet.drift_driven": "5 ppm/h; [b]x\u202e[/b]", "device": "\u200bD"}
    )
    tables = [qubit_table(evaluation), *(pane_table(evaluation, pane, 80) for pane in PANES)]
    assert all(cell.text.isprintable() for table in tables for cell in cells(table))
    assert cell(tables[1 + PANES.index("magnet")], "magnet.drift_driven").edit == "5 ppm/h; [b]x\ufffd[/b]"


def test_records_have_a_row_each_with_results_and_givens() -> None:
    """500 mT through a coil of 100 mT/A are 5 A."""
    evaluation = evaluation_of(
        {"coil.z.direction": "1, 0, 0", "coil.z.field_per_current": "100 mT/A", "coil.z.rating": "6 T; datasheet"}
    )
    table = record_table(evaluation, "coil")
    assert len(table.rows) == 1 and table.fixed == 1 and len(table.rows[0]) == len(table.columns)
    assert table.rows[0][0].text == "z" and cell(table, "coil.current@z").text == "5.00"
    headings = [column.heading[0] for column in table.columns]
    assert headings[:1] == [""] and headings[-5:] == ["direction", "rating", "field_per_current", "step", "mode"]
    assert (cell(table, "coil.z.rating").text, cell(table, "coil.z.rating").editable) == ("6 T", True)


def test_every_result_that_is_shown_stands_in_the_table_of_its_records() -> None:
    evaluation = evaluate(load(PLANS / "sq6-03.toml").plan)
    found = {name: [cell.key for cell in cells(record_table(evaluation, name))] for name in ROWS}
    for derived in evaluation.graph.order:
        if derived.shown and derived.per.value in ROWS and derived.key not in givens():
            rows = evaluation.tables[derived.per.value]
            assert {f"{derived.key}@{row}" for row in rows} <= set(found[derived.per.value])


def test_records_without_names_begin_with_their_first_given() -> None:
    evaluation = evaluate(load(PLANS / "sq6-03.toml").plan)
    table = record_table(evaluation, "phase_noise")
    assert table.columns[0].heading[0] == "offset"
    assert [row[0].text for row in table.rows][:2] == ["100 Hz", "1 kHz"] and table.rows[1][0].key.endswith(".2.offset")


@pytest.mark.parametrize("table", [table for table in ROWS if table != "qubit"])
def test_without_records_one_line_says_how_to_add_one(table: str) -> None:
    shown = pane_table(evaluation_of(), table, 80)
    assert [entry.text for entry in cells(shown)] == [f"no {pane_title(table)}: Space n adds a row"]
    assert not any(entry.editable or entry.key for entry in cells(shown))
