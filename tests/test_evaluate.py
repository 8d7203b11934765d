"""Evaluation of whole plans: roles, values found, unknowns with their reasons, and sweeps."""

from __future__ import annotations

from collections.abc import Mapping
from math import isnan, sqrt
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.declare import Missing
from planner.evaluate import Evaluation, evaluate, resolve_all
from planner.graph import graph
from planner.plan import Address, Plan, address_of, addresses, replaced, stated
from planner.planfile import load
from planner.soundness import problems
from tests.planmaking import Entry, of, plan_of, second, why
from tests.published import DAY, MU_B, UEV, H

PLANS = Path(__file__).parents[1] / "plans"
steady = settings(deadline=None, database=None, derandomize=True)

Q = "qubit.Q1."


# -- roles

FIVE: dict[str, Entry] = {
    **second("Q2", local_field="9, 0, 0 mT"), **second("S", role="spare", local_field="8.5, 0, 0 mT",
        valley_splitting=None),
    **second("D", role="dead", local_field="8.9, 0, 0 mT"), **second("Q3", local_field="13, 0, 0 mT"),
}  # fmt: skip


def test_a_spare_is_computed_and_no_partner_and_a_dead_one_is_left_out() -> None:
    evaluation = evaluate(plan_of(FIVE))
    assert evaluation.names == ("Q1", "Q2", "S", "Q3")
    assert evaluation.rows == (0, 1, 2, 4)
    assert evaluation.used == (0, 1, 3)
    per_mt = 2 * MU_B * 1e-3
    assert [of(evaluation, "larmor.spacing", row) / per_mt for row in range(4)] == pytest.approx([9, 4, 0.5, 4])
    assert of(evaluation, "noise.total", 2) > 0
    # its missing valley splitting is no reason for the smallest of those in use
    assert of(evaluation, "workload.blockade_window") == pytest.approx(150 * UEV)
    assert "valley_splitting" in why(evaluation, "valley.distance", 2)
    for margin in evaluation.margins:
        assert set(margin.rows) <= {0, 1, 3}
        assert margin.row in ("", "Q1", "Q2", "Q3")


def test_a_single_qubit_has_no_neighbour() -> None:
    evaluation = evaluate(plan_of(second(role="spare")))
    assert why(evaluation, "larmor.spacing", 0) == "no other qubit is in use"
    assert of(evaluation, "larmor.spacing", 1) == pytest.approx(2 * MU_B * 0.01)
    together = evaluate(plan_of(second(local_field="0, 0, 0 mT")))
    assert of(together, "larmor.spacing") == 0


# -- defaults found from results, and where values come from


FOUND: dict[str, tuple[Entry, float]] = {
    "calibration.wait": ("0.4 us", 4e-7), "workload.gate_time": ("300 ns", 3e-7),
    "calibration.record_length": ("10 min", 600.0), "clock.deviation_100s": ("3e-12", 3e-12),
    "workload.blockade_window": ("250 ueV", 250 * UEV), "source.lo": ("13.8 GHz", 13.8e9),
}  # fmt: skip


@pytest.mark.parametrize("key", FOUND)
def test_a_typed_value_replaces_the_one_found(key: str) -> None:
    text, value = FOUND[key]
    assert of(evaluate(plan_of({key: text})), key) == pytest.approx(value, rel=1e-12)


def test_values_found_where_the_plan_is_silent() -> None:
    evaluation = evaluate(plan_of(second(rabi_frequency="4 MHz", valley_splitting="90 ueV")))
    assert [of(evaluation, "workload.gate_time", row) for row in (0, 1)] == pytest.approx([250e-9, 125e-9])
    assert of(evaluation, "workload.blockade_window") == pytest.approx(90 * UEV)
    assert of(evaluation, "calibration.record_length") == 1800
    assert of(evaluation, "clock.deviation_100s") == pytest.approx(1e-12)
    for row in (0, 1):
        assert of(evaluation, "calibration.wait", row) == pytest.approx(of(evaluation, "coherence.t2_star", row) / 2)


