"""From noise to error per gate, to the number of gates, and back to the noise that a qubit stands."""

from __future__ import annotations

import numpy as np

from planner.declare import law
from planner.kinds import ANGLE, COUNT, FRACTION, FREQUENCY, FREQUENCY_NOISE, NUMBER, TIME, WHITE_NOISE
from planner.physics import Array
from planner.physics.dephasing import flicker_rms, free_chi, refocused_chi, refocused_time, time_of_chi

_HERMITE_POINTS, _HERMITE_WEIGHTS = np.polynomial.hermite_e.hermegauss(32)
_NODES = _HERMITE_POINTS[16:]  # the integrand is even: half of the points carry all of the weight
_WEIGHTS = 2 * _HERMITE_WEIGHTS[16:] / _HERMITE_WEIGHTS.sum()
_GRID_STEP, _GRID_END = 0.2, 200.0
_GRID = np.arange(0.0, _GRID_END + _GRID_STEP / 2, _GRID_STEP)


@law(TIME, rabi_frequency=FREQUENCY)
def pi_pulse(*, rabi_frequency: Array) -> Array:
    """Length of a pi pulse, half a Rabi period."""
    return 1 / (2 * rabi_frequency)


@law(TIME, time=TIME)
def half(*, time: Array) -> Array:
    """Half of a time."""
    return time / 2


@law(TIME, time=TIME)
def same(*, time: Array) -> Array:
    """One time in the place of another."""
    return time


@law(TIME, wait=TIME, gate_time=TIME)
def noise_time(*, wait: Array, gate_time: Array) -> Array:
    """Time over which charge and white noise are quoted: the longest wait, or one gate where that is unset."""
    return np.where(np.isnan(wait), gate_time, wait)


@law(
    FREQUENCY,
    reference="jcgm100",
    place="5.1.2",
    static=FREQUENCY,
    amplitude=FREQUENCY_NOISE,
    lowest=FREQUENCY,
    duration=TIME,
)
def pulse_detuning(*, static: Array, amplitude: Array, lowest: Array, duration: Array) -> Array:
    """Rms detuning during a pulse: static noise and the 1/f noise of that duration.

    Formula: none; sqrt(static^2 + 2 A^2 J(2 pi f_l t)), J(z) the integral of (1 - cos u)/u^3 from z on.
    """
    return np.hypot(static, flicker_rms(amplitude=amplitude, lowest=lowest, time=duration))


@law(
    FRACTION,
    reference="pedersen2007",
    place="average fidelity of a unitary, for a detuned pi rotation",
    detuning=FREQUENCY,
    rabi_frequency=FREQUENCY,
    density=WHITE_NOISE,
    duration=TIME,
)
def gate_error(*, detuning: Array, rabi_frequency: Array, density: Array, duration: Array) -> Array:
    """Average infidelity of a pi pulse under Gaussian slow detuning, exact, plus (1 - exp(-pi^2 S t))/3 of white noise.

    Formula: none; the mean of 2/3 (1 - sin^2((pi/2) sqrt(1 + r^2))/(1 + r^2)) over Gaussian r with the rms detuning
    over the Rabi frequency, by Gauss-Hermite, and the white noise in closed form.
    """
    return detuned_pulse_error(detuning / rabi_frequency) - np.expm1(-(np.pi**2) * density * duration) / 3


@law(
    FRACTION,
    reference="nielsen2002",
    place="average fidelity of a dephasing and relaxing qubit",
    gate_error=FRACTION,
    static=FREQUENCY,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    lowest=FREQUENCY,
    gate_time=TIME,
    idle=TIME,
    t1=TIME,
)
def error_per_gate(
    *,
    gate_error: Array,
    static: Array,
    amplitude: Array,
    density: Array,
    lowest: Array,
    gate_time: Array,
    idle: Array,
    t1: Array,
) -> Array:
    """Error of one gate and its idle time: pulse, free dephasing while idle, and relaxation where T1 is given; at most 1/2.

    Formula: none; gate_error + (1 - exp(-chi))/3 + (1 - exp(-t/T1))/6 + (1 - exp(-t/(2 T1)))/3, chi that of free
    dephasing while idle and t gate and idle time.
    """
    chi = free_chi(static=static, amplitude=amplitude, density=density, lowest=lowest, time=idle)
    ratio = np.where(np.isnan(t1), 0.0, (gate_time + idle) / t1)
    relaxed = -np.expm1(-ratio) / 6 - np.expm1(-ratio / 2) / 3
    return np.minimum(0.5, gate_error - np.expm1(-chi) / 3 + relaxed)


