"""From noise to error per gate and number of gates, and back."""

from __future__ import annotations

from math import pi

import numpy as np
import pytest
from scipy.integrate import quad  # type: ignore[import-untyped]

from planner.physics import gates
from planner.physics.dephasing import free_chi, rms_of_t2_star, time_of_chi

from . import assert_axes_agree, near, qutip, row

NONE = row(0.0)


def lost(ratio: float) -> float:
    """Average infidelity of a pi pulse detuned by r Rabi frequencies: 2/3 (1 - sin^2((pi/2) s)/s^2), s^2 = 1 + r^2."""
    squared = 1 + ratio**2
    return float(2 / 3 * (ratio**2 + np.cos(pi / 2 * np.sqrt(squared)) ** 2) / squared)


def averaged(ratio: float, precision: float = 1e-9) -> float:
    """The same over Gaussian detuning of standard deviation `ratio`, by adaptive quadrature."""
    weighted = quad(lambda x: np.exp(-x * x / 2) * lost(ratio * x), 0, 9, limit=8000, epsabs=0, epsrel=precision)[0]
    return float(2 * weighted / np.sqrt(2 * pi))


def pulse_error(ratio: float) -> float:
    return float(gates.detuned_pulse_error(row(ratio))[0])


def relaxing(*, time: float, t1: float, dephasing_chi: float) -> qutip.Qobj:
    """The channel of relaxation over `time` with pure dephasing exp(-chi) on top, by qutip's master equation."""
    rate = dephasing_chi / time
    collapse = [np.sqrt(1 / t1) * qutip.sigmam(), np.sqrt(rate / 2) * qutip.sigmaz()]
    return (qutip.liouvillian(0 * qutip.sigmaz(), collapse) * time).expm()


@pytest.mark.parametrize("ratio", [0.0, 0.01, 0.05, 0.2, 1.0, 2.5])
def test_a_detuned_pulse_by_its_unitary(ratio: float) -> None:
    # qutip: rotation by pi about x, detuned along z, against the wanted one
    pulse = (-1j * pi / 2 * (qutip.sigmax() + ratio * qutip.sigmaz())).expm()
    wanted = (-1j * pi / 2 * qutip.sigmax()).expm()
    assert 1 - qutip.average_gate_fidelity(pulse, wanted) == near(lost(ratio), abs=1e-12)


@pytest.mark.parametrize(
    ("ratio", "error"), [(0.01, 6.66641124e-5), (0.05, 1.66507099e-3), (0.2, 0.0262611469)]
)  # regression
def test_a_detuned_pulse_of_the_table(ratio: float, error: float) -> None:
    assert lost(ratio) == near(error, rel=1e-8)


@pytest.mark.parametrize("ratio", [1e-4, 1e-3, 1e-2, 0.1, 0.3, 0.7, 0.999, 1.001, 2.0, 5.0, 10.0, 30.0])
def test_the_average_over_detunings_is_its_integral(ratio: float) -> None:
    assert pulse_error(ratio) == near(averaged(ratio), rel=1e-8)


@pytest.mark.parametrize("ratio", [50.0, 70.0, 100.0])
def test_the_average_over_very_wide_detunings(ratio: float) -> None:
    assert pulse_error(ratio) == near(averaged(ratio, precision=1e-7), rel=5e-6)  # the far tail is estimated


def test_the_average_over_detunings_near_its_ends() -> None:
    # small: (2/3) sigma^2/f_R^2; wide: 2/3, no rotation at all. And it only grows.
    assert pulse_error(1e-4) == near(2 / 3 * 1e-8, rel=1e-6)
    assert pulse_error(1e6) == near(2 / 3, rel=1e-5)
    assert np.all(np.diff(gates.detuned_pulse_error(np.geomspace(1e-5, 1e5, 2000))) > 0)


@pytest.mark.parametrize(
    ("rabi", "t2_star", "error"),
    [  # by = regression; the last is the device of Takeda et al. 2021
        (1e6, 1e-6, 0.0319002673),
        (1e6, 20e-6, 8.44220293e-5),
        (4e6, 1.8e-6, 6.50768249e-4),
        (6e6, 1.82e-6, 2.83e-4),
    ],
)
def test_averages_of_the_table(rabi: float, t2_star: float, error: float) -> None:
    ratio = float(rms_of_t2_star(row(t2_star))[0]) / rabi
    assert pulse_error(ratio) == near(error, rel=1e-8 if error != 2.83e-4 else 3e-3)


