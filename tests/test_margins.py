"""Margins and verdicts: each against its rule in plain floats, which row and comparison is worst, and what is asked."""

from __future__ import annotations

from collections.abc import Mapping
from math import pi, sqrt

import pytest

from planner.declare import Lock
from planner.evaluate import evaluate
from planner.margins import Margin
from tests.planmaking import Entry, of, plan_of, second
from tests.published import K_B, MU_B, UEV, H, results

Q = "qubit.Q1."
PART = 0.3  # source_share where nobody types it


def margin_of(name: str, changes: Mapping[str, Entry] | None = None) -> Margin:
    """One asked margin of the bench plan with changes."""
    found = evaluate(plan_of(changes)).margin(name)
    assert found is not None, f"{name} is not asked"
    return found


# -- allowed over expected, one margin after the other

FREQUENCY = MU_B * 2 * 0.5
BENCH = results()
WINDOW = MU_B * 2 * 2e-3  # 2 mT of remanence along the field, everything else exact
ENERGY: dict[str, Entry] = {"workload.readout": "energy"}
COLD: dict[str, Entry] = {**ENERGY, "chip.electron_temperature": "50 mK"}
RELAXING: dict[str, Entry] = {"workload.readout_time": "50 us", Q + "t1": "1 ms"}
# (changes, allowed, expected)
RULES: dict[str, tuple[str, Mapping[str, Entry], float, float]] = {
    "band, upper edge": ("band", {}, 18e9 - FREQUENCY, 50e6 + WINDOW),
    "band, lower edge": ("band", {"source.low": "13 GHz"}, FREQUENCY - 13e9, 50e6 + WINDOW),
    "band, own guard": ("band", {"source.guard": "200 MHz"}, 18e9 - FREQUENCY, 200e6 + WINDOW),
    "rating": ("rating", {"magnet.rating": "600 mT"}, 0.6, 0.5),
    "drift": ("drift", {}, PART * BENCH["coherence.allowed_noise"], BENCH["noise.drift"]),
    "field-noise": ("field-noise", {}, PART * BENCH["coherence.allowed_noise"], BENCH["noise.magnet"]),
    "field-noise, not more than a measured T2* allows": ("field-noise", {Q + "t2_star": "30 us"},
        PART * BENCH["coherence.allowed_noise"], 1 / (sqrt(2) * pi * 30e-6)),
    "field-noise, below what a measured T2* allows": ("field-noise", {Q + "t2_star": "1 us"},
        PART * BENCH["coherence.allowed_noise"], BENCH["noise.magnet"]),
    "loose-clock": ("loose-clock", {"clock.loose": "carrier", "source.lo": "13.9 GHz"},
        PART * BENCH["coherence.allowed_noise"], 13.9e9 * 2e-7),
    "calibration": ("calibration", {}, PART * BENCH["coherence.allowed_noise"], BENCH["noise.calibration"]),
    "clock, change": ("clock", {"clock.aging": "10 ppm/day"},
        BENCH["clock.required_accuracy"], results(aging=1e-5 / 86400)["clock.change"]),
    "clock, stability": ("clock", {"clock.aging": "0 /day", "workload.gates": 10**6, "calibration.shots": 10**6},
        results(gates=1e6)["clock.required_stability"], results(gates=1e6)["clock.stability"]),
    "wait": ("wait", {}, 0.25, BENCH["coherence.wait_phase"]),
    "gate": ("gate", {"workload.idle_per_gate": "50 ns"}, 1e-3, results(idle=50e-9)["coherence.error_per_gate"]),
    "sequence": ("sequence", {}, BENCH["coherence.gates_randomised"], 100),
    "sequence, aligned": ("sequence", {"workload.accumulation": "aligned"}, BENCH["coherence.gates_aligned"], 100),
    "readout, parity": ("readout", {}, 150 * UEV, 5 * K_B * 0.1),
    "readout, typed window": ("readout", {"workload.blockade_window": "60 ueV"}, 60 * UEV, 5 * K_B * 0.1),
    "readout, energy": ("readout", ENERGY, 0.01, BENCH["thermal.readout_error"]),
    "readout, relaxation is worse": ("readout", {**COLD, **RELAXING}, 0.01, 50e-6 / 2e-3),
    "readout, relaxation beside parity": ("readout", RELAXING, 0.01, 50e-6 / 2e-3),
    "readout, relaxation is better": ("readout", {**ENERGY, **RELAXING, "chip.electron_temperature": "300 mK"},
        0.01, results(temperature=0.3)["thermal.readout_error"]),
    "readout, no T1": ("readout", {**ENERGY, "workload.readout_time": "50 us"}, 0.01, BENCH["thermal.readout_error"]),
    "readout, no readout time": ("readout", {**ENERGY, Q + "t1": "1 us"}, 0.01, BENCH["thermal.readout_error"]),
    "valley": ("valley", {"workload.valley_window": "5 ueV"}, abs(H * FREQUENCY - 150 * UEV), 5 * UEV),
}  # fmt: skip