@law(TIME, gates=COUNT, gate_time=TIME, idle=TIME)
def sequence_time(*, gates: Array, gate_time: Array, idle: Array) -> Array:
    """Length of the target circuit: gates times (gate time plus idle time)."""
    return gates * (gate_time + idle)


@law(NUMBER, reference="nielsen2002", place="composition of depolarised gates", error=FRACTION, allowed=FRACTION)
def gates_randomised(*, error: Array, allowed: Array) -> Array:
    """Gates until the sequence error is reached when errors add at random: ln(1 - 2E)/ln(1 - 2e); 0 from e = 1/2 on.

    Formula: 0 if error >= 0.5 else log(1 - 2 * allowed) / log(1 - 2 * error)
    """
    small = np.minimum(error, 0.5 - 1e-17)
    with np.errstate(divide="ignore"):
        return np.where(error >= 0.5, 0.0, np.log1p(-2 * allowed) / np.log1p(-2 * small))


@law(
    NUMBER,
    reference="cywinski2008",
    place="filter functions",
    static=FREQUENCY,
    free_amplitude=FREQUENCY_NOISE,
    free_density=WHITE_NOISE,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    lowest=FREQUENCY,
    pulses=COUNT,
    allowed=FRACTION,
    gate_time=TIME,
    idle=TIME,
)
def gates_aligned(
    *,
    static: Array,
    free_amplitude: Array,
    free_density: Array,
    amplitude: Array,
    density: Array,
    lowest: Array,
    pulses: Array,
    allowed: Array,
    gate_time: Array,
    idle: Array,
) -> Array:
    """Gates until (1 - W)/3 = E when errors add up as one wait, with refocusing pulses where there are any; nan if never.

    Formula: none; the root t of chi(t) = -ln(1 - 3 E) by Newton, free or refocused, over gate and idle time.
    """
    chi = -np.log1p(-3 * allowed)
    free = time_of_chi(chi=chi, static=static, amplitude=free_amplitude, density=free_density, lowest=lowest)
    refocused = refocused_time(chi=chi, amplitude=amplitude, density=density, pulses=pulses)
    return np.where(pulses > 0, refocused, free) / (gate_time + idle)


@law(
    FRACTION,
    reference="nielsen2002",
    place="composition of depolarised gates; dephased wait",
    error=FRACTION,
    gates=COUNT,
    aligned=NUMBER,
    static=FREQUENCY,
    free_amplitude=FREQUENCY_NOISE,
    free_density=WHITE_NOISE,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    lowest=FREQUENCY,
    pulses=COUNT,
    sequence_time=TIME,
)
def sequence_error(
    *,
    error: Array,
    gates: Array,
    aligned: Array,
    static: Array,
    free_amplitude: Array,
    free_density: Array,
    amplitude: Array,
    density: Array,
    lowest: Array,
    pulses: Array,
    sequence_time: Array,
) -> Array:
    """Error of the whole circuit by the accumulation that is judged.

    Formula: none; (1 - (1 - 2 e)^n)/2 where errors add at random, else (1 - exp(-chi))/3 with chi over the whole
    sequence.
    """
    free = free_chi(static=static, amplitude=free_amplitude, density=free_density, lowest=lowest, time=sequence_time)
    refocused = refocused_chi(amplitude=amplitude, density=density, time=sequence_time, pulses=pulses)
    one_wait = -np.expm1(-np.where(pulses > 0, refocused, free)) / 3
    with np.errstate(divide="ignore"):
        randomised = -np.expm1(gates * np.log1p(-2 * np.minimum(error, 0.5))) / 2
    return np.where(aligned > 0, one_wait, randomised)


@law(NUMBER, randomised=NUMBER, aligned_gates=NUMBER, aligned=NUMBER)
def reachable_gates(*, randomised: Array, aligned_gates: Array, aligned: Array) -> Array:
    """Gates within the allowed sequence error, by the accumulation that is judged."""
    return np.where(aligned > 0, aligned_gates, randomised)