def test_gate_error_adds_white_noise_over_the_pulse() -> None:
    density, duration = 1e4, 250e-9
    channel = relaxing(time=duration, t1=1e12, dephasing_chi=pi**2 * density * duration)  # pure dephasing
    expected = averaged(0.01) + 1 - qutip.average_gate_fidelity(channel)
    found = gates.gate_error(detuning=row(20e3), rabi_frequency=row(2e6), density=row(density), duration=row(duration))[
        0
    ]
    assert found == near(expected, rel=1e-7)


@pytest.mark.parametrize(
    ("angle", "infidelity"), [(0.01, 1.66665278e-5), (0.1, 1.66527824e-3), (0.5, 0.0408058127)]
)  # regression
def test_error_of_a_z_rotation(angle: float, infidelity: float) -> None:
    turned = (-1j * angle / 2 * qutip.sigmaz()).expm()
    assert 1 - qutip.average_gate_fidelity(turned) == near(infidelity, rel=1e-8)
    assert (1 - np.cos(angle)) / 3 == near(infidelity, rel=1e-8)


def per_gate(**changes: float) -> float:
    start = {
        "gate_error": 0.0,
        "static": 0.0,
        "amplitude": 0.0,
        "density": 0.0,
        "lowest": 1e-3,
        "gate_time": 250e-9,
        "idle": 0.0,
        "t1": np.nan,
    }
    return float(gates.error_per_gate(**{name: row(value) for name, value in (start | changes).items()})[0])


def test_idle_error_is_the_mean_error_of_gaussian_z_rotations() -> None:
    # (1 - cos phi)/3 (qutip, above) averaged over a Gaussian phase 2 pi t delta
    spread = 2 * pi * 25e3 * 1e-6
    mean = quad(lambda x: (1 - np.cos(spread * x)) / 3 * np.exp(-x * x / 2) / np.sqrt(2 * pi), -10, 10)[0]
    assert per_gate(static=25e3, idle=1e-6) == near(mean, rel=1e-9)


def test_idle_error_takes_all_free_noise() -> None:
    noise = {"static": 25e3, "amplitude": 4e3, "density": 1e3, "lowest": 1e-3}
    chi = free_chi(time=row(1e-6), **{name: row(value) for name, value in noise.items()})[0]
    assert per_gate(**noise, idle=1e-6) == near((1 - np.exp(-chi)) / 3, rel=1e-9)
    assert per_gate(**noise, idle=0.0) == 0.0


def test_relaxation_over_gate_and_idle_time() -> None:
    # qutip: amplitude damping, T2 = 2 T1, over both times
    expected = 1 - qutip.average_gate_fidelity(relaxing(time=1.25e-6, t1=5e-6, dephasing_chi=0.0))
    assert per_gate(idle=1e-6, t1=5e-6) == near(expected, rel=1e-8)


def test_relaxation_with_dephasing_of_the_worked_row() -> None:
    # T1 = 1 ms, T2 = 20 us, 1 us: 0.0164234419 by qutip and by 1/2 - exp(-t/T1)/6 - exp(-t/T2)/3
    chi = 1e-6 * (1 / 20e-6 - 1 / 2e-3)
    assert 1 - qutip.average_gate_fidelity(relaxing(time=1e-6, t1=1e-3, dephasing_chi=chi)) == near(
        0.0164234419, rel=1e-8
    )


def test_error_per_gate_is_a_sum_and_never_more_than_a_half() -> None:
    assert per_gate(gate_error=1e-3, static=25e3, idle=1e-6) == near(1e-3 + per_gate(static=25e3, idle=1e-6))
    assert per_gate(gate_error=0.45, static=1e9, idle=1.0) == 0.5


@pytest.mark.parametrize("number", [1, 7, 50])
def test_randomised_errors_compose_as_depolarising_gates(number: int) -> None:
    # qutip: a depolarising channel of average error e, applied `number` times
    kept = 1 - 2 * 0.013
    one = kept * qutip.to_super(qutip.qeye(2)) + (1 - kept) / 4 * sum(
        qutip.to_super(pauli) for pauli in (qutip.qeye(2), qutip.sigmax(), qutip.sigmay(), qutip.sigmaz())
    )
    assert 1 - qutip.average_gate_fidelity(one) == near(0.013)
    assert sequence(error=0.013, gates=number) == near(1 - qutip.average_gate_fidelity(one**number), rel=1e-9)


