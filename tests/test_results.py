"""Results of plans against the published formulas in plain floats, and against values from outside."""

from __future__ import annotations

from collections.abc import Mapping
from math import cos, hypot, isnan, nan, radians, sin, sqrt

import pytest

from planner.evaluate import evaluate
from tests.planmaking import Entry, of, plan_of, second, why
from tests.published import DAY, HOUR, MU_B, UEV, results

Q = "qubit.Q1."
QUIET: dict[str, Entry] = {Q + "nuclear_noise": "0 Hz", "magnet.noise_driven": "0 T"}  # charge noise alone
SLOW = {"nuclear": 0.0, "noise": 0.0}
# What is typed, and the same for the formulas in SI.
CASES: dict[str, tuple[Mapping[str, Entry], Mapping[str, float]]] = {
    "bench": ({}, {}),
    "negative g": ({Q + "g": -1.998}, {"g": 1.998}),
    "local field": ({Q + "local_field": "146, 0, 0 mT"}, {"local": 0.146}),
    "persistent": ({"magnet.mode": "persistent"}, {"noise": 5e-9, "drift": 0.05e-6 / HOUR}),
    "own drift and noise": (
        {"magnet.drift_driven": "2 ppm/h", "magnet.noise_driven": "300 nT"}, {"drift": 2e-6 / HOUR, "noise": 3e-7}),
    "settling": ({"magnet.since_ramp": "4 h", "magnet.settle_slope": "20 ppm/h"},
                 {"since": 4 * HOUR, "settle": 20e-6 / HOUR}),
    "settling, first hour": ({"magnet.since_ramp": "10 min"}, {"since": 600.0}),
    "nuclei": ({"model.nuclei": "1e5", "model.spinful_fraction": "1 %"}, {"nuclei": 1e5, "spinful": 0.01}),
    "barrier": ({"model.barrier_germanium": 0.2, "model.barrier_share": 0.01, "model.barrier_nuclei": "4e4",
                 "model.barrier_spinful": "1 %"},
                {"germanium": 0.2, "share": 0.01, "barrier_nuclei": 4e4, "barrier_spinful": 0.01}),
    "typed nuclear noise": ({Q + "nuclear_noise": "11 kHz"}, {"nuclear": 11e3}),
    "tracked, barrier stays": ({Q + "tracked_noise": "5 kHz"}, {"tracked": 5e3}),
    "tracked and typed": ({Q + "tracked_noise": "5 kHz", Q + "nuclear_noise": "90 kHz"}, {"tracked": 5e3,
        "nuclear": 9e4}),
    "relative noise": ({Q + "frequency_noise": None, Q + "relative_noise": "8 ppm/rtHz"}, {"flicker": nan,
        "relative": 8e-6}),
    "gradient": ({Q + "frequency_noise": None, Q + "gradient": "0.1 mT/nm", "model.charge_noise": "0.9 ueV/rtHz"},
                 {"flicker": nan, "gradient": 1e5, "charge_noise": 0.9 * UEV}),
    "relative noise before gradient": (
        {Q + "frequency_noise": None, Q + "relative_noise": "8 ppm/rtHz", Q + "gradient": "0.1 mT/nm"},
        {"flicker": nan, "relative": 8e-6}),
    "first that is typed": ({Q + "relative_noise": "8 ppm/rtHz", Q + "gradient": "0.1 mT/nm"}, {}),
    "model's relative noise": ({Q + "frequency_noise": None, "model.relative_noise": "4 ppm/rtHz"},
                               {"flicker": nan, "relative": 4e-6}),
    "white": ({Q + "white_noise": "200 Hz^2/Hz"}, {"white": 200.0}),
    "measured T2*": ({Q + "t2_star": "8.1 us", Q + "white_noise": "200 Hz^2/Hz"}, {"t2": 8.1e-6, "white": 200.0}),
    "measured T2*, unexplained": ({Q + "t2_star": "300 ns"}, {"t2": 3e-7}),
    "idle and T1": ({"workload.idle_per_gate": "40 ns", Q + "t1": "2 ms"}, {"idle": 40e-9, "t1": 2e-3}),
    "long idle times set what is stood": (
        {"workload.idle_per_gate": "2 us", "workload.longest_wait": "20 ns", "workload.allowed_gate_error": "0.1"},
        {"idle": 2e-6, "wait": 2e-8, "gate_error": 0.1}),
    "long gates": ({"workload.gate_time": "400 ns", Q + "t1": "1 ms"}, {"gate_time": 4e-7, "t1": 1e-3}),
    "slow Rabi": ({Q + "rabi_frequency": "60 kHz"}, {"rabi": 6e4}),
    "hardly a Rabi": ({Q + "rabi_frequency": "10 kHz"}, {"rabi": 1e4}),
    "gates": ({"workload.gates": 5000, Q + "rabi_frequency": "10 MHz"}, {"gates": 5e3, "rabi": 1e7}),
    "demands": ({"workload.allowed_phase": "0.1 rad", "workload.allowed_gate_error": "1 %",
                 "workload.allowed_sequence_error": "0.3", "workload.source_share": 0.5},
                {"phase": 0.1, "gate_error": 0.01, "sequence_error": 0.3, "part": 0.5}),
    "lax gate": ({"workload.allowed_gate_error": "0.45", "workload.longest_wait": "20 ns", "workload.gates": 1},
                 {"gate_error": 0.45, "wait": 2e-8, "gates": 1.0}),
    "aligned": ({"workload.accumulation": "aligned", Q + "t1": "1 ms"}, {"aligned": 1.0, "t1": 1e-3}),
    "Hahn": ({"workload.refocusing_pulses": 1, "workload.accumulation": "aligned", Q + "white_noise": "50 Hz^2/Hz"},
             {"pulses": 1.0, "aligned": 1.0, "white": 50.0}),
    "two pulses": ({"workload.refocusing_pulses": 2, Q + "t2_star": "2 us"}, {"pulses": 2.0, "t2": 2e-6}),
    "clock": ({"clock.deviation_1s": "2e-12", "clock.deviation_100s": "1e-12", "clock.aging": "1e-11 /day"},
              {"s1": 2e-12, "s100": 1e-12, "aging": 1e-11 / DAY}),
    "clock, one tenth": ({"clock.deviation_1s": "3e-12"}, {"s1": 3e-12}),
    "clock, flicker only": ({"clock.deviation_1s": "1e-12", "clock.deviation_100s": "2e-12", "clock.aging": "0 /day",
                             "calibration.interval": "2 s"}, {"s1": 1e-12, "s100": 2e-12, "aging": 0.0,
                                 "interval": 2.0}),
    "calibration": ({"calibration.wait": "300 ns", "calibration.shots": 800, "calibration.contrast": 0.5,
                     "calibration.shot_time": "1 ms", "calibration.interval": "2 h"},
                    {"ramsey": 3e-7, "shots": 800.0, "contrast": 0.5, "shot_time": 1e-3, "interval": 7200.0}),
    "record": ({"calibration.record_length": "1 min"}, {"record": 60.0}),
    "short record, long wait": ({**QUIET, "calibration.record_length": "10 us", "workload.longest_wait": "60 us",
                                 Q + "t2_star": "40 us"}, {**SLOW, "record": 1e-5, "wait": 6e-5, "t2": 4e-5}),
    "no wait": ({"workload.longest_wait": "0 us"}, {}),
    "temperature": ({"chip.electron_temperature": "1.2 K", Q + "valley_splitting": "40 ueV"},
                    {"temperature": 1.2, "valley": 40 * UEV}),
}  # fmt: skip
NEED_WAIT = {"coherence.wait_phase", "coherence.allowed_noise", "clock.required_accuracy"}


