"""From 1 uT to 30 T, 1 mK to 4 K, 1 to 1e9 gates, 0 to 10 000 pulses: no warning, nan or infinity, a reason for every unknown;
and a plan that gives everything, in which every result of the contract stands.

Warnings are errors in every test. The flicker terms of the clock across a gap of 1e9 runs are checked against 50 digits in
`tests/physics/test_clock.py` (`test_flicker_keeps_its_digits_where_the_plain_sum_cancels`).
"""

from __future__ import annotations

import json
from itertools import product
from math import isfinite

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.evaluate import Evaluation, evaluate
from planner.materials import material_titles
from planner.planfile import read
from planner.soundness import problems
from planner.views.report import report_json
from tests.planmaking import BENCH, Entry, plan_of, second, text_of

FIELDS, KELVINS = ("1 uT", "1 mT", "1 T", "30 T"), ("1 mK", "100 mK", "4 K")
GATES, PULSES = (1, 1000, 10**9), (0, 1, 10_000)


def assert_sound(evaluation: Evaluation) -> None:
    """No infinity anywhere, a reason for each unknown, and a report without nan."""
    for key, column in evaluation.columns.items():
        if not column.found or not column.values.size:
            continue
        assert not np.isinf(column.values).any(), key
        rows = ~np.isfinite(column.base()).reshape(len(evaluation.tables[column.table]), -1).all(axis=-1)
        for row in np.flatnonzero(rows):
            assert str(column.why.get(int(row), "")), f"{key} of row {row} is unknown without a reason"
    for margin in evaluation.margins:
        numbers = (margin.value, margin.low, margin.high, margin.allowed, margin.expected)
        assert all(number is None or isfinite(number) for number in numbers), margin.name
        assert (margin.value is None) == (margin.verdict == "unknown") or margin.verdict == "short", margin.name
    report_json(evaluation, "extreme.toml")  # refuses nan and infinity by itself


def extreme(field: str, kelvin: str, gates: int, pulses: int, **more: Entry) -> Evaluation:
    return evaluate(
        plan_of(
            {
                "magnet.field": field,
                "chip.electron_temperature": kelvin,
                "workload.gates": gates,
                "workload.refocusing_pulses": pulses,
                "stage.cold.temperature": kelvin,
                "line.drive.attenuation": "30 dB",
                "qubit.Q1.t1": "20 ms",
                "workload.readout_time": "10 us",
                **second(),
                **more,
            }
        )
    )


@pytest.mark.parametrize(("field", "kelvin"), list(product(FIELDS, KELVINS)))
def test_the_corners_are_sound(field: str, kelvin: str) -> None:
    for gates, pulses in product(GATES, PULSES):
        for accumulation in ("randomised", "aligned"):
            assert_sound(extreme(field, kelvin, gates, pulses, **{"workload.accumulation": accumulation}))


@pytest.mark.parametrize("material", list(material_titles()))
def test_the_corners_of_every_material_are_sound(material: str) -> None:
    for field, pulses in product((FIELDS[0], FIELDS[-1]), (0, 10_000)):
        for kelvin, gates in ((KELVINS[0], 10**9), (KELVINS[-1], 1)):
            assert_sound(
                extreme(field, kelvin, gates, pulses, **{"chip.material": material, "qubit.Q1.g": "0.2, 0.4, 12"})
            )


def decades(low: int, high: int) -> st.SearchStrategy[float]:
    return st.floats(low, high).map(lambda power: round(float(10**power), 9))


@settings(max_examples=60, deadline=None)
@given(
    tesla=decades(-6, 1).map(lambda tesla: 3 * tesla),
    kelvin=st.floats(0.001, 4),
    gates=st.integers(1, 10**9),
    pulses=st.integers(0, 10_000),
    wait=decades(-9, 2),
    interval=decades(-3, 6),
    noise=decades(0, 8),
    accumulation=st.sampled_from(["randomised", "aligned"]),
    readout=st.sampled_from(["parity", "energy"]),
)
def test_anything_between_the_corners_is_sound(
    *, tesla: float, kelvin: float, gates: int, pulses: int, wait: float, interval: float, noise: float,
    accumulation: str, readout: str
) -> None:  # fmt: skip
    more: dict[str, Entry] = {
        "workload.longest_wait": f"{wait!r} s",
        "calibration.interval": f"{interval!r} s",
        "qubit.Q1.frequency_noise": f"{noise!r} Hz/rtHz",
        "workload.accumulation": accumulation,
        "workload.readout": readout,
    }
    assert_sound(extreme(f"{tesla!r} T", f"{kelvin!r} K", gates, pulses, **more))


PHASE_NOISE = """
[[phase_noise]]
offset = '100 Hz'
level = '-72 dBc/Hz'
carrier = '10 GHz'
[[phase_noise]]
offset = '10 MHz'
level = '-140 dBc/Hz'
carrier = '10 GHz'
"""