@law(
    FREQUENCY,
    reference="pedersen2007",
    place="average fidelity of a unitary, solved for the detuning",
    rabi_frequency=FREQUENCY,
    idle=TIME,
    wait=TIME,
    pulses=COUNT,
    gates=COUNT,
    allowed_phase=ANGLE,
    allowed_gate_error=FRACTION,
    allowed_sequence_error=FRACTION,
)
def allowed_noise(
    *,
    rabi_frequency: Array,
    idle: Array,
    wait: Array,
    pulses: Array,
    gates: Array,
    allowed_phase: Array,
    allowed_gate_error: Array,
    allowed_sequence_error: Array,
) -> Array:
    """The slow detuning that a qubit stands: the smallest of what phase, gate error and sequence error allow.

    Formula: none; the smallest of allowed_phase/(2 pi wait) and of two roots, by the secant rule, of the error of a
    pulse (with its idle time) as a function of the detuning.
    """
    phase = np.where(pulses > 0, np.inf, allowed_phase / (2 * np.pi * wait))
    one_gate = -np.expm1(np.log1p(-2 * allowed_sequence_error) / gates) / 2
    pulse_alone = _tolerated_ratio(allowed_gate_error, np.zeros_like(allowed_gate_error)) * rabi_frequency
    per_gate = _tolerated_ratio(one_gate, idle * rabi_frequency) * rabi_frequency
    return np.minimum(phase, np.minimum(pulse_alone, per_gate))


def detuned_pulse_error(ratio: Array) -> Array:
    """Average of 2/3 (1 - sin^2((pi/2) sqrt(1 + r^2))/(1 + r^2)) over Gaussian r with standard deviation `ratio`.

    Gauss-Hermite up to a ratio of 1, beyond it a fine trapezoidal sum (the integrand is entire, so it converges faster than
    any power) with the mean of sin^2 for the tail.
    """
    ratio = np.asarray(ratio, dtype=float)
    small = (_lost(np.minimum(ratio, 1.0)[..., None] * _NODES) * _WEIGHTS).sum(axis=-1)
    if not np.any(ratio > 1):
        return small
    return np.where(ratio > 1, _wide_average(np.maximum(ratio, 1.0)), small)


def _lost(r: Array) -> Array:
    """Average infidelity of a pi pulse detuned by r Rabi frequencies."""
    squared = 1 + r * r
    return 2 / 3 * (r * r + np.cos(np.pi / 2 * np.sqrt(squared)) ** 2) / squared


def _wide_average(ratio: Array) -> Array:
    density = np.exp(-((_GRID / ratio[..., None]) ** 2) / 2)
    density[..., 0] /= 2
    kept = (1 - 1.5 * _lost(_GRID)) * density
    tail = np.exp(-((_GRID_END / ratio) ** 2) / 2) / (2 * _GRID_END)
    return 2 / 3 * (1 - 2 / (np.sqrt(2 * np.pi) * ratio) * (kept.sum(axis=-1) * _GRID_STEP + tail))


def _tolerated_ratio(error: Array, idle: Array) -> Array:
    """Detuning over Rabi frequency at which the pulse, with idle time (in Rabi periods) after it, makes `error`.

    Secant rule on ln(error) against ln(ratio), started from the small-detuning law; the curve is monotone and, below the
    errors that a plan may allow (1/2), close to a straight line.
    """
    error, idle = np.broadcast_arrays(error, idle)
    target = np.log(error)
    previous = np.log(error / (2 / 3 + (2 * np.pi * idle) ** 2 / 6)) / 2
    low = _log_error(previous, idle) - target
    current = previous - low / 2
    for _ in range(60):
        high = _log_error(current, idle) - target
        flat = np.abs(high - low) < 1e-14
        step = np.clip(np.where(flat, 0.0, high * (current - previous) / np.where(flat, 1.0, high - low)), -1.0, 1.0)
        previous, low, current = current, high, current - step
        if not np.any(np.abs(step) > 1e-13):
            break
    return np.exp(current)


def _log_error(log_ratio: Array, idle: Array) -> Array:
    ratio = np.exp(log_ratio)
    return np.log(detuned_pulse_error(ratio) - np.expm1(-((2 * np.pi * idle * ratio) ** 2) / 2) / 3)
