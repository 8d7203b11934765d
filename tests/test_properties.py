"""What must hold for every plan: which way results go when one choice moves, and what must not change them at all."""

from __future__ import annotations

from collections.abc import Iterable
from math import asin, atan2, pi

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation  # type: ignore[import-untyped]

from planner.evaluate import Evaluation, evaluate
from planner.graph import graph
from planner.plan import Plan
from planner.views.report import plan_hash
from planner.views.why import explanation
from tests.planmaking import Entry, of, plan_of, second

ROUNDING = 1e-12
SHOWN = [derived.key for derived in graph().order if derived.shown]
few = settings(max_examples=20, deadline=None)


def follow(changes: dict[str, Entry]) -> Evaluation:
    return evaluate(plan_of(changes), ranges=False)


def between(low: float, high: float) -> st.SearchStrategy[float]:
    """Numbers as people could type them; the grammar refuses what is closer to 0 than any quantity."""
    return st.floats(low, high).map(lambda number: round(number, 9))


def digits(values: Iterable[float]) -> str:
    """Components of a vector, short enough for the file."""
    return ", ".join(f"{value:.15f}" for value in values)


def pick(*texts: str) -> st.SearchStrategy[str]:
    return st.sampled_from(texts)


@few
@given(g=between(0.05, 14), fields=st.tuples(between(1e-6, 30), between(1e-6, 30)), tilt=between(-90, 90))
def test_more_field_never_lowers_the_frequency_of_a_scalar_qubit(
    g: float, fields: tuple[float, float], tilt: float
) -> None:
    low, high = (
        of(
            follow({"magnet.field": f"{field!r} T", "magnet.elevation": f"{tilt!r} deg", "qubit.Q1.g": g}),
            "larmor.frequency",
        )
        for field in sorted(fields)
    )
    assert low <= high * (1 + ROUNDING)


STAGES = ("a", "b", "c", "d")
temperatures = st.lists(between(0.005, 290), min_size=4, max_size=4).map(lambda found: sorted(found, reverse=True))
attenuators = st.lists(between(0, 30), min_size=4, max_size=4)


def photons(kelvin: list[float], decibel: list[float]) -> float:
    stages: dict[str, Entry] = {
        f"stage.{name}.temperature": f"{value!r} K" for name, value in zip(STAGES[: len(kelvin)], kelvin, strict=True)
    }
    line = ", ".join(f"{value:.9f}" for value in decibel)  # four of these fit the longest text of a quantity
    return of(follow({**stages, "line.drive.attenuation": f"{line} dB"}), "line.photons")


@few
@given(kelvin=temperatures, decibel=attenuators, more=between(0, 20), place=st.integers(0, 3))
def test_more_attenuation_never_gives_more_photons(
    kelvin: list[float], decibel: list[float], more: float, place: int
) -> None:
    stronger = [value + more * (place == row) for row, value in enumerate(decibel)]
    assert photons(kelvin, stronger) <= photons(kelvin, decibel) * (1 + ROUNDING)


@few
@given(kelvin=temperatures, decibel=attenuators, share=between(0, 1), place=st.integers(0, 2))
def test_two_attenuators_at_one_temperature_are_one(
    kelvin: list[float], decibel: list[float], share: float, place: int
) -> None:
    kelvin = [*kelvin[:place], kelvin[place], *kelvin[place:3]]  # stages `place` and the next are equally warm
    whole = [*decibel[:place], decibel[place] + decibel[place + 1], 0.0, *decibel[place + 2 :]]
    parts = [*decibel[:place], whole[place] * share, whole[place] * (1 - share), *decibel[place + 2 :]]
    assert photons(kelvin, parts) == pytest.approx(photons(kelvin, whole), rel=1e-9)
    alone = [*kelvin[: place + 1], *kelvin[place + 2 :]]
    one = [*decibel[:place], whole[place], *decibel[place + 2 :]]
    assert photons(alone, one) == pytest.approx(photons(kelvin, whole), rel=1e-9)


@few
@given(
    material=pick("si-sige-natural", "si-mos-natural", "ge-sige-natural", "si-fin-natural", "gaas"),
    shares=st.tuples(between(0, 1), between(0, 1)),
    noise=between(0, 1e5),
)
def test_a_purer_wafer_never_shortens_t2_star(material: str, shares: tuple[float, float], noise: float) -> None:
    pure, natural = (
        of(
            follow(
                {
                    "chip.material": material,
                    "model.spinful_fraction": share,
                    "qubit.Q1.frequency_noise": f"{noise!r} Hz/rtHz",
                    "qubit.Q1.g": "1.5, 1.7, 2.1",
                }
            ),
            "coherence.t2_star",
        )
        for share in sorted(shares)
    )
    assert pure >= natural * (1 - 1e-9)