@pytest.mark.parametrize("case", RULES)
def test_allowed_over_expected(case: str) -> None:
    name, changes, allowed, expected = RULES[case]
    margin = margin_of(name, changes)
    assert margin.allowed == pytest.approx(allowed, rel=1e-7)
    assert margin.expected == pytest.approx(expected, rel=1e-7)
    assert margin.value == pytest.approx(allowed / expected, rel=1e-7)


@pytest.mark.parametrize(("case", "key"), [("clock, change", "clock.change"), ("clock, stability", "clock.stability")])
def test_the_worse_comparison_of_the_clock_is_shown(case: str, key: str) -> None:
    assert margin_of("clock", RULES[case][1]).compare.expected == key


# -- verdicts


@pytest.mark.parametrize(
    ("allowed", "verdict"),
    [("0.249999", "short"), ("0.25", "tight"), ("0.3", "tight"), ("0.3125", "tight"), ("0.312501", "clear")],
)
def test_both_ends_of_tight_count(allowed: str, verdict: str) -> None:
    """Relaxation during readout is 0.5 s / (2 x 1 s), a quarter without rounding; 0.3125 is 1.25 times that."""
    changes = {"workload.readout_time": "500 ms", Q + "t1": "1 s", "chip.electron_temperature": "1 mK"}
    assert margin_of("readout", {**changes, "workload.allowed_readout_error": allowed}).verdict == verdict


@pytest.mark.parametrize(
    ("rating", "verdict"),
    [("499 mT", "short"), ("500 mT", "clear"), ("501 mT", "clear"), ("2 T", "clear"), (None, "unknown")],
)
def test_the_rating_is_met_or_short(rating: str | None, verdict: str) -> None:
    assert margin_of("rating", {"magnet.rating": rating}).verdict == verdict


def test_the_wanted_margin_is_where_tight_ends() -> None:
    rule = {"chip.electron_temperature": "100 mK", "workload.blockade_window": "100 ueV"}  # 2.32
    verdicts = [margin_of("readout", {**rule, "wanted_margin": wanted}).verdict for wanted in (1, 2.3, 2.4)]
    assert verdicts == ["clear", "clear", "tight"]


def test_a_line_outside_the_band_has_no_margin_at_all() -> None:
    margin = margin_of("band", {"source.high": "13 GHz"})
    assert (margin.value, margin.verdict) == (0, "short")
    assert margin.allowed == pytest.approx(13e9 - FREQUENCY)


@pytest.mark.parametrize(
    ("name", "changes"),
    [
        ("drift", {"magnet.drift_driven": "0 ppm/h"}),
        ("field-noise", {"magnet.noise_driven": "0 T"}),
        ("loose-clock", {"clock.loose": "carrier", "clock.loose_drift": 0}),
        ("readout", {"chip.electron_temperature": "1 nK", "workload.blockade_window": "1 eV"}),
    ],
)
def test_no_margin_is_larger_than_a_million(name: str, changes: dict[str, Entry]) -> None:
    margin = margin_of(name, changes)
    assert (margin.value, margin.verdict) == (1e6, "clear")


def test_an_unknown_margin_names_the_given_to_type() -> None:
    margin = margin_of("wait", {"workload.longest_wait": None})
    assert (margin.value, margin.verdict, str(margin.reason)) == (None, "unknown", "workload.longest_wait is not typed")
    margin = margin_of("gate", {Q + "rabi_frequency": None})
    assert margin.reason is not None
    assert (margin.row, margin.reason.key) == ("Q1", "qubit.Q1.rabi_frequency")


# -- the worst row


def test_the_worst_row_is_short_then_unknown_then_the_smallest() -> None:
    far, near, none = "300 ueV", "59 ueV", None  # 242 and 1 ueV from the Zeeman energy of 57.9 ueV
    three = {**second("Q2", local_field=None), **second("Q3", local_field=None)}
    cases: list[tuple[tuple[str | None, str | None, str | None], str, str]] = [
        ((far, near, none), "Q2", "short"),
        ((far, none, far), "Q2", "unknown"),
        ((far, "71 ueV", "66.5 ueV"), "Q3", "tight"),
        ((far, "320 ueV", "310 ueV"), "Q1", "clear"),
    ]
    for splittings, row, verdict in cases:
        typed = {f"qubit.Q{n}.valley_splitting": value for n, value in enumerate(splittings, 1)}
        margin = margin_of("valley", {**three, **typed})
        assert (margin.row, margin.verdict) == (row, verdict), splittings


