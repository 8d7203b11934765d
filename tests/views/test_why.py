"""Explanations: every number of every demo plan explains itself, names its source and all that went in, ends in givens."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path

import pytest

from planner.declare import Missing, law_of
from planner.evaluate import Evaluation, evaluate
from planner.graph import HOST, PAIR_PLACES, givens, graph
from planner.plan import UnknownKey
from planner.planfile import load
from planner.references import references
from planner.views.formula import Formula, formula_of, meaning_of, notes_on
from planner.views.numbers import margin_text
from planner.views.putin import PutIn, is_found
from planner.views.why import explanation, known_keys
from tests.planmaking import plan_of, second

PLANS = Path(__file__).parents[2] / "plans"
DEMOS = ("sq6-03-drafted", "sq6-03", "gh4-11-drafted", "gh4-11", "minimal", "broken")
EVERY_LEVEL = 99


@cache
def read(name: str) -> Evaluation:
    if name == "broken":  # nearly nothing is known, and one qubit is dead
        return evaluate(
            plan_of(
                {
                    "qubit.Q1.rabi_frequency": None,
                    "workload.longest_wait": None,
                    "chip.electron_temperature": None,
                    "source.low": None,
                    **second("Q2", role="dead"),
                    **second("Q3", g="0.1, 2, 9"),
                }
            )
        )
    return evaluate(load(PLANS / f"{name}.toml").plan)


def text_of(evaluation: Evaluation, key: str, row: str = "", *, levels: int = EVERY_LEVEL) -> str:
    """The explanation with its broken lines joined."""
    return joined(explanation(evaluation, key, row, levels=levels))


def joined(lines: list[str]) -> str:
    return " ".join(" ".join(lines).split())


# -- every number of every plan


@pytest.mark.parametrize("plan", DEMOS)
def test_every_key_explains_itself_in_lines_that_fit(plan: str) -> None:
    evaluation = read(plan)
    for key in known_keys(evaluation):
        for levels in (1, 2, EVERY_LEVEL):
            lines = explanation(evaluation, key, levels=levels)
            assert lines
            assert [line for line in lines if len(line) > 100 or line != line.rstrip()] == []
            assert re.search(r"= -?(nan|inf)\b", joined(lines)) is None


@pytest.mark.parametrize("plan", DEMOS)
def test_every_result_names_its_law_its_reference_and_all_that_goes_in(plan: str) -> None:
    evaluation = read(plan)
    for derived in graph().order:
        if not is_found(evaluation, derived.key) or not evaluation.tables[derived.per.value]:
            continue
        lines = explanation(evaluation, derived.key, levels=1)
        text, declared, formula = joined(lines), law_of(derived.law), formula_of(derived.law)
        assert f"law: {declared.name}. " in text
        assert joined([formula.expression or formula.method]) in text
        assert joined([references()[declared.reference].text]) in text
        assert declared.place in text
        symbols = dict.fromkeys(line.split(" = ")[0].strip() for line in lines if " = " in line)
        assert [name for name in derived.sources if name not in symbols] == []
        assert [source.key for source in derived.sources.values() if source.key not in text] == []


@pytest.mark.parametrize("plan", DEMOS)
def test_every_result_ends_in_givens(plan: str) -> None:
    evaluation = read(plan)
    for derived in graph().order:
        if not is_found(evaluation, derived.key) or not evaluation.tables[derived.per.value]:
            continue
        text = text_of(evaluation, derived.key)
        assert "To go on" not in text
        ahead, rested = [(derived, 0)], {derived.key: derived}
        while ahead:
            for below, row in PutIn(evaluation, *ahead.pop()).below():
                if below.key not in rested:
                    rested[below.key] = below
                    ahead.append((below, row))
        assert [key for key in rested if not re.search(rf": {re.escape(key)}( of [^=:]+)? (=|is unknown)", text)] == []
        leaves = {source.key for each in rested.values() for source in each.sources.values()} - rested.keys()
        assert [key for key in leaves if key not in text] == []
        assert leaves & {*givens(), *HOST, *PAIR_PLACES}


@pytest.mark.parametrize("plan", DEMOS)
def test_an_unknown_names_its_root(plan: str) -> None:
    evaluation = read(plan)
    seen = 0
    for derived in graph().order:
        column = evaluation.columns[derived.key]
        for row in column.why if column.found else ():
            name = evaluation.tables[column.table][row]
            first = text_of(evaluation, derived.key, name, levels=1).partition(" law: ")[0]
            assert first.endswith(f"is unknown: {column.why[row]}.")
            seen += 1
    assert seen or plan not in {"minimal", "broken"}


@pytest.mark.parametrize("plan", DEMOS)
def test_every_margin_says_both_sides_and_its_verdict(plan: str) -> None:
    evaluation = read(plan)
    for margin in evaluation.margins:
        text = text_of(evaluation, margin.name)
        assert text.lower().startswith(margin.limit.meaning.lower())
        assert margin.verdict in text
        assert f"= {margin.compare.allowed}" in text
        assert f"= {margin.compare.expected}" in text
        assert str(margin.reason or margin.note) in text
        assert margin.row in text
        if margin.value is not None and margin.low is not None and margin.low < margin.value * 0.9:
            assert f"may be {margin_text(margin.low)} to" in text
    for name, reason in evaluation.not_asked.items():
        assert f"Not asked: {reason}." in text_of(evaluation, name)


@pytest.mark.parametrize("plan", DEMOS)
def test_every_given_says_what_it_is_and_where_it_is_used(plan: str) -> None:
    evaluation = read(plan)
    for key, given in givens().items():
        if is_found(evaluation, key):
            continue
        text = text_of(evaluation, key)
        assert text.lower().startswith(given.help.lower())
        table = key.rpartition(".")[0]
        if evaluation.tables.get(table, ("",)):
            assert "origin: " in text
            assert "used by: " in text
            users = [derived.key for derived in graph().order if key in {each.key for each in derived.sources.values()}]
            assert [user for user in users if user not in text] == []


# -- what is said


def test_a_result_begins_with_what_it_is_and_its_value() -> None:
    evaluation = evaluate(plan_of())
    lines = explanation(evaluation, "larmor.frequency", "Q1")
    # 2 x 13.99624 GHz/T x 0.5 T: plain arithmetic
    assert lines[0].startswith("Larmor frequency: larmor.frequency of Q1 = 13.996 GHz")
    assert "  formula: abs(g) * BOHR_MAGNETON_HZ * field" in lines
    text = joined(lines)
    assert "NIST SP 961 (2024); Bohr magneton in Hz/T; read" in text
    assert "BOHR_MAGNETON_HZ = 1.399624492e+10 Hz/T" in text


def test_typed_defaults_and_values_of_the_material_say_where_they_are_from() -> None:
    changes = {"magnet.noise_driven": "2 uT; measured CD3", "all_qubits.t1": "5 ms; guess"}
    evaluation = evaluate(plan_of(changes))
    noise = text_of(evaluation, "magnet.noise")
    assert "driven = 2 uT: magnet.noise_driven, slow rms field noise in driven mode" in noise
    assert "typed; measured CD3" in noise
    assert "persistent = 5 nT" in noise
    assert re.search(r"default, known to lie from 1 nT to 50 nT, from memory: ", noise)
    assert "typed for all qubits; guess" in text_of(evaluation, "coherence.error_per_gate", levels=1)
    bath = text_of(evaluation, "noise.bath")
    assert "of the material si-sige-natural" in bath
    assert "known to lie from 200000 to 700000, computed: " in bath  # data/materials.toml
    assert "from 29Si: spin 0.5, weight 1, coupling 4.3 ueV" in bath
    assert joined([references()["assali2011"].text]) in bath


def test_a_tolerance_a_word_and_an_idle_argument_are_said() -> None:
    evaluation = evaluate(plan_of({"magnet.elevation": "0 ± 0.5 deg", "workload.refocusing_pulses": 1}))
    assert "elevation_uncertainty = 0.5 deg: tolerance of magnet.elevation" in text_of(
        evaluation, "larmor.search_window"
    )
    assert "is_persistent = 0: 1 where magnet.mode is persistent, else 0" in text_of(evaluation, "magnet.noise")
    phase = text_of(evaluation, "coherence.wait_phase", levels=1)
    assert "not used while workload.refocusing_pulses = 1" in phase
    measured = evaluate(plan_of({"qubit.Q1.t2_star": "8 us"}))
    assert "not needed, since qubit.t2_star is typed" in text_of(measured, "noise.static", levels=1)


def test_the_required_accuracy_begins_with_what_cancels() -> None:
    lines = explanation(evaluate(plan_of()), "clock.required_accuracy")
    assert lines[0].startswith("A constant offset cancels")


def test_a_hole_with_one_g_value_is_asked_for_three() -> None:
    changes = {"chip.material": "ge-sige-natural", "workload.blockade_window": "300 ueV"}
    text = text_of(evaluate(plan_of(changes)), "noise.nuclear", levels=1)
    assert "axis_share = ?" in text
    assert "type three principal values" in text
    tensor = text_of(evaluate(plan_of(changes | {"qubit.Q1.g": "0.3, 0.4, 12"})), "noise.nuclear", levels=1)
    assert "type three principal values" not in tensor


def test_few_nuclei_are_a_bound() -> None:
    few = text_of(evaluate(plan_of({"model.nuclei": 1000})), "noise.nuclear", levels=1)  # 47 spinful ones
    assert "only an upper bound" in few.partition(" law: ")[0]
    many = text_of(evaluate(plan_of()), "noise.nuclear", levels=1)
    assert "only an upper bound" not in many.partition(" law: ")[0]


def test_the_levels_limit_the_tree_and_it_says_how_to_go_on() -> None:
    evaluation = read("sq6-03")
    one, two, all_ = (explanation(evaluation, "noise.total", levels=levels) for levels in (1, 2, EVERY_LEVEL))
    assert len(one) < len(two) < len(all_)
    assert "To go on, ask why for noise.static" in joined(one)
    assert "To go on" not in joined(all_)
    assert explanation(evaluation, "noise.total") == two
    heads = [line for line in all_ if re.search(r": noise\.static of Q1 = ", line) and "static =" not in line]
    assert len(heads) == 1  # each result once


def test_rows_are_named_or_the_worst_or_the_first() -> None:
    evaluation = read("sq6-03-drafted")
    assert "valley Q4 " in text_of(evaluation, "valley")
    assert "valley Q5 " in text_of(evaluation, "valley", "Q5")
    assert "larmor.frequency of Q1 =" in text_of(evaluation, "larmor.frequency")
    assert text_of(evaluation, "larmor.frequency@Q3") == text_of(evaluation, "larmor.frequency", "Q3")
    assert text_of(evaluation, "qubit.Q3.g") == text_of(evaluation, "qubit.g", "Q3")
    assert text_of(evaluation, "margin.wait@Q2") == text_of(evaluation, "wait", "Q2")
    assert "stage.temperature of still = 0.85 K" in text_of(evaluation, "stage.still.temperature")


def test_a_spare_qubit_is_not_judged() -> None:
    evaluation = evaluate(plan_of(second("Q2", role="spare")))
    assert "Q2 is not judged" in text_of(evaluation, "wait", "Q2")


def test_an_empty_table_has_nothing_to_explain() -> None:
    assert "there is no pair" in text_of(evaluate(plan_of()), "pair.exchange")


def test_a_given_found_from_results_is_explained_as_one_and_typed_as_the_other() -> None:
    found, typed = evaluate(plan_of()), evaluate(plan_of({"calibration.wait": "3 us; guess"}))
    assert "law: half" in text_of(found, "calibration.wait")
    assert "origin: typed; guess" in text_of(typed, "calibration.wait")
    assert all(key in known_keys(found) for key, given in givens().items() if given.missing is Missing.FOUND)


@pytest.mark.parametrize(("key", "row", "sentence"), [
    ("larmr.frequency", "", "there is no given, result or margin 'larmr.frequency'; did you mean larmor.frequency?"),
    ("valey", "", "there is no given, result or margin 'valey'; did you mean valley?"),
    ("qubit.gee", "", "there is no given, result or margin 'qubit.gee'; did you mean qubit.g?"),
    ("larmor.frequency", "R7", "there is no qubit 'R7': there are Q1"),
    ("qubit.g", "Q11", "there is no qubit 'Q11'; did you mean Q1?"),
    ("\x1b[31m", "", "there is no given, result or margin '\ufffd[31m'"),
])  # fmt: skip
def test_an_unknown_key_or_row_is_a_sentence(key: str, row: str, sentence: str) -> None:
    with pytest.raises(UnknownKey) as error:
        explanation(evaluate(plan_of()), key, row)
    assert str(error.value) == sentence


def test_names_of_margins_are_no_keys_of_anything_else() -> None:
    margins = {limit.name for limit in graph().limits}
    assert margins & {*givens(), *HOST, *(derived.key for derived in graph().order)} == set()


# -- formulas as they are read


def test_a_body_of_one_expression_is_read_in_plain_names() -> None:
    from planner.physics import clock, dephasing, exchange, gates, thermal

    read_as = {
        clock.white_fm: "sqrt(max(0.0, deviation_1s**2 - deviation_100s**2) / 0.99)",
        dephasing.free_flicker: "amplitude if unknown(measured_t2_star) else 0.0",
        gates.noise_time: "gate_time if unknown(wait) else wait",
        thermal.valley_distance: "abs(energy - valley_splitting)",
        exchange.composed_error: "(1 - (1 - 2 * single) * (1 - 2 * exchange)) / 2",
    }
    assert {law: formula_of(law).expression for law in read_as} == read_as
    assert notes_on(formula_of(gates.noise_time)) == ["unknown(x) holds where x is neither typed nor found"]


def test_a_formula_in_the_docstring_is_taken_and_left_out_of_the_meaning() -> None:
    def stated(x: float) -> float:
        """Twice.

        Formula: x +
            x
        """
        return x * 2

    def method(x: float) -> float:
        """A root.

        Formula: none; found by Newton.
        """
        return x

    def neither(x: float) -> float:
        """Silent."""
        x += 1
        return x

    assert (formula_of(stated), meaning_of(stated)) == (Formula("x + x"), "Twice.")
    assert formula_of(method) == Formula("", "found by Newton.")
    with pytest.raises(ValueError, match=r"law neither: .* needs 'Formula:'"):
        formula_of(neither)