def test_a_qubit_takes_what_all_qubits_state() -> None:
    evaluation = evaluate(plan_of({"all_qubits.t1": "5 ms", "all_qubits.g": 1.9, **second(t1="7 ms", g=None)}))
    assert [of(evaluation, "qubit.t1", row) for row in (0, 1)] == pytest.approx([5e-3, 7e-3])
    assert of(evaluation, "larmor.g", 1) == pytest.approx(1.9)
    sources = {key: entry.source for key, entry in resolve_all(evaluation.plan).items()}
    assert (sources["qubit.Q1.t1"], sources["qubit.Q2.t1"], sources["qubit.Q2.g"]) == (
        "all_qubits",
        "typed",
        "all_qubits",
    )
    assert (sources["model.nuclei"], sources["magnet.mode"], sources["magnet.field"]) == (
        "material",
        "default",
        "typed",
    )


# -- unknowns


ROOTS: dict[str, tuple[Mapping[str, Entry], str, list[str]]] = {
    "no Rabi frequency": ({Q + "rabi_frequency": None}, "qubit.rabi_frequency is not typed", [
        "workload.gate_time", "coherence.sequence_time", "coherence.gate_error", "coherence.error_per_gate",
        "coherence.gates_randomised", "coherence.reachable_gates", "coherence.allowed_noise", "clock.required_accuracy",
        "clock.required_stability", "clock.stability"]),
    "no wait": ({"workload.longest_wait": None}, "workload.longest_wait is not typed", [
        "coherence.wait_phase", "coherence.allowed_noise", "clock.required_accuracy"]),
    "no temperature": ({"chip.electron_temperature": None}, "chip.electron_temperature is not typed", [
        "thermal.ratio", "thermal.excited", "thermal.readout_error"]),
    "no charge noise in a local field": ({Q + "frequency_noise": None, Q + "local_field": "100, 0, 0 mT"},
        "it has a local field but no charge noise: type frequency_noise, relative_noise or gradient", [
        "noise.charge_amplitude", "noise.charge", "coherence.t2_star", "calibration.wait", "noise.calibration",
        "noise.total", "coherence.wait_phase", "coherence.gate_error", "coherence.reachable_gates"]),
    "only white noise in a local field": ({Q + "frequency_noise": None, Q + "white_noise": "10 Hz^2/Hz",
        Q + "local_field": "100, 0, 0 mT"},
        "it has a local field but no charge noise: type frequency_noise, relative_noise or gradient",
            ["coherence.t2_echo"]),
    "nothing to refocus": ({Q + "frequency_noise": None, "workload.refocusing_pulses": 1},
        "what refocusing leaves needs frequency_noise, relative_noise, gradient or white_noise", [
        "coherence.t2_echo", "coherence.wait_phase", "coherence.gates_aligned"]),
    "calibration too long": ({"calibration.wait": "1 ms"},
        "after calibration.wait the contrast is below 0.01: the wait is too long for T2*", [
        "noise.calibration", "noise.total", "coherence.wait_phase", "coherence.reachable_gates"]),
    "no T2*": ({}, "qubit.t2_star is not typed", ["noise.unexplained"]),
    "no valley splitting": ({Q + "valley_splitting": None}, "qubit.valley_splitting is not typed", ["valley.distance"]),
    "no valleys": ({"chip.material": "gaas"}, "the host has no valleys", ["valley.distance"]),
    "all locked": ({}, "everything is locked", ["clock.required_mismatch"]),
}  # fmt: skip


@pytest.mark.parametrize("case", ROOTS)
def test_an_unknown_names_its_root_through_every_step(case: str) -> None:
    typed, reason, keys = ROOTS[case]
    evaluation = evaluate(plan_of(typed))
    assert {key: why(evaluation, key) for key in keys} == dict.fromkeys(keys, reason)
    assert all(isnan(of(evaluation, key)) for key in keys)