@pytest.mark.parametrize(
    "purer", [("si-sige-60ppm", "si-sige-800ppm", "si-sige-natural"), ("si-mos-800ppm", "si-mos-natural"),
              ("ge-sige-500ppm", "ge-sige-natural")]
)  # fmt: skip
def test_the_purer_material_of_a_host_keeps_its_spins_longer(purer: tuple[str, ...]) -> None:
    times = [of(follow({"chip.material": host, "qubit.Q1.g": "1, 2, 9"}), "coherence.t2_star") for host in purer]
    assert times == sorted(times, reverse=True)


def turned(turn: Rotation, angles: list[float], field: list[float], local: list[float], g: list[float]) -> Evaluation:
    """A hole in its field, all of it turned in the chip frame; noise and remanence the same in every direction."""
    along, beside = turn.apply(field), turn.apply(local)
    size = float(np.linalg.norm(along))
    axes = (turn * Rotation.from_euler("ZYZ", angles)).as_euler("ZYZ")
    return follow(
        {
            "chip.material": "ge-sige-natural",
            "magnet.field": f"{size:.15f} T",
            "magnet.elevation": f"{asin(max(-1.0, min(1.0, along[2] / size))):.15f} rad",
            "magnet.azimuth": f"{atan2(along[1], along[0]):.15f} rad",
            "magnet.noise_driven": "1 uT",
            "magnet.remanence": "2 mT",
            "qubit.Q1.g": digits(g),
            "qubit.Q1.g_euler": f"{digits(axes)} rad",
            "qubit.Q1.local_field": f"{digits(beside)} T",
            "qubit.Q1.gradient": None,
        }
    )


NO_DIRECTION = ("larmor.elevation_slope", "larmor.azimuth_slope")  # angles of the frame itself
angle = between(-pi, pi)


@few
@given(
    turn=st.tuples(angle, between(0.05, pi - 0.05), angle),
    angles=st.tuples(angle, between(0.05, pi - 0.05), angle),
    local=st.tuples(between(-0.1, 0.1), between(-0.1, 0.1), between(-0.1, 0.1)),
    g=st.tuples(between(0.1, 0.5), between(0.5, 1), between(8, 14)),
)
def test_a_frame_that_is_turned_changes_no_frequency_axis_or_noise(
    turn: tuple[float, ...], angles: tuple[float, ...], local: tuple[float, ...], g: tuple[float, ...]
) -> None:
    values = list(angles), [0.2, 0.3, 0.4], list(local), list(g)
    before = turned(Rotation.identity(), *values)
    after = turned(Rotation.from_euler("ZYZ", turn), *values)
    for key in (
        key for key in SHOWN if key.startswith(("larmor.", "noise.", "coherence.")) and key not in NO_DIRECTION
    ):
        assert of(after, key) == pytest.approx(of(before, key), rel=1e-6, abs=1e-9, nan_ok=True), key


UNITS: list[dict[str, tuple[str, str]]] = [
    {"magnet.field": ("650 mT", "0.65 T"), "magnet.rating": ("1 T", "1000 mT")},
    {"magnet.elevation": ("0.3 ± 0.1 deg", "0.3 deg ± 33.333333333333333333 %")},
    {"chip.electron_temperature": ("95 ± 10 mK", "0.095 ± 0.01 K")},
    {"source.low": ("1000 MHz", "1 GHz"), "source.high": ("18 GHz", "18000000 kHz")},
    {"workload.longest_wait": ("1.5 us", "1500 ns"), "calibration.interval": ("20 min", "1200 s")},
    {"model.spinful_fraction": ("800 ppm", "0.08 %"), "clock.deviation_1s": ("1e-11", "0.01 ppb")},
    {"qubit.Q1.frequency_noise": ("4 kHz/rtHz", "4000 Hz/sqrt(Hz)"), "qubit.Q1.valley_splitting": ("70 ueV", "0.07 meV")},
    {"qubit.Q1.local_field": ("146, 0, 8 mT", "0.146, 0, 0.008 T"), "qubit.Q1.g": ("2.0023(5)", "2.0023 ± 0.0005")},
    {"magnet.drift_driven": ("4 ppm/h", "0.0004 %/h"), "source.power": ("16 dBm", "16dBm; datasheet")},
]  # fmt: skip