def give_everything(material: str) -> Evaluation:
    """A plan in which every table has rows and every given that switches a result on is typed."""
    one: dict[str, Entry] = {
        "g": "0.28, 0.44, 11.8", "g_euler": "20, 1.5, 0 deg", "t1": "20 ms", "t2_star": "5 us", "gradient": "0.05 mT/nm",
        "local_field": "2, 0, 1 mT", "white_noise": "10 Hz^2/Hz", "rabi_frequency": "5 MHz", "valley_splitting": "90 ueV",
        "frequency_noise": "3 kHz/rtHz",
    }  # fmt: skip
    plan: dict[str, Entry] = {
        **BENCH, "chip.material": material, "magnet.field": "500 mT", "magnet.elevation": "0 ± 0.2 deg; drawing",
        "magnet.since_ramp": "20 h", "source.power": "16 dBm", "chip.micromagnet_field": "250 mT",
        "clock.loose": "carrier", "workload.readout_time": "10 us", "workload.exchange_gates": 20,
        "workload.blockade_window": "250 ueV", "coil.z.direction": "1, 0, 0.014", "coil.z.rating": "6 T",
        "coil.z.field_per_current": "70 mT/A", "coil.z.step": "0.1 mA", "coil.x.direction": "-0.014, 0, 1",
        "coil.x.field_per_current": "15 mT/A", "part.inductor.critical_in_plane": "2 T",
        "part.inductor.critical_normal": "100 mT", "part.inductor.must": "superconduct", "stage.still.temperature": "850 mK",
        "stage.still.cooling_power": "25 mW", "stage.still.base_load": "8 mW", "stage.cold.temperature": "18 mK",
        "stage.cold.cooling_power": "12 uW", "stage.cold.base_load": "3 uW", "line.drive.attenuation": "20, 20 dB",
        "line.drive.cable_loss": "3 dB", "line.drive.device_power": "-40 dBm", "line.drive.duty": "0.15",
        **{f"qubit.Q1.{name}": value for name, value in one.items()},
        **{f"qubit.Q2.{name}": value for name, value in (one | {"g": "0.3, 0.47, 11.1"}).items()},
        "pair.Q1Q2.first": "Q1", "pair.Q1Q2.second": "Q2", "pair.Q1Q2.exchange": "5 MHz",
        "pair.Q1Q2.exchange_noise": "20 kHz/rtHz", "pair.Q1Q2.residual_exchange": "10 kHz", "pair.Q1Q2.gate_time": "100 ns",
    }  # fmt: skip
    found = read(text_of(plan) + PHASE_NOISE, "everything.toml").plan
    assert not problems(found)
    return evaluate(found)


# Every result of the contract for scripts, by table.
CONTRACT = {
    "larmor": "field g axis energy frequency field_slope elevation_slope azimuth_slope spacing search_window",
    "noise": "nuclear barrier magnet drift calibration clock loose charge_amplitude charge white total unexplained",
    "coherence": "t2_star t2_echo wait_phase gate_error error_per_gate sequence_time gates_randomised gates_aligned "
    "sequence_error reachable_gates allowed_noise",
    "clock": "required_accuracy change required_stability stability required_mismatch source_phase",
    "thermal": "ratio excited readout_error",
    "valley": "distance",
    "tones": "lo intermediate image_distance leakage_distance crosstalk_flip image_flip leakage_flip crosstalk_phase",
    "calibration": "time_share",
    "magnet": "settling",
    "pair": "error idle_phase",
    "coil": "current field",
    "line": "photons effective_temperature source_power",
    "stage": "heat",
}
KEYS = [f"{table}.{name}" for table, names in CONTRACT.items() for name in names.split()]
MARGINS = [
    "band", "mixing", "drive-power", "rating", "drift", "field-noise", "loose-clock", "calibration", "clock",
    "field-step", "wait", "gate", "sequence", "readout", "valley", "crosstalk", "image", "leakage",
    "calibration-time", "heat", "parts", "micromagnet", "pair",
]  # fmt: skip

NO_VALLEYS = ("ge-sige-natural", "ge-sige-500ppm", "gaas", "si-fin-natural")


@pytest.mark.parametrize("material", list(material_titles()))
def test_a_plan_that_gives_everything_reports_every_result_and_margin(material: str) -> None:
    document = json.loads(report_json(give_everything(material), "everything.toml"))
    results = document["results"]
    assert not set(KEYS) - set(results)
    for key in KEYS:
        entry = results[key]
        values = [entry["value"]] if "value" in entry else list(entry["values"].values())
        assert values, key
        if None in values:
            assert (key, material) in [("valley.distance", host) for host in NO_VALLEYS], (key, entry["why"])
            assert entry["why"] == {name: f"{name}: the host has no valleys" for name in ("Q1", "Q2")}
    judged = {margin["name"]: margin for margin in document["margins"]}
    missing = {"valley"} if material in NO_VALLEYS else set()
    assert set(MARGINS) - set(judged) == missing
    assert [name for name, margin in judged.items() if margin["margin"] is None] == []


def test_a_hole_with_a_scalar_g_and_a_magnet_that_drifts_too_much_say_why_there_is_no_number() -> None:
    plan = plan_of({"chip.material": "ge-sige-natural", "qubit.Q1.g": 0.4, "magnet.drift_driven": "1 %/h"})
    results = json.loads(report_json(evaluate(plan), "hole.toml"))["results"]
    for key in ("larmor.axis", "magnet.settling", "noise.unexplained", "clock.required_mismatch", "clock.source_phase"):
        assert results[key]["values"] == {"Q1": None}
        assert results[key]["why"]["Q1"], key