KNOWN: dict[str, tuple[Mapping[str, Entry], list[str]]] = {
    "a measured T2* needs no charge noise": ({Q + "t2_star": "5 us", Q + "frequency_noise": None,
        Q + "local_field": "100, 0, 0 mT"},
        ["coherence.t2_star", "noise.total", "coherence.wait_phase", "coherence.gate_error",
            "coherence.reachable_gates"]),
    "an electron without local field has no charge noise": ({Q + "frequency_noise": None},
        ["noise.charge_amplitude", "noise.total", "coherence.gate_error"]),
    "a typed wait needs no gate time for its noise": ({Q + "rabi_frequency": None}, ["noise.charge", "noise.total",
        "coherence.wait_phase"]),
    "refocused, the phase needs no calibration": ({"workload.refocusing_pulses": 1, "calibration.wait": "1 ms"},
        ["coherence.wait_phase"]),
    "refocused, no wait is needed": ({"workload.refocusing_pulses": 1, "workload.longest_wait": None},
        ["coherence.allowed_noise"]),
    "without a wait the noise is that of a gate": ({"workload.longest_wait": None}, ["noise.charge", "noise.total",
        "clock.change"]),
    "a typed gate time gives the sequence": ({Q + "rabi_frequency": None, "workload.gate_time": "1 us"},
        ["coherence.sequence_time"]),
    "the clock takes a wait where the sequence is unknown": ({Q + "rabi_frequency": None}, ["clock.change",
        "noise.clock"]),
    "or a shot": ({Q + "rabi_frequency": None, "workload.longest_wait": None}, ["clock.change"]),
}  # fmt: skip


@pytest.mark.parametrize("case", KNOWN)
def test_what_is_not_needed_does_not_make_unknown(case: str) -> None:
    typed, keys = KNOWN[case]
    evaluation = evaluate(plan_of(typed))
    assert {key: why(evaluation, key) for key in keys} == dict.fromkeys(keys, "")


def test_the_clocks_run_is_the_first_known_of_sequence_wait_and_shot() -> None:
    base: dict[str, Entry] = {"clock.aging": "1 ppm/day", "calibration.interval": "1 s", "workload.gate_time": None}
    cases: list[tuple[dict[str, Entry], float]] = [
        ({}, 100 * 250e-9),
        ({Q + "rabi_frequency": None}, 1e-6),
        ({Q + "rabi_frequency": None, "workload.longest_wait": None}, 200e-6),
    ]
    for typed, run in cases:
        change = of(evaluate(plan_of({**base, **typed, "calibration.shots": 1})), "clock.change")
        expected = 1e-11 / sqrt(200e-6) + 1e-6 / DAY * (run / 2 + 1 + 100e-6)
        assert change == pytest.approx(expected, rel=1e-9)


def unexplained(evaluation: Evaluation) -> list[str]:
    """Results that are infinite, or unknown without a reason."""
    wrong = []
    for derived in graph().order:
        column = evaluation.columns[derived.key]
        values = column.base()
        unknown = np.isnan(values).any(axis=tuple(range(1, values.ndim)))
        if np.isinf(values).any() or {int(row) for row in np.flatnonzero(unknown)} != set(column.why):
            wrong.append(derived.key)
        wrong += [f"{derived.key}: a bound on nothing" for row in column.bound if row in column.why]
        wrong += [f"{derived.key}: empty reason" for reason in column.why.values() if not str(reason)]
    for margin in evaluation.margins:
        if (margin.value is None) != (margin.verdict == "unknown") or (margin.value is None and margin.reason is None):
            wrong.append(f"margin {margin.name}")
        if margin.value is not None and not 0 <= margin.value <= 1e6:
            wrong.append(f"margin {margin.name}: {margin.value}")
    return wrong


@pytest.mark.parametrize("name", sorted(path.name for path in PLANS.glob("*.toml")))
def test_demo_plans_leave_nothing_unexplained(name: str) -> None:
    assert unexplained(evaluate(load(PLANS / name).plan)) == []