def sequence(**changes: float) -> float:
    start = {
        "error": np.nan,
        "gates": 100.0,
        "aligned": 0.0,
        "static": np.nan,
        "free_amplitude": np.nan,
        "free_density": np.nan,
        "amplitude": np.nan,
        "density": np.nan,
        "lowest": 1e-3,
        "pulses": 0.0,
        "sequence_time": 10e-6,
    }
    return float(gates.sequence_error(**{name: row(value) for name, value in (start | changes).items()})[0])


@pytest.mark.parametrize("error", [1e-9, 1e-3, 0.2, 0.49])
@pytest.mark.parametrize("allowed", [1e-4, 0.1, 0.33])
def test_randomised_gates_make_the_allowed_error(error: float, allowed: float) -> None:
    reached = float(gates.gates_randomised(error=row(error), allowed=row(allowed))[0])
    assert sequence(error=error, gates=reached) == near(allowed, rel=1e-9)


def test_no_gates_from_an_error_of_one_half_on() -> None:
    np.testing.assert_array_equal(gates.gates_randomised(error=row(0.5, 0.6), allowed=row(0.1)), [0.0, 0.0])


@pytest.mark.parametrize("pulses", [0, 1, 8])
def test_aligned_gates_make_the_allowed_error(pulses: int) -> None:
    noise = {"amplitude": 3e3, "density": 500.0, "lowest": 1e-3, "pulses": float(pulses)}
    free = {"static": 20e3, "free_amplitude": 3e3, "free_density": 500.0}
    given = {name: row(value) for name, value in (noise | free).items()}
    reached = float(gates.gates_aligned(**given, allowed=row(0.1), gate_time=row(250e-9), idle=row(50e-9))[0])
    assert sequence(**noise, **free, aligned=1.0, sequence_time=reached * 300e-9) == near(0.1, rel=1e-9)


def test_aligned_errors_of_static_noise_are_one_long_wait() -> None:
    expected = (1 - np.exp(-((2 * pi * 20e3 * 10e-6) ** 2) / 2)) / 3
    quiet = {"free_amplitude": 0.0, "free_density": 0.0}
    assert sequence(aligned=1.0, static=20e3, **quiet) == near(expected, rel=1e-12)


def stands(**changes: float) -> float:
    start = {
        "rabi_frequency": 2e6,
        "idle": 50e-9,
        "wait": 1.5e-6,
        "pulses": 0.0,
        "gates": 500.0,
        "allowed_phase": 0.25,
        "allowed_gate_error": 1e-3,
        "allowed_sequence_error": 0.1,
    }
    return float(gates.allowed_noise(**{name: row(value) for name, value in (start | changes).items()})[0])


LAX = {"allowed_phase": 1e9, "gates": 1.0, "allowed_sequence_error": 0.33, "allowed_gate_error": 0.4999}


@pytest.mark.parametrize("wait", [1.5e-6, 100.0])
def test_the_allowed_phase_is_made_over_the_wait(wait: float) -> None:
    strict = stands(**{**LAX, "allowed_phase": 0.01, "wait": wait})
    assert 2 * pi * wait * strict == near(0.01, rel=1e-12)


@pytest.mark.parametrize("allowed", [1e-12, 1e-4, 1e-2, 0.3])
def test_the_allowed_gate_error_is_made_by_the_allowed_noise(allowed: float) -> None:
    sigma = stands(**{**LAX, "allowed_gate_error": allowed, "idle": 0.0})
    assert gates.gate_error(detuning=row(sigma), rabi_frequency=row(2e6), density=NONE, duration=row(250e-9))[
        0
    ] == near(allowed, rel=1e-9)


@pytest.mark.parametrize("allowed", [1e-6, 0.01, 0.1, 0.33])
@pytest.mark.parametrize("number", [1.0, 500.0, 1e9])
@pytest.mark.parametrize("idle", [0.0, 50e-9, 1e-4, 10.0])
def test_the_allowed_sequence_error_is_made_by_the_allowed_noise(allowed: float, number: float, idle: float) -> None:
    sigma = stands(**{**LAX, "allowed_sequence_error": allowed, "gates": number, "idle": idle})
    error = per_gate(gate_error=pulse_error(sigma / 2e6), static=sigma, idle=idle)
    assert sequence(error=error, gates=number) == near(allowed, rel=1e-7)