def test_a_margin_of_the_plan_names_no_row() -> None:
    assert margin_of("rating", second()).row == ""
    assert margin_of("readout", second()).row == ""
    assert margin_of("readout", {**second(), **RELAXING}).row == "Q1"


def test_one_missing_valley_splitting_in_use_leaves_the_blockade_window_unknown() -> None:
    margin = margin_of("readout", second(valley_splitting=None))
    assert (margin.verdict, str(margin.reason)) == ("unknown", "qubit.Q2.valley_splitting is not typed")
    assert margin_of("readout", second(valley_splitting=None, role="spare")).verdict == "clear"


def test_only_rows_with_a_time_and_a_t1_are_compared_for_relaxation() -> None:
    margin = margin_of("readout", {**COLD, "workload.readout_time": "50 us", **second(t1="1 ms")})
    assert margin.row == "Q2"
    assert margin.value == pytest.approx(0.01 / (50e-6 / 2e-3))
    assert [float(value) for value in margin.margins] == [
        pytest.approx(0.01 / results(temperature=0.05)["thermal.readout_error"], rel=1e-7),
        pytest.approx(0.4),
    ]


@pytest.mark.parametrize("role", ["spare", "dead"])
def test_what_is_not_in_use_is_not_judged(role: str) -> None:
    broken = second(role=role, valley_splitting="58 ueV", rabi_frequency="50 kHz", frequency_noise="1 MHz/rtHz")
    alone, beside = evaluate(plan_of()), evaluate(plan_of(broken))
    assert [(m.name, m.value, m.row) for m in alone.margins] == [(m.name, m.value, m.row) for m in beside.margins]


def test_the_worst_of_a_plan() -> None:
    clear: dict[str, Entry] = {
        "workload.longest_wait": "20 ns", "workload.gates": 5, "magnet.mode": "persistent",
        Q + "rabi_frequency": "20 MHz", Q + "nuclear_noise": "20 kHz", "calibration.shots": 100000,
        "source.leakage": "-70 dB", "source.image": "-70 dB",
    }  # fmt: skip
    tight: dict[str, Entry] = {"workload.valley_window": "80 ueV"}
    unknown: dict[str, Entry] = {"magnet.rating": None}
    short: dict[str, Entry] = {"source.high": "14 GHz"}
    assert evaluate(plan_of(clear)).verdict == "clear"
    assert evaluate(plan_of({**clear, **tight})).verdict == "tight"
    assert evaluate(plan_of({**clear, **tight, **unknown})).verdict == "unknown"
    worst = evaluate(plan_of({**clear, **tight, **unknown, **short}))
    assert worst.verdict == "short"
    assert [margin.name for margin in worst.ranked][:3] == ["band", "rating", "valley"]


# -- asked


@pytest.mark.parametrize(
    ("changes", "reasons"),
    [
        ({}, {"loose-clock": "everything is locked"}),
        ({"clock.loose": "carrier"}, {}),
        ({"chip.material": "gaas"}, {"loose-clock": "everything is locked", "valley": "the host has no valleys"}),
    ],
)
def test_what_is_not_asked_says_why(changes: dict[str, Entry], reasons: dict[str, str]) -> None:
    evaluation = evaluate(plan_of(changes))
    assert {
        name: reason for name, reason in evaluation.not_asked.items() if name in ("loose-clock", "valley")
    } == reasons
    assert not {margin.name for margin in evaluation.margins} & set(evaluation.not_asked)


def test_every_margin_of_this_kind_of_plan_is_asked() -> None:
    asked = {margin.name for margin in evaluate(plan_of()).margins}
    assert asked >= {
        "band",
        "rating",
        "drift",
        "field-noise",
        "calibration",
        "clock",
        "wait",
        "gate",
        "sequence",
        "readout",
        "valley",
    }


def test_a_host_without_valleys_asks_for_the_blockade_window() -> None:
    margin = margin_of("readout", {"chip.material": "gaas"})
    assert margin.verdict == "unknown"
    assert "workload.blockade_window" in str(margin.reason)
    assert margin_of("readout", {"chip.material": "gaas", "workload.blockade_window": "300 ueV"}).verdict == "clear"


# -- bounds temper verdicts