@pytest.mark.parametrize("case", CASES)
def test_results_follow_the_published_formulas(case: str) -> None:
    typed, numbers = CASES[case]
    evaluation = evaluate(plan_of(typed))
    wanted = results(**numbers)
    if case == "no wait":  # noise is quoted over one gate, and nothing says what phase is allowed
        wanted = results(**{**numbers, "wait": 250e-9}) | dict.fromkeys(NEED_WAIT, nan)
    got = {key: of(evaluation, key) for key in wanted}
    wrong = {
        key: (got[key], value)
        for key, value in wanted.items()
        if got[key] != pytest.approx(value, rel=1e-7, nan_ok=True)
    }
    assert not wrong


# -- outside values


def test_bath_of_a_natural_silicon_dot() -> None:
    # 355.834 kHz, T2* 0.632539 us for 1e5 atoms: the formula of Merkulov et al. 2002 with A = 4.3 ueV, computed apart
    evaluation = evaluate(
        plan_of(
            {"model.nuclei": "1e5", "model.barrier_share": 0, "magnet.noise_driven": "0 T", Q + "frequency_noise": None}
        )
    )
    assert of(evaluation, "noise.nuclear") == pytest.approx(355.834e3, rel=1e-5)
    assert of(evaluation, "coherence.t2_star") == pytest.approx(0.632539e-6, rel=1e-5)


