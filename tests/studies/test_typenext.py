"""What to type next: the given that makes most margins known, alone or with one more."""

from __future__ import annotations

from collections.abc import Mapping

import pytest

from planner.evaluate import Evaluation, evaluate
from planner.margins import UNKNOWN
from planner.plan import address_of, replaced
from planner.studies.typenext import TypeNext, type_next
from planner.values import read_value
from tests.planmaking import Entry, plan_of, second


def evaluation_of(changes: Mapping[str, Entry]) -> Evaluation:
    return evaluate(plan_of(changes))


def unknown(evaluation: Evaluation) -> int:
    return sum(margin.code == UNKNOWN for margin in evaluation.margins)


def with_examples(evaluation: Evaluation, *keys: str) -> Evaluation:
    plan = evaluation.plan
    for key in filter(None, keys):
        address = address_of(plan, key)
        plan = replaced(plan, address, read_value(address.given, address.given.example))
    return evaluate(plan)


def test_nothing_where_all_is_known() -> None:
    evaluation = evaluation_of({})
    assert unknown(evaluation) == 0 and type_next(evaluation) is None


@pytest.mark.parametrize(
    ("changes", "found"),
    [
        ({"magnet.rating": None}, TypeNext("magnet.rating", "", 1)),
        ({"chip.electron_temperature": None}, TypeNext("chip.electron_temperature", "", 1)),
        (
            {"magnet.rating": None, "chip.electron_temperature": None, "workload.longest_wait": None},
            "workload.longest_wait",
        ),
    ],
)
def test_the_given_that_makes_most_known(changes: Mapping[str, Entry], found: TypeNext | str) -> None:
    following = type_next(evaluation_of(changes))
    assert following is not None
    assert following == found if isinstance(found, TypeNext) else following.key == found


def test_two_that_are_needed_together_are_named_together() -> None:
    following = type_next(evaluation_of({"source.low": None, "source.high": None}))
    assert following is not None
    assert {following.key, following.also} == {"source.low", "source.high"} and following.known >= 1


def test_what_every_qubit_lacks_is_typed_for_all_of_them() -> None:
    lacking = {"qubit.Q1.rabi_frequency": None, **second("Q2", rabi_frequency=None)}
    following = type_next(evaluation_of(lacking))
    assert following is not None and following.key == "all_qubits.rabi_frequency"
    one = type_next(evaluation_of({**second("Q2", rabi_frequency=None)}))
    assert one is not None and one.key == "qubit.Q2.rabi_frequency"


@pytest.mark.parametrize(
    "missing",
    [
        ("workload.longest_wait",),
        ("workload.longest_wait", "qubit.Q1.rabi_frequency", "source.low", "source.high"),
        ("magnet.rating", "chip.electron_temperature", "qubit.Q1.valley_splitting"),
        ("source.low", "source.high"),
    ],
)
def test_as_many_become_known_as_is_said_and_no_single_given_does_better(missing: tuple[str, ...]) -> None:
    evaluation = evaluation_of(dict.fromkeys(missing))
    following = type_next(evaluation)
    assert following is not None
    assert unknown(evaluation) - unknown(with_examples(evaluation, following.key, following.also)) == following.known
    assert all(unknown(evaluation) - unknown(with_examples(evaluation, key)) <= following.known for key in missing)


def test_following_it_makes_everything_known() -> None:
    evaluation = evaluation_of(
        dict.fromkeys(
            (
                "magnet.rating",
                "source.low",
                "source.high",
                "chip.electron_temperature",
                "workload.longest_wait",
                "qubit.Q1.rabi_frequency",
                "qubit.Q1.valley_splitting",
                "qubit.Q1.frequency_noise",
            )
        )
    )
    for _ in range(12):
        if (following := type_next(evaluation)) is None:
            break
        evaluation = with_examples(evaluation, following.key, following.also)
    assert unknown(evaluation) == 0
