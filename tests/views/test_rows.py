"""The sentences: head lines, the worst margin, gaps, and what to type next."""

from __future__ import annotations

from collections.abc import Mapping

import pytest

from planner.evaluate import Evaluation, evaluate
from planner.margins import VERDICTS
from planner.plan import Address
from planner.studies.typenext import TypeNext, type_next
from planner.views.editing import help_at, typing_line
from planner.views.first_screen import first_screen, head_lines, too_small
from planner.views.rows import (
    NO_GATE,
    counts,
    device_line,
    field_line,
    gap,
    headline,
    margin_line,
    not_asked_line,
    passed_line,
    result_text,
    type_next_line,
    until_word,
)
from tests.planmaking import Entry, plan_of, second


def evaluation_of(changes: Mapping[str, Entry] | None = None) -> Evaluation:
    return evaluate(plan_of(changes))


@pytest.mark.parametrize(
    ("changes", "line"),
    [
        ({}, "unnamed device"),
        ({"device": "SQ6"}, "SQ6"),
        ({"device": "SQ6", "cooldown": 14}, "SQ6, cooldown 14"),
        ({"cooldown": 14}, "unnamed device, cooldown 14"),
    ],
)
def test_device(changes: Mapping[str, Entry], line: str) -> None:
    assert device_line(plan_of(changes)) == line


@pytest.mark.parametrize(
    ("changes", "line"),
    [
        ({}, "500 mT along c1"),
        ({"magnet.elevation": "0 ± 0.5 deg"}, "500 mT along c1"),
        ({"magnet.field": "0.5 T; measured", "magnet.azimuth": "51 deg"}, "0.5 T, azimuth 51 deg, elevation 0 deg"),
        ({"magnet.elevation": "-0.5 ± 0.15 deg; drawing"}, "500 mT, azimuth 0 deg, elevation -0.5 deg"),
    ],
)
def test_field(changes: Mapping[str, Entry], line: str) -> None:
    assert field_line(plan_of(changes)) == line


@pytest.mark.parametrize(
    ("passed", "line"), [(None, "wafer passed"), ("none", "nothing passed"), ("closing", "closing passed")]
)
def test_what_is_behind_us(passed: str | None, line: str) -> None:
    assert passed_line(plan_of({"passed": passed})) == line


def test_counts_are_those_of_the_margins() -> None:
    evaluation = evaluation_of({"magnet.rating": None, "qubit.Q1.valley_splitting": "58 ueV"})
    verdicts = [margin.verdict for margin in evaluation.margins]
    line = counts(evaluation)
    assert "unknown" in verdicts and "short" in verdicts
    for verdict in VERDICTS:
        assert f"{verdicts.count(verdict)} {verdict}" in line.partition("    ")[0]
    assert line.partition("    ")[2].startswith("only before closing: ")
    assert counts(evaluation_of({"passed": "closing"})).endswith("    closing is behind us")


def test_the_headline_is_the_worst_margin_or_what_to_type_next() -> None:
    short = evaluation_of({"qubit.Q1.valley_splitting": "58 ueV", "magnet.rating": None})
    assert headline(short, type_next(short)).startswith(f"{short.ranked[0].name} ")
    assert "short: " in headline(short, type_next(short))
    unknown = evaluation_of({"magnet.rating": None})
    following = type_next(unknown)
    if unknown.ranked[0].verdict == "unknown":
        assert headline(unknown, following) == "type next: magnet.rating (makes 1 margin known)"
        assert headline(unknown, None) == "rating unknown: magnet.rating is not typed"


@pytest.mark.parametrize(
    ("following", "line"),
    [
        (TypeNext("magnet.rating", "", 1), "type next: magnet.rating (makes 1 margin known)"),
        (TypeNext("workload.longest_wait", "", 4), "type next: workload.longest_wait (makes 4 margins known)"),
        (TypeNext("source.low", "source.high", 2), "type next: source.low with source.high (makes 2 margins known)"),
    ],
)
def test_what_to_type_next(following: TypeNext, line: str) -> None:
    assert type_next_line(following) == line


def test_every_margin_is_a_sentence_with_its_name_number_verdict_and_gap() -> None:
    for changes in ({}, {"magnet.rating": None, "workload.longest_wait": None, "source.low": None}, {**second("Q2")}):
        evaluation = evaluation_of(changes)
        for margin in evaluation.margins:
            line = margin_line(evaluation, margin)
            assert line.startswith(margin.name) and margin.verdict in line and ": " in line
            assert line.rpartition(": ")[2] and "{" not in line and "nan" not in line and "  " not in line
            assert gap(evaluation, margin) in line
            assert until_word(margin) in {"-", "wafer", "bonding", "closing", "cooling", "ramp", "open"}


def test_a_gap_stands_in_the_unit_of_the_given_it_compares_with() -> None:
    evaluation = evaluation_of({"magnet.field": "0.5 T", "magnet.rating": "1000 mT"})
    margin = evaluation.margin("rating")
    assert margin is not None
    assert gap(evaluation, margin) == "500 of 1000 mT rated"
    assert margin_line(evaluation, margin) == "rating 2.00 clear: 500 of 1000 mT rated"