FEW: dict[str, Entry] = {"chip.material": "si-sige-800ppm", "model.nuclei": "5e4"}  # 40 spinful nuclei
MANY: dict[str, Entry] = {"chip.material": "si-sige-800ppm", "model.nuclei": "125001"}  # 100.0008
LONG: dict[str, Entry] = {"workload.longest_wait": "1 us", "magnet.mode": "persistent", "calibration.shots": 10**6}


def test_few_nuclei_condemn_nothing() -> None:
    few, many = margin_of("wait", {**FEW, **LONG}), margin_of("wait", {**MANY, **LONG})
    assert few.value is not None
    assert many.value is not None
    assert (few.value < 1, many.value < 1) == (True, True)
    assert (few.verdict, many.verdict) == ("tight", "short")
    assert "nuclear_noise" in few.note
    assert many.note == ""


@pytest.mark.parametrize(
    "measured", [{"nuclear_noise": "300 kHz"}, {"tracked_noise": "300 kHz"}, {"t2_star": "500 ns"}], ids=str
)
def test_a_measured_bath_is_no_bound(measured: dict[str, Entry]) -> None:
    margin = margin_of("wait", {**FEW, **LONG, **{Q + key: value for key, value in measured.items()}})
    assert (margin.verdict, margin.note) == ("short", "")


def test_few_nuclei_temper_only_what_rests_on_them() -> None:
    """A valley too near and a field above the rating stay short, whatever the nuclei do."""
    evaluation = evaluate(plan_of({**FEW, **LONG, "workload.valley_window": "100 ueV", "magnet.rating": "0.4 T"}))
    verdicts = {margin.name: margin.verdict for margin in evaluation.margins}
    assert (verdicts["valley"], verdicts["rating"], verdicts["wait"]) == ("short", "short", "tight")


def test_few_nuclei_temper_row_by_row() -> None:
    rows = {**FEW, **LONG, **second("Q2", nuclear_noise="300 kHz")}
    margin = margin_of("wait", rows)
    assert margin.row == "Q2"
    assert [margin.verdict, margin.codes.tolist()] == ["short", [2, 0]]  # tight, short


def test_a_bound_leaves_a_clear_margin_clear() -> None:
    margin = margin_of("wait", {**FEW, "workload.longest_wait": "50 ns"})
    assert margin.verdict == "clear"


UNSTABLE: dict[str, Entry] = {"clock.deviation_1s": "1e-5", "clock.deviation_100s": "1e-6", "clock.aging": "0 /day",
                              "calibration.shots": 10**12}  # fmt: skip


def test_a_clock_figure_below_a_tenth_of_a_second_is_at_worst_tight() -> None:
    margin = margin_of("clock", UNSTABLE)
    assert margin.compare.expected == "clock.stability"
    assert margin.value is not None
    assert (margin.value < 1, margin.verdict) == (True, "tight")
    assert "0.1 s" in margin.note


def test_a_clock_figure_above_a_tenth_of_a_second_can_be_short() -> None:
    for gates, verdict in ((399_999, "tight"), (400_001, "short")):  # of 250 ns
        margin = margin_of("clock", {**UNSTABLE, "workload.gates": gates})
        assert (margin.compare.expected, margin.verdict, bool(margin.note)) == (
            "clock.stability",
            verdict,
            verdict == "tight",
        )


def test_the_change_of_the_clock_is_no_bound() -> None:
    margin = margin_of("clock", {"clock.aging": "100 ppm/day"})
    assert (margin.compare.expected, margin.verdict) == ("clock.change", "short")


# -- until


def test_the_latest_lock_of_a_choice_that_acts() -> None:
    assert margin_of("rating").until is Lock.OPEN  # the field can still be lowered
    assert margin_of("valley").until is Lock.OPEN


# -- where the program departs from the contract so far: each mark goes when its place is mended


def test_a_choice_of_a_comparison_that_is_not_made_repairs_nothing() -> None:
    """With a typed blockade window only facts decide parity readout; the way of reading locks at closing."""
    until = margin_of("readout", {"workload.blockade_window": "20 ueV"}).until
    assert until is None or until <= Lock.CLOSING


def test_what_other_noise_makes_short_stays_short_with_few_nuclei() -> None:
    """At a thirtieth of the bath's noise, the favourable end, the charge noise alone exceeds the allowance."""
    loud = {**FEW, **LONG, Q + "frequency_noise": "1 MHz/rtHz"}
    assert of(evaluate(plan_of(loud)), "noise.charge") > 10 * results(wait=1e-6)["coherence.allowed_noise"]
    assert margin_of("wait", loud).verdict == "short"