def test_the_smallest_allowance_counts_and_refocusing_drops_that_of_the_phase() -> None:
    phase = 0.25 / (2 * pi * 1.5e-6)
    others = min(
        stands(**{**LAX, "allowed_gate_error": 1e-3}), stands(**{**LAX, "gates": 500.0, "allowed_sequence_error": 0.1})
    )
    assert stands() == near(min(phase, others), rel=1e-12)
    assert stands(pulses=1.0, wait=np.nan) == near(others, rel=1e-12)


def test_times_of_pulse_sequence_and_noise() -> None:
    assert gates.pi_pulse(rabi_frequency=row(2e6))[0] == near(250e-9)
    assert gates.half(time=row(8e-6))[0] == near(4e-6)
    assert gates.same(time=row(8e-6))[0] == 8e-6
    assert gates.sequence_time(gates=row(500), gate_time=row(250e-9), idle=row(50e-9))[0] == near(150e-6)
    np.testing.assert_array_equal(gates.noise_time(wait=row(1, np.nan), gate_time=row(2, 3)), [1, 3])


def test_detuning_during_a_pulse_takes_the_flicker_noise_of_its_duration() -> None:
    noise = {"amplitude": row(4e3), "lowest": row(1e-3)}
    found = gates.pulse_detuning(static=row(20e3), duration=row(250e-9), **noise)[0]
    chi = free_chi(static=row(20e3), density=NONE, time=row(250e-9), **noise)[0]
    assert found == near(np.sqrt(2 * chi) / (2 * pi * 250e-9), rel=1e-12)


def test_reachable_gates_are_those_of_the_accumulation_that_is_judged() -> None:
    both = {"randomised": row(5.0), "aligned_gates": row(7.0)}
    assert gates.reachable_gates(**both, aligned=row(0.0))[0] == 5.0
    assert gates.reachable_gates(**both, aligned=row(1.0))[0] == 7.0


def test_axes_of_studies() -> None:
    some, small, time = row(1e3, 2e4, 5e4), row(1e-3, 1e-2, 0.1), row(1e-7, 2e-6, 3e-5)
    noise = {"amplitude": some, "density": some, "lowest": row(1e-3)}
    free = {"static": some, "free_amplitude": some, "free_density": some}
    assert_axes_agree(gates.pi_pulse, rabi_frequency=some)
    assert_axes_agree(gates.noise_time, wait=row(1, np.nan, 2), gate_time=time)
    assert_axes_agree(gates.pulse_detuning, static=some, amplitude=some, lowest=row(1e-3), duration=time)
    assert_axes_agree(gates.gate_error, detuning=some, rabi_frequency=row(1e4), density=some, duration=time)
    assert_axes_agree(
        gates.error_per_gate, gate_error=small, static=some, **noise, gate_time=time, idle=time, t1=row(np.nan, 1, 1e-4)
    )
    assert_axes_agree(gates.sequence_time, gates=some[:1], gate_time=time, idle=time)
    assert_axes_agree(gates.gates_randomised, error=small, allowed=row(0.1))
    assert_axes_agree(
        gates.gates_aligned, **free, **noise, pulses=row(0, 1, 2), allowed=row(0.1), gate_time=time, idle=time
    )
    assert_axes_agree(
        gates.sequence_error,
        error=small,
        gates=row(100),
        aligned=row(0, 1, 1),
        **free,
        **noise,
        pulses=row(0, 0, 2),
        sequence_time=time,
    )
    assert_axes_agree(gates.reachable_gates, randomised=some, aligned_gates=time, aligned=row(0, 1, 0))
    assert_axes_agree(
        gates.allowed_noise,
        rabi_frequency=some,
        idle=row(1e-5),
        wait=row(np.nan, 1e-3, 1e-6),
        pulses=row(0),
        gates=row(500),
        allowed_phase=row(0.25),
        allowed_gate_error=row(1e-3),
        allowed_sequence_error=row(0.1),
    )
    assert_axes_agree(gates.detuned_pulse_error, ratio=small * 30)


def test_free_decay_is_solved_for_any_chi() -> None:
    noise = {"static": row(20e3), "amplitude": row(3e3), "density": row(500), "lowest": row(1e-3)}
    for chi in (1e-9, 0.1, 1.0, 4.6):
        time = time_of_chi(chi=row(chi), **noise)
        assert free_chi(**noise, time=time)[0] == near(chi, rel=1e-9)