def test_fewer_than_one_gate_is_said_in_words() -> None:
    evaluation = evaluation_of({"qubit.Q1.rabi_frequency": "1 kHz"})
    margin = evaluation.margin("sequence")
    assert margin is not None and margin.verdict == "short"
    assert gap(evaluation, margin) == NO_GATE
    assert result_text(evaluation, "coherence.reachable_gates", 0) == "no gate"


def test_results_are_shown_in_their_unit_and_unknown_ones_by_a_question_mark() -> None:
    """2.0 x 13.99624 GHz/T x 0.5 T = 13.996 GHz (muB/h: CODATA 2022)."""
    evaluation = evaluation_of({"workload.longest_wait": None})
    assert result_text(evaluation, "larmor.frequency", 0) == "13.996"
    assert result_text(evaluation, "coherence.wait_phase", 0) == "?"


def test_what_is_not_asked_is_one_line_with_reasons() -> None:
    evaluation = evaluation_of()
    line = not_asked_line(evaluation)
    assert line.startswith("not asked: ") and "loose-clock (" in line
    assert line.count("(") >= len(evaluation.not_asked)


# -- head and first screen


def test_the_head_fits_its_width_and_keeps_the_state() -> None:
    evaluation = evaluation_of({"device": "a device with rather a long name " * 3, "cooldown": 3})
    for width in (60, 80, 140):
        first = head_lines(evaluation, None, "not saved", width)[0]
        assert len(first) == width and first.endswith("  not saved")
    assert not head_lines(evaluation_of(), None, "", 80)[0].endswith(" ")


def test_the_first_screen_fits_80_columns_and_names_every_qubit_and_margin() -> None:
    evaluation = evaluation_of(second("Q2"))
    lines = first_screen(evaluation, None)
    assert all(len(line) <= 80 for line in lines)
    assert {"Q1", "Q2"} <= {line.split()[0] for line in lines if line}
    loud = {margin.name for margin in evaluation.margins if not (margin.limit.quiet and (margin.value or 0) > 10)}
    shown = {line.split()[0] for line in lines if line}
    assert loud <= shown
    assert shown.isdisjoint({"leakage", "calibration-time"})  # far from their bounds here, and they never inform


@pytest.mark.parametrize(
    ("columns", "lines", "small"), [(60, 16, False), (59, 16, True), (60, 15, True), (1, 1, True), (200, 50, False)]
)
def test_a_window_that_is_too_small(columns: int, lines: int, small: bool) -> None:
    message = too_small(columns, lines)
    assert bool(message) is small
    if small:
        assert str(columns) in message and str(lines) in message and "60" in message and "16" in message


# -- the line below the grids


@pytest.mark.parametrize(
    ("key", "part"),
    [
        ("magnet.field", "magnet.field: "),
        ("qubit.Q1.g", "qubit.Q1.g: "),
        ("larmor.frequency@Q1", "larmor.frequency: "),
        ("margin.rating", "rating 2.00 clear: "),
        ("margin.valley@Q1", "keep their distance"),
        ("margin.loose-clock", ""),
        ("", ""),
        ("nothing", ""),
    ],
)
def test_help_on_what_is_under_the_cursor(key: str, part: str) -> None:
    assert part in help_at(evaluation_of(), key)
    assert bool(help_at(evaluation_of(), key)) is (key not in {"", "nothing"})


def test_help_on_an_unknown_says_why() -> None:
    line = help_at(evaluation_of({"workload.longest_wait": None}), "coherence.wait_phase@Q1")
    assert line.startswith("coherence.wait_phase: ") and "Unknown: " in line and "workload.longest_wait" in line


FIELD = Address("magnet", None, "field")
RATING = Address("magnet", None, "rating")
READOUT = Address("workload", None, "readout")


@pytest.mark.parametrize(
    ("address", "text", "line"),
    [
        (FIELD, "350", "350 mT = 0.35 T. Then: "),
        (FIELD, "0.35 ± 0.001 T", "0.35 ± 0.001 T = 0.35 ± 1e-3 T. Then: "),
        (FIELD, "350 mT; measured", "350 mT = 0.35 T. Then: "),
        (READOUT, "parity", "parity: "),
        (RATING, "", "removed. Then: "),
    ],
)
def test_what_a_text_being_typed_would_do(address: Address, text: str, line: str) -> None:
    said, fine = typing_line(evaluation_of(), address, text)
    assert fine and said.startswith(line)


def test_the_worst_margin_that_a_text_would_make() -> None:
    said, fine = typing_line(evaluation_of(), FIELD, "2 T")
    assert fine
    assert said.endswith(". Then: " + headline(evaluation_of({"magnet.field": "2 T"}), None))


@pytest.mark.parametrize(
    ("address", "text", "part"),
    [
        (FIELD, "350 GHz", "use mT"),
        (FIELD, "", "required"),
        (READOUT, "partiy", "did you mean parity?"),
        (FIELD, "-1 mT", "more than"),
    ],
)
def test_why_a_text_is_not_accepted(address: Address, text: str, part: str) -> None:
    said, fine = typing_line(evaluation_of(), address, text)
    assert not fine and part in said