def test_bath_of_a_gallium_arsenide_dot() -> None:
    # T2* 9.38929 ns for 1e6 atoms, couplings 46, 38.2 and 48.5 ueV (Paget et al. 1977), computed apart
    evaluation = evaluate(plan_of({"chip.material": "gaas", "model.nuclei": "1e6", "magnet.noise_driven": "0 T"}))
    assert of(evaluation, "coherence.t2_star") == pytest.approx(9.38929e-9, rel=1e-3)


def test_a_hole_counts_its_nuclei_along_the_heavy_axis() -> None:
    # 2 deg out of the plane, g = (0.2, 0.2, 11.5): u_z = 0.895134 (computed apart); 212.679 kHz along it for 1e6 atoms
    hole: dict[str, Entry] = {"chip.material": "ge-sige-natural", "model.nuclei": "1e6", Q + "g": "0.2, 0.2, 11.5"}
    evaluation = evaluate(plan_of({**hole, "magnet.elevation": "2 deg"}))
    assert of(evaluation, "larmor.axis") == pytest.approx(0.895134, rel=1e-6)
    assert of(evaluation, "noise.nuclear") == pytest.approx(212.679e3 * 0.895134, rel=1e-5)
    typed = evaluate(plan_of({**hole, "magnet.elevation": "2 deg", Q + "nuclear_noise": "250 kHz"}))
    assert of(typed, "noise.nuclear") == pytest.approx(250e3 * 0.895134, rel=1e-6)
    tracked = evaluate(plan_of({**hole, "magnet.elevation": "2 deg", Q + "tracked_noise": "20 kHz"}))
    assert of(tracked, "noise.nuclear") == 20e3


def test_a_hole_with_one_g_has_no_known_axis() -> None:
    evaluation = evaluate(plan_of({"chip.material": "ge-sige-natural", "model.nuclei": "1e6", Q + "g": 0.4}))
    assert isnan(of(evaluation, "larmor.axis"))
    assert "three principal values" in why(evaluation, "larmor.axis")
    assert of(evaluation, "noise.nuclear") == pytest.approx(212.679e3, rel=1e-5)


def test_a_hole_takes_the_materials_relative_noise() -> None:
    evaluation = evaluate(plan_of({"chip.material": "ge-sige-natural", Q + "g": 0.4, Q + "frequency_noise": None}))
    assert of(evaluation, "noise.charge_amplitude") == pytest.approx(8e-6 * MU_B * 0.4 * 0.5, rel=1e-9)


@pytest.mark.parametrize(
    ("elevation", "azimuth", "megahertz", "per_degree"),
    # tensor (0.15, 0.25, 11.5) turned by (30, 2, 10) deg in 0.1 T: frequency and slope against the polar angle computed
    # apart, the second row's frequency confirmed by the eigenvalues of a spin Hamiltonian (qutip)
    [
        (0, 0, 559.516683, 244.0492),
        (2, 0, 1083.323647, 270.9636),
        (0, 120, 346.513367, 0.0235549),
        (45, 20, 11766.6619, 191.6374),
    ],
)
def test_frequency_of_a_tensor(elevation: float, azimuth: float, megahertz: float, per_degree: float) -> None:
    evaluation = evaluate(plan_of({
        "chip.material": "ge-sige-natural", "magnet.field": "100 mT", "magnet.elevation": f"{elevation} deg",
        "magnet.azimuth": f"{azimuth} deg", Q + "g": "0.15, 0.25, 11.5", Q + "g_euler": "30, 2, 10 deg"}))  # fmt: skip
    assert of(evaluation, "larmor.frequency") == pytest.approx(megahertz * 1e6, rel=1e-8)
    assert of(evaluation, "larmor.elevation_slope") == pytest.approx(per_degree * 1e6 / radians(1), rel=1e-6)
    assert of(evaluation, "larmor.g") == pytest.approx(megahertz * 1e6 / (0.1 * MU_B), rel=1e-8)


def test_charge_noise_alone() -> None:
    # 3 kHz/rtHz over 1000 s: T2* 18.248102 us, echo 90.115842 us (Ithier et al. 2005, computed apart)
    evaluation = evaluate(plan_of({**QUIET, "calibration.record_length": "1000 s"}))
    assert of(evaluation, "coherence.t2_star") == pytest.approx(18.248102e-6, rel=1e-7)
    assert of(evaluation, "coherence.t2_echo") == pytest.approx(90.115842e-6, rel=1e-7)