@pytest.mark.parametrize("texts", UNITS, ids=lambda texts: next(iter(texts)))
def test_units_as_typed_do_not_matter(texts: dict[str, tuple[str, str]]) -> None:
    plans: list[Plan] = [plan_of({key: pair[place] for key, pair in texts.items()}) for place in (0, 1)]
    first, other = map(evaluate, plans)
    if "%" not in str(texts.get("magnet.elevation", "")):  # a relative tolerance is rounded once more
        assert plan_hash(first) == plan_hash(other)
    for key in SHOWN:
        np.testing.assert_allclose(first.columns[key].base(), other.columns[key].base(), rtol=ROUNDING, err_msg=key)
    assert [margin.verdict for margin in first.ranked] == [margin.verdict for margin in other.ranked]


def ramsey_phase(
    qubit: float, tones: tuple[float, float], wait: float, carrier: float, baseband: float, timebase: float
) -> float:
    """Phase of a Ramsey wait in rad, tones (carrier, baseband) and wait as set; each of the three has its fractional offset.

    The source makes f_set (1 + y), a timebase that runs fast waits tau / (1 + y).
    """
    made = tones[0] * (1 + carrier) + tones[1] * (1 + baseband)
    return 2 * pi * (qubit - made) * wait / (1 + timebase)


def calibrated(qubit: float, tones: tuple[float, float], carrier: float, baseband: float, timebase: float) -> float:
    """The baseband tone that a Ramsey calibration of 4 us finds with these offsets, its phase read without noise."""
    wait = 4e-6
    phase = ramsey_phase(qubit, tones, wait, carrier, baseband, timebase)
    return tones[1] + phase / (2 * pi * wait)


QUBIT, CARRIER, START, WAIT = 15.845e9, 16.165e9, -320.02e6, 1.5e-6
PHASE_ROUNDING = 2e-9  # rad: 15.8 GHz in 53 bits is good to 2e-6 Hz, a few of them over 1.5 us
offsets = between(-1e-6, 1e-6)


@given(offset=offsets, detuning=between(-1e5, 1e5))
def test_a_common_offset_cancels_once_the_calibration_used_the_same(offset: float, detuning: float) -> None:
    common = (offset, offset, offset)
    tone = calibrated(QUBIT, (CARRIER, START), *common)
    run = ramsey_phase(QUBIT, (CARRIER, tone + detuning), WAIT, *common)
    assert run == pytest.approx(-2 * pi * detuning * WAIT, abs=PHASE_ROUNDING)


@given(offset=offsets)
def test_an_oscillator_may_even_be_tuned_elsewhere_under_a_common_offset_but_not_a_loose_one(offset: float) -> None:
    moved = 100e6  # between calibration and run, the sum of both tones stays as set
    for others in (offset, 0.0):
        tone = calibrated(QUBIT, (CARRIER, START), offset, others, others)
        run = ramsey_phase(QUBIT, (CARRIER + moved, tone - moved), WAIT, offset, others, others)
        assert run == pytest.approx(-2 * pi * moved * (offset - others) * WAIT, abs=PHASE_ROUNDING)


@given(offset=offsets, common=offsets, loose=st.sampled_from(["carrier", "baseband"]))
def test_an_offset_on_one_tone_only_does_not_cancel(offset: float, common: float, loose: str) -> None:
    tone = calibrated(QUBIT, (CARRIER, START), common, common, common)
    run = {"carrier": common, "baseband": common, "timebase": common}
    run[loose] += offset
    weight = {"carrier": CARRIER, "baseband": tone}[loose]
    expected = -2 * pi * weight * offset * WAIT / (1 + common)
    assert ramsey_phase(QUBIT, (CARRIER, tone), WAIT, **run) == pytest.approx(expected, abs=PHASE_ROUNDING)


def test_one_tone_a_millionth_off_turns_a_qubit_by_many_times_what_is_allowed() -> None:
    tone = calibrated(QUBIT, (CARRIER, START), 0, 0, 0)
    assert abs(ramsey_phase(QUBIT, (CARRIER, tone), WAIT, 1e-6, 0, 0)) == pytest.approx(0.15235, rel=1e-4)


def test_why_begins_with_what_cancels() -> None:
    evaluation = evaluate(plan_of(second()))
    assert explanation(evaluation, "clock.required_accuracy")[0].lower().startswith("a constant offset cancels")
