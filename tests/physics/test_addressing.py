"""Crosstalk, images and leakage against simulated spins and a search through all pairs."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.physics import Array, addressing
from tests.physics import near, qutip, row


def driven(rabi: float, distance: float) -> Any:
    """A spin under a drive that is off by `distance`, in the frame of the drive (per h)."""
    return np.pi * (distance * qutip.sigmaz() + rabi * qutip.sigmax())


def brute(tones: Array, frequency: Array, strength: Array, used: Array) -> Array:
    found = np.zeros(len(tones))
    for i, tone in enumerate(tones):
        others = [j for j in range(len(tones)) if j != i and used[j] > 0]
        found[i] = max((strength[j] / abs(tone - frequency[j]) for j in others), default=0.0)
    return found


@pytest.mark.parametrize(("ratio", "flip"), [(0.1, 9.9009901e-3), (0.01, 9.9990001e-5), (1.0, 0.5)])
def test_largest_flip_of_a_detuned_drive(ratio: float, flip: float) -> None:
    found = float(addressing.flip(ratio=row(ratio))[0])
    assert found == near(flip, rel=1e-8)  # r^2/(1 + r^2), by hand
    times = np.linspace(0, 1 / np.hypot(ratio, 1.0), 201)
    states = [(-1j * driven(ratio, 1.0) * t).expm() * qutip.basis(2, 0) for t in times]
    assert found == near(max(abs(complex(qutip.basis(2, 1).dag() * s)) ** 2 for s in states), rel=1e-9)


def test_phase_of_a_detuned_drive_over_a_pi_pulse() -> None:
    # W = 1, D = 20, the full drive: exact phase 0.0784907902, first order pi W^2 t/D = 0.0785398163
    found = float(addressing.crosstalk_phase(ratio=row(1 / 20), drive_leak=row(1.0))[0])
    assert found == near(0.0784907902, rel=1e-8)
    levels = driven(1.0, 20.0).eigenenergies()
    assert found == near(float(levels[1] - levels[0]) * 0.5 - 2 * np.pi * 20 * 0.5, rel=1e-9)
    assert found == pytest.approx(np.pi * 0.5 / 20, rel=1e-3)


@pytest.mark.parametrize("leak", [0.05, 0.3, 1.0])
def test_phase_of_a_leaking_drive_is_that_of_the_spectrum(leak: float) -> None:
    rabi, distance = 4.0, 50.0  # the other qubit's pi pulse lasts 1/(2 f_R); this one sees a part of its amplitude
    levels = driven(leak * rabi, distance).eigenenergies()
    expected = float(levels[1] - levels[0] - 2 * np.pi * distance) / (2 * rabi)
    found = addressing.crosstalk_phase(ratio=row(leak * rabi / distance), drive_leak=row(leak))
    assert float(found[0]) == near(expected, rel=1e-9)


def ratios(frequency: Array, rabi: Array, used: Array, leak: float = 0.1) -> Array:
    largest = addressing.largest_rabi(rabi_frequency=rabi, in_use=used)
    return addressing.crosstalk_ratio(
        frequency=frequency, rabi_frequency=rabi, largest=largest, drive_leak=row(leak), in_use=used
    )


@given(st.integers(0, 10**6))
def test_the_worst_neighbour_is_the_worst_of_all_pairs(seed: int) -> None:
    random = np.random.default_rng(seed)
    count = int(random.integers(1, 17))
    frequency, rabi = random.uniform(1e9, 2e9, count), random.uniform(1e6, 9e6, count)
    used = (random.random(count) < 0.7).astype(float)
    expected = brute(frequency, frequency, 0.1 * rabi, used)
    if used.any():
        np.testing.assert_allclose(ratios(frequency, rabi, used), expected, rtol=1e-10)


def test_many_alike_qubits_are_compared_with_their_nearest() -> None:
    random = np.random.default_rng(5)
    frequency, rabi, used = random.uniform(1e9, 3e9, 200), np.full(200, 2e6), np.ones(200)
    np.testing.assert_allclose(ratios(frequency, rabi, used), brute(frequency, frequency, 0.1 * rabi, used), rtol=1e-9)


def test_one_qubit_alone_suffers_nothing_and_spares_drive_nothing() -> None:
    assert ratios(row(1e9), row(1e6), row(1))[0] == 0
    np.testing.assert_allclose(ratios(row(1e9, 1.1e9, 1.2e9), row(1e6, 1e6, 1e6), row(1, 0, 1)), [5e-4, 1e-3, 5e-4])


def test_images_of_others_land_mirrored_at_the_oscillator() -> None:
    frequency, rabi, used = row(1.0e9, 1.31e9, 1.55e9), row(1e6, 2e6, 3e6), row(1, 1, 1)
    arguments = {"frequency": frequency, "oscillator": row(1.15e9), "in_use": used}
    found = addressing.image_ratio(
        rabi_frequency=rabi, largest=row(3e6), drive_leak=row(0.1), image=row(1e-4), **arguments
    )
    strength = 0.1 * 1e-2 * rabi  # -40 dB of power is a hundredth of the amplitude
    np.testing.assert_allclose(found, brute(2.3e9 - frequency, frequency, strength, used), rtol=1e-9)
    distance = addressing.image_distance(**arguments)
    np.testing.assert_allclose(distance, [0.01e9, 0.01e9, 0.25e9], rtol=1e-7)  # images at 1.30, 0.99 and 0.75 GHz


def test_the_image_of_a_qubit_alone_has_no_distance() -> None:
    alone = addressing.image_distance(frequency=row(1e9), oscillator=row(1.1e9), in_use=row(1))
    assert np.isnan(alone).all()


def test_leakage_is_the_oscillator_at_its_distance() -> None:
    offset = addressing.offset_size(intermediate=row(-50e6, 100e6))
    found = addressing.leakage_ratio(offset=offset, largest=row(5e6), leakage=row(1e-4))
    np.testing.assert_allclose(found, [1e-3, 5e-4])  # 5 MHz x 10^(-40/20) over the distance


def test_reach_partners_and_largest_rabi_look_at_qubits_in_use() -> None:
    used = row(1, 0, 1)
    np.testing.assert_array_equal(addressing.partners(in_use=used), [1.0])
    np.testing.assert_array_equal(addressing.largest_rabi(rabi_frequency=row(1, 9, 2), in_use=used), [2.0])
    for width, reached in [(500e6, 1.0), (499e6, 0.0)]:
        found = addressing.reaches_all(intermediate=row(-500e6, 900e6, 10e6), in_use=used, half_width=row(width))
        np.testing.assert_array_equal(found, [reached])


def test_time_share_of_calibration() -> None:
    found = addressing.time_share(
        in_use=row(1, 0, 1), shots=row(800), shot_time=row(120e-6), wait=row(4e-6, 9, 6e-6), interval=row(1200)
    )
    assert float(found[0]) == near(800 * (124e-6 + 126e-6) / 1200)  # by hand