def test_stability_that_a_long_sequence_needs() -> None:
    # 7.876718e-10 at 14 GHz and 250 us for an error of 1e-4 (two-sample variance, computed apart)
    evaluation = evaluate(plan_of({"magnet.field": f"{14e9 / (2 * MU_B)!r} T", "workload.gates": 1000,
                                   "workload.allowed_sequence_error": "1e-4", "workload.source_share": 1}))  # fmt: skip
    assert of(evaluation, "clock.required_stability") == pytest.approx(7.876718e-10, rel=1e-6)


# -- direction, window, partners, tones


def test_slopes_with_a_local_field_are_those_of_the_frequency() -> None:
    tilted: dict[str, Entry] = {
        Q + "g": "1.8, 2, 2.3",
        Q + "g_euler": "20, 30, 40 deg",
        Q + "local_field": "60, -20, 30 mT",
    }

    def frequency(field: float, elevation: float, azimuth: float) -> float:
        typed: dict[str, Entry] = {"magnet.field": f"{field!r} T", "magnet.elevation": f"{elevation!r} rad",
                                   "magnet.azimuth": f"{azimuth!r} rad"}  # fmt: skip
        return of(evaluate(plan_of({**tilted, **typed})), "larmor.frequency")

    at = (0.4, 0.2, 0.7)
    evaluation = evaluate(
        plan_of({**tilted, "magnet.field": "0.4 T", "magnet.elevation": "0.2 rad", "magnet.azimuth": "0.7 rad"})
    )
    for index, key in enumerate(("field_slope", "elevation_slope", "azimuth_slope")):
        step = [1e-5 if other == index else 0.0 for other in range(3)]
        ends = [frequency(*(a + sign * s for a, s in zip(at, step, strict=True))) for sign in (1, -1)]
        assert of(evaluation, f"larmor.{key}") == pytest.approx((ends[0] - ends[1]) / 2e-5, rel=1e-6)


def test_search_window_adds_every_tolerance_in_quadrature() -> None:
    evaluation = evaluate(plan_of({
        "magnet.field": "500 ± 1 mT", "magnet.remanence": "2.0, 0.5, 0.5 mT", "magnet.elevation": "30 ± 0.5 deg",
        "magnet.azimuth": "10 ± 1 deg", Q + "g": "2.000 ± 0.004",
            Q + "local_field": "100 ± 3, 0 ± 1, 8 ± 2 mT"}))  # fmt: skip
    elevation, azimuth, g = radians(30), radians(10), 2.0
    out = (cos(elevation) * cos(azimuth), cos(elevation) * sin(azimuth), sin(elevation))
    up = (-sin(elevation) * cos(azimuth), -sin(elevation) * sin(azimuth), cos(elevation))
    round_ = (-cos(elevation) * sin(azimuth), cos(elevation) * cos(azimuth), 0.0)
    field = [0.5 * o + local for o, local in zip(out, (0.1, 0.0, 0.008), strict=True)]
    size = hypot(*field)
    u = [component / size for component in field]

    def along(vector: tuple[float, ...]) -> float:
        return sum(a * b for a, b in zip(u, vector, strict=True))

    terms = [a * s for sigmas in ((2e-3, 5e-4, 5e-4), (3e-3, 1e-3, 2e-3)) for a, s in zip(u, sigmas, strict=True)]
    terms += [along(out) * 1e-3, 0.5 * along(up) * radians(0.5), 0.5 * along(round_) * radians(1), size * 0.004 / g]
    assert of(evaluation, "larmor.search_window") == pytest.approx(MU_B * g * hypot(*terms), rel=1e-9)


def test_search_window_of_a_tensor_takes_values_and_angles_one_by_one() -> None:
    values, angles = (0.2, 0.4, 12.0), (77.0, 1.0, -57.0)
    exact: dict[str, Entry] = {"magnet.remanence": "0 T", "chip.material": "ge-sige-natural"}

    def frequency(numbers: tuple[float, ...]) -> float:
        turned = ", ".join(repr(n) for n in numbers[3:]) + " deg"
        return of(
            evaluate(plan_of({**exact, Q + "g": ", ".join(map(repr, numbers[:3])), Q + "g_euler": turned})),
            "larmor.frequency",
        )

    sigmas, terms = (0.01, 0.02, 0.1, 1.0, 0.1, 2.0), []
    for index, sigma in enumerate(sigmas):
        ends = [
            frequency(tuple(n + (sign * 1e-4 if i == index else 0) for i, n in enumerate(values + angles)))
            for sign in (1, -1)
        ]
        terms.append((ends[0] - ends[1]) / 2e-4 * sigma)
    evaluation = evaluate(
        plan_of({**exact, Q + "g": "0.2 ± 0.01, 0.4 ± 0.02, 12 ± 0.1", Q + "g_euler": "77 ± 1, 1 ± 0.1, -57 ± 2 deg"})
    )
    assert of(evaluation, "larmor.search_window") == pytest.approx(hypot(*terms), rel=1e-5)


