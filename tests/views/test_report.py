"""The report of a plan: JSON in full precision, text that is stable for a diff, and the lines of `check`."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from typing import Any

import pytest

from planner.evaluate import Evaluation, evaluate
from planner.views.report import check_lines, plan_hash, report_json, report_text
from tests.planmaking import Entry, plan_of, second


def evaluation_of(changes: Mapping[str, Entry] | None = None) -> Evaluation:
    return evaluate(plan_of(changes))


def document(evaluation: Evaluation) -> dict[str, Any]:
    """The JSON, read strictly: no nan or infinity."""
    found: dict[str, Any] = json.loads(report_json(evaluation, "bench.toml"), parse_constant=pytest.fail)
    return found


def test_the_json_has_the_agreed_entries() -> None:
    found = document(evaluation_of(second("Q2")))
    assert list(found) == [
        "planner",
        "format",
        "edition",
        "hash",
        "plan",
        "givens",
        "results",
        "margins",
        "not_asked",
        "verdict",
    ]
    assert found["format"] == 1 and found["plan"] == "bench.toml"
    for given in found["givens"].values():
        assert {"text", "tolerance", "unit", "origin", "from"} <= set(given)
        assert ("value" in given) or ("values" in given)
        assert given["from"] in {"typed", "all_qubits", "material", "default"}
    for result in found["results"].values():
        assert "unit" in result and (("value" in result) != ("values" in result))
    for margin in found["margins"]:
        assert list(margin) == [
            "name",
            "worst",
            "allowed",
            "expected",
            "unit",
            "margin",
            "low",
            "high",
            "verdict",
            "until",
            "why",
        ]
    assert not set(found["givens"]) & set(found["results"])


def test_givens_are_in_si_with_text_tolerance_and_origin() -> None:
    givens = document(
        evaluation_of({"magnet.field": "650 mT ± 1 %; drawing", "all_qubits.t1": "80 ms", "qubit.Q1.t1": None})
    )["givens"]
    assert givens["magnet.field"] == {
        "text": "650 mT ± 1 %",
        "value": 0.65,
        "tolerance": pytest.approx(0.0065),
        "unit": "T",
        "origin": "drawing",
        "from": "typed",
    } | {"text": givens["magnet.field"]["text"]}
    assert givens["magnet.field"]["text"].startswith("650 mT ± 1 %")
    assert givens["qubit.Q1.t1"]["value"] == 0.08 and givens["qubit.Q1.t1"]["from"] == "all_qubits"
    assert givens["magnet.mode"]["value"] == "driven" and givens["magnet.mode"]["from"] == "default"
    assert givens["model.nuclei"]["from"] == "material"
    assert givens["workload.gate_time"]["values"] == {"Q1": pytest.approx(250e-9)}  # half a period of 2 MHz


def test_results_are_those_of_the_evaluation_to_the_last_digit() -> None:
    evaluation = evaluation_of(second("Q2"))
    results = document(evaluation)["results"]
    for key, entry in results.items():
        column = evaluation.columns[key].base()
        shown = [entry["value"]] if "value" in entry else list(entry["values"].values())
        for value, exact in zip(shown, column.ravel(), strict=True):
            assert value == exact or (value is None and math.isnan(exact))


def test_an_unknown_is_null_with_its_reason() -> None:
    found = document(evaluation_of({"workload.longest_wait": None, **second("Q2")}))
    phase = found["results"]["coherence.wait_phase"]
    assert phase["values"] == {"Q1": None, "Q2": None} and set(phase["why"]) == {"Q1", "Q2"}
    assert "workload.longest_wait" in phase["why"]["Q1"]
    wait = next(margin for margin in found["margins"] if margin["name"] == "wait")
    assert wait["margin"] is None and wait["verdict"] == "unknown" and "workload.longest_wait" in wait["why"]
    assert found["verdict"] in {"short", "unknown"}


def test_margins_are_allowed_over_expected() -> None:
    for margin in document(evaluation_of(second("Q2")))["margins"]:
        if margin["expected"] and 0 < margin["margin"] < 1e6:
            assert margin["margin"] == pytest.approx(margin["allowed"] / margin["expected"])


@pytest.mark.parametrize(
    ("changes", "same"),
    [
        ({}, True),
        ({"magnet.field": "0.5 T; measured CD12"}, True),
        ({"device": "D"}, False),
        ({"magnet.field": "501 mT"}, False),
        ({"magnet.field": "500 ± 1 mT"}, False),
        ({"magnet.mode": "persistent"}, False),
        ({"magnet.mode": "driven"}, True),
    ],
)
def test_the_hash_is_that_of_the_values(changes: Mapping[str, Entry], same: bool) -> None:
    here, there = plan_hash(evaluation_of()), plan_hash(evaluation_of(changes))
    assert len(there) == 16 and set(there) <= set("0123456789abcdef")
    assert (here == there) is same


def test_the_text_holds_every_margin_and_result_and_differs_only_where_the_plan_does() -> None:
    before, after = (evaluation_of({"workload.gates": gates}) for gates in (100, 101))
    lines, others = (report_text(evaluation, None, "bench.toml") for evaluation in (before, after))
    words = {line.split()[0] for line in lines if line}
    assert {margin.name for margin in before.margins} <= words
    assert {key for key, entry in document(before)["results"].items() if entry.get("values") != {}} <= words
    assert lines == report_text(before, None, "bench.toml")
    changed = [line.split()[0] for line, other in zip(lines, others, strict=True) if line != other]
    assert "hash" in changed and "larmor.frequency" not in changed and "sequence" in changed
    assert all(line == line.rstrip() for line in lines)


def test_the_lines_of_check_begin_with_name_and_verdict() -> None:
    evaluation = evaluation_of({"qubit.Q1.valley_splitting": "58 ueV"})
    lines = check_lines(evaluation, "a.toml")
    assert lines[0] == "a.toml: short"
    assert [line.split()[0] for line in lines[2:-1]] == [margin.name for margin in evaluation.ranked]
    assert lines[-1].startswith("not asked: ")