FULL = plan_of({
    **second(t1="5 ms", t2_star="3 us", white_noise="50 Hz^2/Hz", gradient="0.1 mT/nm"), **second("S", role="spare"),
    Q + "relative_noise": "8 ppm/rtHz", Q + "gradient": "0.1 mT/nm", Q + "nuclear_noise": "11 kHz",
    Q + "tracked_noise": "5 kHz", Q + "local_field": "146, 0, 8 mT", "all_qubits.t1": "9 ms",
    "all_qubits.white_noise": "20 Hz^2/Hz", "all_qubits.rabi_frequency": "3 MHz", "magnet.mode": "persistent",
    "magnet.since_ramp": "4 h", "magnet.noise_persistent": "5, 5, 9 nT", "magnet.drift_persistent": "0.03 ppm/h",
    "model.nuclei": "5e4", "model.spinful_fraction": "0.1 %", "model.barrier_share": 0.01,
        "model.relative_noise": "4 ppm/rtHz",
    "clock.loose": "baseband", "clock.deviation_100s": "1e-12", "workload.readout_time": "10 us",
    "workload.refocusing_pulses": 1, "workload.blockade_window": "250 ueV", "workload.gate_time": "300 ns",
    "workload.idle_per_gate": "20 ns", "calibration.wait": "200 ns", "calibration.record_length": "1 h",
    "source.lo": "13.8 GHz",
})  # fmt: skip
LOOSE = [address for address in addresses(FULL)
         if stated(FULL, address) is not None and address.given.missing is not Missing.REQUIRED]  # fmt: skip


@steady
@given(
    st.sets(st.sampled_from(LOOSE)),
    st.sampled_from(["si-sige-natural", "ge-sige-natural", "gaas"]),
    st.sampled_from(["randomised", "aligned"]),
)
def test_any_part_of_a_plan_can_be_missing(removed: set[Address], material: str, accumulation: str) -> None:
    plan = FULL
    for address in LOOSE:
        if address in removed:
            plan = replaced(plan, address, None)
    plan = changed(changed(plan, "chip.material", material), "workload.accumulation", accumulation)
    assert problems(plan) == []
    assert unexplained(evaluate(plan)) == []


def changed(plan: Plan, key: str, word: str) -> Plan:
    """The plan with another word for a choice."""
    return replaced(plan, address_of(plan, key), word)


# -- where the program departs from the contract so far: each mark goes when its place is mended


@pytest.mark.parametrize(
    "typed",
    [{Q + "local_field": "-500, 0, 0 mT"}, {"chip.material": "ge-sige-natural", Q + "g": "0, 0, 12"}],
    ids=["no field", "no g"],
)
def test_a_qubit_that_does_not_precess_is_unknown(typed: dict[str, Entry]) -> None:
    evaluation = evaluate(plan_of(typed))
    assert unexplained(evaluation) == []
    assert why(evaluation, "larmor.search_window")


def test_a_loose_tone_of_no_frequency_is_not_infinite() -> None:
    # no whole MHz lies within 0.1 MHz of the only qubit, so the oscillator sits on it and the baseband tone is 0 Hz
    assert unexplained(evaluate(plan_of({"clock.loose": "baseband", "source.if_half_width": "0.1 MHz"}))) == []


def test_random_errors_need_no_refocused_noise() -> None:
    evaluation = evaluate(plan_of({Q + "frequency_noise": None, "workload.refocusing_pulses": 1}))
    assert why(evaluation, "coherence.reachable_gates") == ""
    assert why(evaluation, "coherence.sequence_error") == ""


AMISS: dict[str, tuple[str, list[float], str]] = {
    "g of one qubit": ("qubit.Q1.g", [1.9, 2.0, 2.1], ""), "field noise": ("magnet.noise_driven", [1e-6, 2e-6], "T"),
    "remanence": ("magnet.remanence", [1e-3, 2e-3, 3e-3], "T"),
    "unknown first": ("calibration.wait", [1e-3, 1e-7], "s"), "no wait last": ("workload.longest_wait", [1e-6, 0.0],
        "s"),
}  # fmt: skip


@pytest.mark.parametrize("case", AMISS)
def test_every_sweep_is_one_plan_for_each_value(case: str) -> None:
    same_as_one_by_one(*AMISS[case], second())


@pytest.mark.parametrize("key", ["workload.refocusing_pulses", "magnet.mode", "qubit.Q9.g", "magnet.feld"])
def test_what_can_not_be_swept_is_said(key: str) -> None:
    with pytest.raises(ValueError, match=f"{key} can't be swept"):
        evaluate(plan_of(second()), {key: np.array([0.0, 1.0])})


# -- sweeps