def test_field_noise_by_component_is_weighed_with_the_response() -> None:
    evaluation = evaluate(
        plan_of({"magnet.noise_driven": "1500, 400, 300 nT", "magnet.azimuth": "30 deg", "magnet.elevation": "20 deg"})
    )
    e, a = radians(20), radians(30)
    seen = hypot(cos(e) * cos(a) * 1500e-9, cos(e) * sin(a) * 400e-9, sin(e) * 300e-9)
    assert of(evaluation, "noise.magnet") == pytest.approx(MU_B * 2 * seen, rel=1e-9)


def best_tone(frequencies: list[float], half_width: float) -> float:
    """The rule of the design by trying every whole MHz."""
    middle = (min(frequencies) + max(frequencies)) / 2
    tones = [n * 1e6 for n in range(round(middle / 1e6) - 700, round(middle / 1e6) + 700)]
    reach = [tone for tone in tones if all(abs(f - tone) <= half_width + 1 for f in frequencies)]

    def clear(tone: float) -> float:
        points = [tone, *(2 * tone - f for f in frequencies)]
        return float(round(min(abs(point - f) for point in points for f in frequencies)))

    good = [tone for tone in reach if clear(tone) >= 10e6]
    if good:
        return min(good, key=lambda tone: (round(abs(tone - middle)), tone))
    return min(reach, key=lambda tone: (-clear(tone), tone)) if reach else middle


@pytest.mark.parametrize(
    "local", [(), (10.0,), (2.0, 3.5, 9.0), (0.1, 0.2, 0.3), (0.5, 1.0, 1.5, 2.0), (30.0, 60.0)], ids=str
)
@pytest.mark.parametrize("half_width", [15, 60, 500])
def test_local_oscillator_where_none_is_typed(local: tuple[float, ...], half_width: int) -> None:
    others: dict[str, Entry] = {}
    for index, field in enumerate(local):
        others |= second(f"R{index}", local_field=f"{field}, 0, 0 mT")
    evaluation = evaluate(
        plan_of(
            {
                **others,
                **second("S", role="spare", local_field="-30, 0, 0 mT"),
                "source.if_half_width": f"{half_width} MHz",
            }
        )
    )
    used = [MU_B * 2 * (0.5 + field / 1e3) for field in (0.0, *local)]
    assert of(evaluation, "source.lo") == pytest.approx(best_tone(used, half_width * 1e6), abs=2)


@pytest.mark.parametrize(("half_width", "tone"), [(500, 13990e6), (5, 13995e6), (10, 13990e6)])
def test_of_two_tones_as_good_the_lower_is_taken(half_width: int, tone: float) -> None:
    """One qubit at 14000 MHz: 13990 and 14010 are the nearest clear tones; within 5 MHz both ends are the farthest."""
    evaluation = evaluate(
        plan_of({"magnet.field": f"{14e9 / (2 * MU_B)!r} T", "source.if_half_width": f"{half_width} MHz"})
    )
    assert of(evaluation, "source.lo") == tone


@pytest.mark.parametrize(("wait", "known"), [("2.023 us", True), ("2.024 us", False)])
def test_a_contrast_below_a_hundredth_calibrates_nothing(wait: str, known: bool) -> None:
    """0.6 exp(-(t/T2*)^2) is 0.01 at 2.0235 T2*."""
    evaluation = evaluate(plan_of({"calibration.wait": wait, Q + "t2_star": "1 us"}))
    assert isnan(of(evaluation, "noise.calibration")) is not known


@pytest.mark.parametrize("loose", ["carrier", "baseband"])
def test_a_loose_instrument(loose: str) -> None:
    evaluation = evaluate(plan_of({"clock.loose": loose, "clock.loose_drift": "3e-7", "source.lo": "13.9 GHz"}))
    tone = 13.9e9 if loose == "carrier" else MU_B * 2 * 0.5 - 13.9e9
    assert of(evaluation, "noise.loose") == pytest.approx(tone * 3e-7, rel=1e-9)
    stands = of(evaluation, "coherence.allowed_noise")
    assert of(evaluation, "clock.required_mismatch") == pytest.approx(0.3 * stands / tone, rel=1e-9)
    locked = evaluate(plan_of())
    more = sqrt(of(evaluation, "noise.total") ** 2 - of(locked, "noise.total") ** 2)
    assert more == pytest.approx(tone * 3e-7, rel=1e-4)
