"""Plans: what is given, what an absent value means, what is refused, and how one value is found and replaced."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import FrozenInstanceError
from math import pi, radians

import pytest

from planner.declare import Given, Lock, Missing, Nature
from planner.graph import givens
from planner.kinds import Quantity
from planner.plan import (
    Address,
    Plan,
    UnknownKey,
    address_of,
    addresses,
    key_of,
    replaced,
    resolved,
    stated,
    table_givens,
    unstated,
)
from planner.planfile import PlanError
from planner.soundness import problems
from planner.values import GivenError, bounds_text, read_value
from tests.planmaking import Entry, plan_of, second
from tests.published import DAY, HOUR, UEV

CHOICE, FACT, DEMAND = Nature.CHOICE, Nature.FACT, Nature.DEMAND
Default = float | str | tuple[float, ...] | Missing
REQUIRED, UNKNOWN, OFF, MATERIAL, FOUND = (
    Missing.REQUIRED,
    Missing.UNKNOWN,
    Missing.OFF,
    Missing.MATERIAL,
    Missing.FOUND,
)

# The tables of the contract: what is taken where nothing is typed (SI), nature, and the moment that locks a choice.
CONTRACT: Mapping[str, tuple[Default, Nature, Lock | None]] = {
    "format": (REQUIRED, FACT, None), "passed": ("wafer", FACT, None), "wanted_margin": (1.25, DEMAND, None),
    "magnet.field": (REQUIRED, CHOICE, Lock.OPEN), "magnet.elevation": (0.0, CHOICE, Lock.OPEN),
    "magnet.azimuth": (0.0, CHOICE, Lock.OPEN), "magnet.mode": ("driven", CHOICE, Lock.RAMP),
    "magnet.drift_driven": (5e-6 / HOUR, FACT, None), "magnet.drift_persistent": (0.05e-6 / HOUR, FACT, None),
    "magnet.noise_driven": (1e-6, FACT, None), "magnet.noise_persistent": (5e-9, FACT, None),
    "magnet.settle_slope": (12e-6 / HOUR, FACT, None), "magnet.since_ramp": (OFF, CHOICE, Lock.OPEN),
    "magnet.rating": (UNKNOWN, CHOICE, Lock.CLOSING), "magnet.remanence": (2e-3, FACT, None),
    "clock.deviation_1s": (1e-11, CHOICE, Lock.OPEN), "clock.deviation_100s": (FOUND, CHOICE, Lock.OPEN),
    "clock.aging": (1e-10 / DAY, CHOICE, Lock.OPEN), "clock.loose": ("none", CHOICE, Lock.OPEN),
    "clock.loose_drift": (2e-7, FACT, None),
    "source.low": (UNKNOWN, CHOICE, Lock.CLOSING), "source.high": (UNKNOWN, CHOICE, Lock.CLOSING),
    "source.guard": (50e6, DEMAND, None), "source.lo": (FOUND, CHOICE, Lock.OPEN),
    "source.if_half_width": (500e6, CHOICE, Lock.CLOSING), "source.image": (1e-4, FACT, None),
    "source.leakage": (1e-4, FACT, None), "source.power": (UNKNOWN, CHOICE, Lock.CLOSING),
    "chip.material": (REQUIRED, CHOICE, Lock.WAFER), "chip.electron_temperature": (UNKNOWN, FACT, None),
    "chip.drive_leak": (1.0, CHOICE, Lock.BONDING), "chip.micromagnet_field": (OFF, FACT, None),
    "chip.micromagnet_axis": ((1.0, 0.0, 0.0), FACT, None),
    "model.spinful_fraction": (MATERIAL, CHOICE, Lock.WAFER), "model.nuclei": (MATERIAL, FACT, None),
    "model.barrier_germanium": (MATERIAL, FACT, None), "model.barrier_share": (MATERIAL, FACT, None),
    "model.barrier_nuclei": (MATERIAL, FACT, None), "model.barrier_spinful": (MATERIAL, CHOICE, Lock.WAFER),
    "model.charge_noise": (MATERIAL, FACT, None), "model.displacement": (MATERIAL, FACT, None),
    "model.relative_noise": (MATERIAL, FACT, None),
    "workload.gates": (REQUIRED, DEMAND, None), "workload.gate_time": (FOUND, CHOICE, Lock.OPEN),
    "workload.idle_per_gate": (0.0, CHOICE, Lock.OPEN), "workload.longest_wait": (UNKNOWN, CHOICE, Lock.OPEN),
    "workload.refocusing_pulses": (0.0, CHOICE, Lock.OPEN), "workload.accumulation": ("randomised", DEMAND, None),
    "workload.allowed_phase": (0.25, DEMAND, None), "workload.allowed_gate_error": (1e-3, DEMAND, None),
    "workload.allowed_sequence_error": (0.1, DEMAND, None), "workload.source_share": (0.3, DEMAND, None),
    "workload.readout": ("parity", CHOICE, Lock.CLOSING), "workload.readout_time": (OFF, CHOICE, Lock.OPEN),
    "workload.allowed_readout_error": (0.01, DEMAND, None), "workload.blockade_window": (FOUND, FACT, None),
    "workload.valley_window": (8 * UEV, DEMAND, None), "workload.crosstalk_error": (1e-3, DEMAND, None),
    "workload.exchange_gates": (0.0, DEMAND, None), "workload.allowed_pair_error": (1e-2, DEMAND, None),
    "calibration.interval": (1800.0, CHOICE, Lock.OPEN), "calibration.wait": (FOUND, CHOICE, Lock.OPEN),
    "calibration.shots": (1000.0, CHOICE, Lock.OPEN), "calibration.contrast": (0.6, FACT, None),
    "calibration.shot_time": (200e-6, CHOICE, Lock.OPEN), "calibration.record_length": (FOUND, CHOICE, Lock.OPEN),
    "calibration.allowed_time_share": (0.05, DEMAND, None),
    "qubit.name": (REQUIRED, FACT, None), "qubit.role": ("use", CHOICE, Lock.OPEN), "qubit.g": (REQUIRED, FACT, None),
    "qubit.g_euler": ((0.0, 0.0, 0.0), FACT, None), "qubit.local_field": ((0.0, 0.0, 0.0), FACT, None),
    "qubit.gradient": (OFF, FACT, None), "qubit.rabi_frequency": (UNKNOWN, CHOICE, Lock.OPEN),
    "qubit.valley_splitting": (UNKNOWN, FACT, None), "qubit.frequency_noise": (OFF, FACT, None),
    "qubit.relative_noise": (OFF, FACT, None), "qubit.white_noise": (OFF, FACT, None),
    "qubit.nuclear_noise": (OFF, FACT, None), "qubit.tracked_noise": (OFF, FACT, None), "qubit.t1": (OFF, FACT, None),
    "qubit.t2_star": (OFF, FACT, None), "qubit.note": (OFF, FACT, None),
}  # fmt: skip


def absent(key: str, given: Given) -> Default:
    """What the program takes where nothing is typed: a value in SI, a word, or what its absence means."""
    if given.missing is not Missing.DEFAULT:
        return given.missing
    value = unstated(Plan(), key.rpartition(".")[0], key.rpartition(".")[2]).value
    return value.value if isinstance(value, Quantity) else str(value)


@pytest.mark.parametrize("key", CONTRACT)
def test_a_given_is_what_the_contract_says(key: str) -> None:
    given, (default, nature, locks) = givens()[key], CONTRACT[key]
    found = absent(key, given)
    numbers = isinstance(default, float | tuple)
    assert found == (pytest.approx(default, rel=1e-12) if numbers else default)
    assert (given.nature, given.locks) == (nature, locks)


def test_only_choices_lock_and_every_choice_does() -> None:
    assert [key for key, given in givens().items() if (given.nature is CHOICE) != (given.locks is not None)] == []


def test_the_moments_are_in_order() -> None:
    assert [lock.word for lock in Lock] == ["wafer", "bonding", "closing", "cooling", "ramp", "open"]
    assert list(Lock) == sorted(Lock)
    assert list(givens()["passed"].options) == ["none", "wafer", "bonding", "closing", "cooling", "ramp"]


@pytest.mark.parametrize("key", [key for key, given in givens().items() if given.example])
def test_the_example_of_a_given_is_accepted(key: str) -> None:
    given = givens()[key]
    read_value(given, given.example)
    assert given.help


MATERIALS: dict[str, dict[str, float | None]] = {
    # physics of the contract: isotope fractions of NIST, atoms by geometry, barrier 0.3, 0.02 and 1e5 for silicon wells
    "si-sige-natural": {"spinful_fraction": 0.04685, "nuclei": 4e5, "barrier_germanium": 0.3, "barrier_share": 0.02,
                        "barrier_nuclei": 1e5, "barrier_spinful": 0.0775, "relative_noise": None},
    "si-sige-800ppm": {"spinful_fraction": 8e-4, "barrier_share": 0.02, "relative_noise": None},
    "ge-sige-natural": {"spinful_fraction": 0.0775, "nuclei": 2e6, "barrier_share": 0.0, "relative_noise": 8e-6},
    "gaas": {"spinful_fraction": 1.0, "nuclei": 1.7e6, "barrier_share": 0.0, "relative_noise": None},
}  # fmt: skip


@pytest.mark.parametrize("material", MATERIALS)
def test_what_a_material_brings(material: str) -> None:
    plan = plan_of({"chip.material": material})
    for name, expected in MATERIALS[material].items():
        value, source = resolved(plan, Address("model", None, name))
        assert source == ("" if expected is None else "material")
        found = value.value if isinstance(value, Quantity) else None
        assert found == (None if expected is None else pytest.approx(expected))


# -- refused values

REFUSED: dict[str, list[Entry]] = {
    "magnet.field": ["0 T", "-1 T", "51 T", 0.5, "5 GHz"], "magnet.elevation": ["91 deg"], "magnet.rating": ["0 T"],
    "magnet.since_ramp": ["0 h"], "magnet.drift_driven": ["-1 ppm/h"], "magnet.mode": ["drive", ""],
    "clock.deviation_1s": [0, 1], "clock.loose_drift": [-1e-7], "source.low": ["0 GHz"], "source.guard": ["-1 MHz"],
    "source.if_half_width": ["0 MHz"], "chip.material": ["silicon", "si-fin"],
    "chip.electron_temperature": ["0 mK", "25 degC"], "chip.micromagnet_axis": ["0, 0, 0", "1, 0"],
    "model.spinful_fraction": [1.1], "model.nuclei": [0],
    "workload.gates": [0, 1.5, "-3"], "workload.gate_time": ["0 ns"], "workload.longest_wait": ["-1 us"],
    "workload.idle_per_gate": ["-1 ns"], "workload.refocusing_pulses": [-1, 1.5], "workload.allowed_phase": ["0 rad"],
    "workload.allowed_gate_error": [0, 0.5], "workload.allowed_sequence_error": [0, "0.33334"],
    "workload.source_share": [0, 1.01], "workload.readout_time": ["0 us"], "workload.allowed_readout_error": [0, 0.5],
    "workload.blockade_window": ["0 ueV"], "workload.valley_window": ["0 ueV"], "workload.crosstalk_error": [0],
    "calibration.interval": ["0 min"], "calibration.wait": ["0 us"], "calibration.shots": [0],
    "calibration.contrast": [0, 1.01], "calibration.shot_time": ["0 us"], "calibration.record_length": ["0 s"],
    "qubit.Q1.g": [0, "0, 0, 0", "1, 2", "200"], "qubit.Q1.rabi_frequency": ["0 MHz"], "qubit.Q1.role": ["unused"],
    "qubit.Q1.valley_splitting": ["0 ueV"], "qubit.Q1.t1": ["0 ms"], "qubit.Q1.t2_star": ["0 us"],
    "qubit.Q1.local_field": ["100 mT", "1, 2 mT"], "qubit.Q1.frequency_noise": ["-1 kHz/rtHz"], "format": [2, 0, "one"],
}  # fmt: skip


@pytest.mark.parametrize(("key", "value"), [(key, value) for key, values in REFUSED.items() for value in values])
def test_a_value_out_of_range_is_refused_with_its_key_and_text(key: str, value: Entry) -> None:
    with pytest.raises(PlanError) as caught:
        plan_of({key: value})
    (sentence,) = caught.value.sentences
    assert sentence.startswith("bench.toml:")
    assert f": {key}: " in sentence
    assert any(part.rstrip(",") in sentence for part in str(value).split(" "))


ACCEPTED: dict[str, list[Entry]] = {
    "workload.idle_per_gate": ["0 ns"], "workload.longest_wait": ["0 us"], "source.guard": ["0 MHz"],
    "workload.allowed_sequence_error": ["0.3333"], "workload.gates": [1, "1e6"], "workload.source_share": [1],
    "magnet.elevation": ["90 deg", "-90 deg"], "magnet.noise_driven": ["1 uT", "1500, 400, 400 nT"],
        "calibration.contrast": [1],
    "qubit.Q1.g": [-0.44, "0.28, 0.44, 11.8"], "qubit.Q1.local_field": ["-146, 0, 8 mT"], "clock.aging": ["0 /day"],
}  # fmt: skip


@pytest.mark.parametrize(("key", "value"), [(key, value) for key, values in ACCEPTED.items() for value in values])
def test_the_ends_of_a_range_are_accepted(key: str, value: Entry) -> None:
    plan = plan_of({key: value})
    assert stated(plan, address_of(plan, key)) is not None


def test_a_refusal_says_what_would_be_accepted() -> None:
    with pytest.raises(GivenError, match="must be more than 0 mT and at most 5e\\+04 mT"):
        read_value(givens()["magnet.field"], "0 mT")
    assert bounds_text(givens()["workload.allowed_gate_error"], "%") == "more than 0 % and less than 50 %"
    assert bounds_text(givens()["device"], "") == ""
    with pytest.raises(GivenError, match="use one of driven, persistent; did you mean persistent"):
        read_value(givens()["magnet.mode"], "persistant")


# -- plans as a whole


@pytest.mark.parametrize("key", ["format", "magnet.field", "chip.material", "workload.gates", "qubit.Q1.g"])
def test_the_required_givens(key: str) -> None:
    with pytest.raises(PlanError) as caught:
        plan_of({key: None})
    (sentence,) = caught.value.sentences
    assert f"{key}: is required" in sentence


def test_a_g_of_all_qubits_is_enough() -> None:
    assert problems(plan_of({"qubit.Q1.g": None, "all_qubits.g": 2.0})) == []


def test_a_plan_needs_a_qubit() -> None:
    assert [problem.key for problem in problems(Plan())] == [
        "format",
        "magnet.field",
        "chip.material",
        "workload.gates",
        "qubit",
    ]


def row(name: str, *others: str) -> Plan:
    """A plan whose first qubit has another name."""
    plan = plan_of({key: value for other in others for key, value in second(other).items()})
    return replaced(plan, Address("qubit", 0, "name"), name)


@pytest.mark.parametrize("name", ["Q.1", "Q=1", "Q'1", 'Q"1', ""])
def test_a_name_with_a_mark_of_the_file_is_refused(name: str) -> None:
    (problem,) = problems(row(name))
    assert "can't be a name" in problem.sentence


def test_a_name_is_used_once() -> None:
    (problem,) = problems(row("Q2", "Q2"))
    assert problem == ("qubit.Q2.name", "the name 'Q2' is used twice: give every qubit its own")


CONTRADICTIONS: dict[str, tuple[dict[str, Entry], str, str]] = {
    "band upside down": ({"source.low": "18 GHz", "source.high": "1 GHz"}, "source.high",
        "is not above source.low '18 GHz'"),
    "band of no width": ({"source.low": "18 GHz"}, "source.high", "is not above source.low"),
    "nobody in use": ({"qubit.Q1.role": "spare"}, "qubit.role", "no qubit is in use"),
    "short gate": ({"workload.gate_time": "249 ns"}, "workload.gate_time",
        "'249 ns' is shorter than half a Rabi period of Q1, 250 ns"),
    "short gate of a second": ({**second(rabi_frequency="1 MHz"), "workload.gate_time": "300 ns"}, "workload.gate_time",
        "shorter than half a Rabi period of Q2, 500 ns"),
    "short gate by all qubits": ({"qubit.Q1.rabi_frequency": None, "all_qubits.rabi_frequency": "1 MHz",
        "workload.gate_time": "300 ns"}, "workload.gate_time", "of Q1, 500 ns"),
}  # fmt: skip


@pytest.mark.parametrize("case", CONTRADICTIONS)
def test_givens_that_contradict_each_other(case: str) -> None:
    changes, key, words = CONTRADICTIONS[case]
    with pytest.raises(PlanError) as caught:
        plan_of(changes)
    (sentence,) = caught.value.sentences
    assert f": {key}: " in sentence
    assert words in sentence


def test_a_gate_of_half_a_rabi_period_is_long_enough() -> None:
    assert problems(plan_of({"workload.gate_time": "250 ns"})) == []
    third = plan_of({"workload.gate_time": "166.66666666667 ns", "qubit.Q1.rabi_frequency": "3 MHz"})
    assert problems(third) == []


def test_a_dead_qubit_is_left_out_of_the_gate_time() -> None:
    assert problems(plan_of({**second(role="dead", rabi_frequency="100 kHz"), "workload.gate_time": "300 ns"})) == []


# -- places


def test_a_value_is_typed_of_all_qubits_of_the_material_or_a_default() -> None:
    plan = plan_of({"all_qubits.t1": "5 ms", **second(t1="7 ms"), "model.nuclei": "1e5"})
    found = {key: resolved(plan, address_of(plan, key)) for key in (
        "qubit.Q1.t1", "qubit.Q2.t1", "model.nuclei", "model.barrier_share", "magnet.azimuth", "magnet.since_ramp",
            "qubit.Q1.note")}  # fmt: skip
    assert {key: entry.source for key, entry in found.items()} == {
        "qubit.Q1.t1": "all_qubits", "qubit.Q2.t1": "typed", "model.nuclei": "typed", "model.barrier_share": "material",
        "magnet.azimuth": "default", "magnet.since_ramp": "", "qubit.Q1.note": ""}  # fmt: skip
    assert isinstance(found["qubit.Q1.t1"].value, Quantity)
    assert found["qubit.Q1.t1"].value.text == "5 ms"


def test_every_place_has_a_key_that_leads_back() -> None:
    plan = plan_of(second())
    places = list(addresses(plan))
    assert len(places) == len(set(places))
    assert {address_of(plan, key_of(plan, place)) for place in places} == set(places)
    assert Address("all_qubits", None, "name") not in places


@pytest.mark.parametrize(
    ("key", "nearest"),
    [("magnet.feild", "magnet.field"), ("qubit.Q1.rabi_freqency", "qubit.Q1.rabi_frequency"), ("qubit.Q3.g",
        "qubit.Q1.g"),
     ("passd", "passed"), ("all_qubits.name", "")],
)  # fmt: skip
def test_an_unknown_key_names_the_nearest(key: str, nearest: str) -> None:
    with pytest.raises(UnknownKey) as caught:
        address_of(plan_of(), key)
    assert f"there is no given '{key}'" in str(caught.value)
    assert nearest in str(caught.value)


def test_replacing_makes_a_new_plan() -> None:
    plan = plan_of(second())
    place = address_of(plan, "qubit.Q2.t1")
    value = read_value(place.given, "3 ms")
    after = replaced(plan, place, value)
    assert (stated(plan, place), stated(after, place)) == (None, value)
    assert after.qubit[0] is plan.qubit[0]
    assert replaced(after, place, None) == plan
    assert replaced(plan, address_of(plan, "magnet.mode"), "persistent").magnet.mode == "persistent"
    assert replaced(plan, address_of(plan, "title"), "new").header.title == "new"
    with pytest.raises(FrozenInstanceError):
        plan.magnet = after.magnet  # type: ignore[misc]


def test_si_values_of_typed_givens() -> None:
    plan = plan_of({"magnet.azimuth": "51 ± 0.5 deg; drawing", "qubit.Q1.local_field": "146 ± 3, 0 ± 1, 8 ± 1 mT"})
    azimuth = stated(plan, address_of(plan, "magnet.azimuth"))
    assert isinstance(azimuth, Quantity)
    assert azimuth.value == pytest.approx(radians(51))
    assert azimuth.tolerance == pytest.approx(radians(0.5))
    assert azimuth.origin_class == "drawing"
    local = stated(plan, address_of(plan, "qubit.Q1.local_field"))
    assert isinstance(local, Quantity)
    assert local.value == pytest.approx((0.146, 0.0, 0.008))
    assert local.tolerance == pytest.approx((3e-3, 1e-3, 1e-3))
    assert table_givens("magnet")["elevation"].most == pytest.approx(pi / 2)