SWEEPS: dict[str, tuple[list[float], str]] = {
    "magnet.field": ([0.2, 0.35, 0.5], "T"), "magnet.azimuth": ([0.0, 0.4, 1.2], "rad"), "magnet.elevation": ([-0.1,
        0.0, 0.3], "rad"),
    "qubit.Q1.rabi_frequency": ([1e6, 2e6, 8e6], "Hz"), "qubit.Q2.valley_splitting": ([1e-23, 2e-23], "J"),
    "qubit.Q2.t2_star": ([1e-6, 9e-6], "s"), "qubit.Q1.nuclear_noise": ([1e4, 2e5], "Hz"), "qubit.Q1.t1": ([1e-3,
        1.0], "s"),
    "workload.longest_wait": ([1e-7, 1e-6, 4e-5], "s"), "calibration.interval": ([60.0, 1800.0, 36000.0], "s"),
    "calibration.wait": ([1e-7, 5e-7], "s"), "chip.electron_temperature": ([0.05, 0.3], "K"),
        "source.if_half_width": ([2e8, 5e8], "Hz"),
    "magnet.since_ramp": ([60.0, 7200.0], "s"), "clock.deviation_1s": ([1e-12, 1e-10], ""), "workload.gates": ([10.0,
        400.0], ""),
}  # fmt: skip


def same_as_one_by_one(key: str, values: list[float], unit: str, base: Mapping[str, Entry]) -> None:
    """Compare a sweep with one plan for each value, every result in every row."""
    swept = evaluate(plan_of(base), {key: np.array(values)})
    for index, value in enumerate(values):
        text = int(value) if key in ("workload.gates", "workload.refocusing_pulses") else f"{value!r} {unit}".strip()
        single = evaluate(plan_of({**base, key: text}), ranges=False)
        for derived in graph().order:
            one = single.columns[derived.key].values
            column = swept.columns[derived.key].values
            found = column[index] if column.ndim > one.ndim else column
            np.testing.assert_allclose(found, one, rtol=1e-9, err_msg=f"{derived.key} at {key} = {value}")


@pytest.mark.parametrize("key", SWEEPS)
@pytest.mark.parametrize("kind", ["electron", "hole"])
def test_a_sweep_is_one_plan_for_each_value(key: str, kind: str) -> None:
    hole: dict[str, Entry] = {
        "chip.material": "ge-sige-natural",
        "qubit.Q1.g": "0.3, 0.4, 12",
        "qubit.Q1.g_euler": "10, 1, 0 deg",
    }
    same_as_one_by_one(key, *SWEEPS[key], {**second(), **(hole if kind == "hole" else {})})


def test_two_sweeps_span_a_grid() -> None:
    fields, azimuths = np.array([0.2, 0.4, 0.5])[:, None], np.array([0.0, 0.5])[None, :]
    plan = plan_of({**second(g="1.9, 2.0, 2.1"), "magnet.rating": None})
    swept = evaluate(plan, {"magnet.field": fields, "magnet.azimuth": azimuths})
    assert swept.columns["noise.total"].values.shape == (3, 2, 2)
    one = evaluate(
        plan_of({**second(g="1.9, 2.0, 2.1"), "magnet.field": "0.4 T", "magnet.azimuth": "0.5 rad"}), ranges=False
    )
    np.testing.assert_allclose(swept.columns["noise.total"].values[1, 1], one.columns["noise.total"].values, rtol=1e-9)


def test_a_sweep_leaves_what_it_does_not_touch_alone() -> None:
    swept = evaluate(plan_of(), {"workload.longest_wait": np.array([1e-7, 1e-6])})
    assert swept.columns["larmor.frequency"].values.shape == (1,)
    assert swept.columns["coherence.wait_phase"].values.shape == (2, 1)


def test_a_result_as_a_quantity() -> None:
    quantity = evaluate(plan_of()).quantity("larmor.frequency")
    assert quantity.to("GHz").magnitude == pytest.approx([MU_B * 1e-9], rel=1e-9)
    assert float(evaluate(plan_of()).quantity("larmor.energy").to("joule").magnitude[0]) == pytest.approx(
        H * MU_B, rel=1e-9
    )
