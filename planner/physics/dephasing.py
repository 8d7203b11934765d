"""Loss of phase: chi(t) of static, 1/f and white frequency noise, free or refocused, and the times it allows.

Convention: one-sided spectra in ordinary frequency, W(t) = exp(-chi(t)), T2* the 1/e time of W. Free 1/f noise is the
exact filter-function integral from the lowest frequency that counts; refocused by n pulses at t (k - 1/2)/n it is
chi_n = (2 pi A t)^2 c_n / 2 with the c_n of the same integral from zero frequency.
"""

from __future__ import annotations

from functools import cache
from math import factorial, fsum, log

import numpy as np

from planner.constants import APERY, EULER_GAMMA
from planner.declare import law
from planner.kinds import ANGLE, COUNT, FRACTION, FREQUENCY, FREQUENCY_NOISE, TIME, WHITE_NOISE
from planner.physics import Array

_SERIES_END = 12.0  # the power series of the flicker integral loses fewer than four digits up to here
_SERIES = tuple((-1) ** k / (factorial(2 * k) * (2 * k - 2)) for k in range(2, 28))
_FEW = 4  # terms that reach double precision below 0.05
_LAGUERRE_POINTS, _LAGUERRE_WEIGHTS = np.polynomial.laguerre.laggauss(40)


@law(FREQUENCY, time=TIME)
def lowest_frequency(*, time: Array) -> Array:
    """Slowest noise that counts: one over the length of the record."""
    return 1 / time


@law(
    FREQUENCY,
    reference="ithier2005",
    place="free evolution under 1/f noise",
    amplitude=FREQUENCY_NOISE,
    lowest=FREQUENCY,
    time=TIME,
)
def flicker_rms(*, amplitude: Array, lowest: Array, time: Array) -> Array:
    """Static rms that dephases as much as free 1/f noise after `time`: sqrt(2 chi)/(2 pi t) = A sqrt(2 J(2 pi f_l t)).

    Formula: none; A sqrt(2 J(2 pi f_l t)), J(z) the integral of (1 - cos u)/u^3 from z on, by its series and
    auxiliary functions.
    """
    return amplitude * np.sqrt(2 * flicker_integral(2 * np.pi * lowest * time))


@law(FREQUENCY, reference="cywinski2008", place="white noise, any sequence", density=WHITE_NOISE, time=TIME)
def white_rms(*, density: Array, time: Array) -> Array:
    """Static rms that dephases as much as white noise after `time`: sqrt(2 chi)/(2 pi t), chi = pi^2 S t."""
    return np.sqrt(density / (2 * time))


@law(
    FREQUENCY,
    reference="jcgm100",
    place="5.1.2",
    nuclear=FREQUENCY,
    barrier=FREQUENCY,
    magnet=FREQUENCY,
    measured_t2_star=TIME,
    drift=FREQUENCY,
    calibration=FREQUENCY,
    clock=FREQUENCY,
    loose=FREQUENCY,
)
def static_noise(
    *,
    nuclear: Array,
    barrier: Array,
    magnet: Array,
    measured_t2_star: Array,
    drift: Array,
    calibration: Array,
    clock: Array,
    loose: Array,
) -> Array:
    """Root-sum-square of what stays put over one sequence; a measured T2* stands for nuclei, barrier and magnet.

    Formula: sqrt((nuclear**2 + barrier**2 + magnet**2 if unknown(measured_t2_star) else 1 / (sqrt(2) * pi *
    measured_t2_star)**2) + drift**2 + calibration**2 + clock**2 + loose**2)
    """
    bath = np.where(
        np.isnan(measured_t2_star), nuclear**2 + barrier**2 + magnet**2, rms_of_t2_star(measured_t2_star) ** 2
    )
    return np.sqrt(bath + drift**2 + calibration**2 + clock**2 + loose**2)


@law(FREQUENCY_NOISE, amplitude=FREQUENCY_NOISE, measured_t2_star=TIME)
def free_flicker(*, amplitude: Array, measured_t2_star: Array) -> Array:
    """1/f amplitude that counts in free evolution: none beside a measured T2*, which contains it."""
    return np.where(np.isnan(measured_t2_star), amplitude, 0.0)


@law(WHITE_NOISE, density=WHITE_NOISE, measured_t2_star=TIME)
def free_white(*, density: Array, measured_t2_star: Array) -> Array:
    """White noise that counts in free evolution: none beside a measured T2*, which contains it."""
    return np.where(np.isnan(measured_t2_star), density, 0.0)


@law(
    FREQUENCY,
    reference="jcgm100",
    place="5.1.2",
    static=FREQUENCY,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    lowest=FREQUENCY,
    time=TIME,
)
def total_noise(*, static: Array, amplitude: Array, density: Array, lowest: Array, time: Array) -> Array:
    """Root-sum-square of the static noise and of what 1/f and white noise do over `time`.

    Formula: none; sqrt(static^2 + 2 A^2 J(2 pi f_l t) + S/(2 t)), J(z) the integral of (1 - cos u)/u^3 from z on.
    """
    flicker = flicker_rms(amplitude=amplitude, lowest=lowest, time=time)
    return np.sqrt(static**2 + flicker**2 + white_rms(density=density, time=time) ** 2)


@law(
    TIME,
    reference="ithier2005",
    place="1/e time of the free decay",
    nuclear=FREQUENCY,
    barrier=FREQUENCY,
    magnet=FREQUENCY,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    lowest=FREQUENCY,
    measured=TIME,
)
def t2_star(
    *, nuclear: Array, barrier: Array, magnet: Array, amplitude: Array, density: Array, lowest: Array, measured: Array
) -> Array:
    """T2*: measured, else the time at which chi of nuclei, barrier, magnet, charge and white noise is 1; nan if never.

    Formula: none; where none is measured, the root t of (2 pi t)^2 (s^2/2 + A^2 J(2 pi f_l t)) + pi^2 S t = 1 by
    Newton, s^2 the sum of the squares of nuclei, barrier and magnet, J(z) the integral of (1 - cos u)/u^3 from z
    on.
    """
    static = np.sqrt(nuclear**2 + barrier**2 + magnet**2)
    model = time_of_chi(chi=np.asarray(1.0), static=static, amplitude=amplitude, density=density, lowest=lowest)
    return np.where(np.isnan(measured), model, measured)


@law(
    TIME,
    reference="cywinski2008",
    place="Hahn echo under 1/f and white noise",
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
)
def t2_echo(*, amplitude: Array, density: Array) -> Array:
    """1/e time after one refocusing pulse: chi = (2 pi A t)^2 ln(2)/2 + pi^2 S t = 1; nan where there is no such noise.

    Formula: nan if amplitude + density == 0 else 1 / (pi**2 * density / 2 + sqrt((pi**2 * density / 2)**2 + 2 * (pi
    * amplitude)**2 * log(2)))
    """
    return refocused_time(chi=np.asarray(1.0), amplitude=amplitude, density=density, pulses=np.asarray(1.0))


@law(
    ANGLE,
    reference="cywinski2008",
    place="filter functions",
    total=FREQUENCY,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    wait=TIME,
    pulses=COUNT,
)
def wait_phase(*, total: Array, amplitude: Array, density: Array, wait: Array, pulses: Array) -> Array:
    """Rms phase over the longest wait: 2 pi t sigma where nothing refocuses, else sqrt(2 chi_n) of charge and white noise.

    Formula: none; 2 pi t sigma without pulses, else sqrt((2 pi A t)^2 c_n + 2 pi^2 S t), c_n a finite sum over
    pairs of pulses.
    """
    refocused = np.sqrt(2 * refocused_chi(amplitude=amplitude, density=density, time=wait, pulses=pulses))
    return np.where(pulses > 0, refocused, 2 * np.pi * wait * total)


@law(
    FREQUENCY,
    measured=TIME,
    nuclear=FREQUENCY,
    barrier=FREQUENCY,
    magnet=FREQUENCY,
    amplitude=FREQUENCY_NOISE,
    density=WHITE_NOISE,
    lowest=FREQUENCY,
)
def unexplained_noise(
    *, measured: Array, nuclear: Array, barrier: Array, magnet: Array, amplitude: Array, density: Array, lowest: Array
) -> Array:
    """What the model leaves unexplained of a measured T2*: sqrt(2 max(0, 1 - chi_model(T2*)))/(2 pi T2*).

    Formula: none; as described, chi_model = (2 pi t)^2 (s^2/2 + A^2 J(2 pi f_l t)) + pi^2 S t at t = T2*, s^2 the
    sum of the squares of nuclei, barrier and magnet, J(z) the integral of (1 - cos u)/u^3 from z on.
    """
    static = np.sqrt(nuclear**2 + barrier**2 + magnet**2)
    model = free_chi(static=static, amplitude=amplitude, density=density, lowest=lowest, time=measured)
    return np.sqrt(2 * np.maximum(0.0, 1 - model)) / (2 * np.pi * measured)


def rms_of_t2_star(t2_star: Array) -> Array:
    """Static rms 1/(sqrt2 pi T2*) of a Gaussian decay exp(-(t/T2*)^2)."""
    return 1 / (np.sqrt(2) * np.pi * t2_star)


@law(FRACTION, static=FREQUENCY, amplitude=FREQUENCY_NOISE, density=WHITE_NOISE, lowest=FREQUENCY, time=TIME)
def free_chi(*, static: Array, amplitude: Array, density: Array, lowest: Array, time: Array) -> Array:
    """chi after free evolution over `time`; 0 at time 0.

    Formula: none; (2 pi t)^2 (s^2/2 + A^2 J(2 pi f_l t)) + pi^2 S t, J(z) the integral of (1 - cos u)/u^3 from z
    on.
    """
    flicker = np.where(time > 0, flicker_integral(2 * np.pi * lowest * np.where(time > 0, time, 1.0)), 0.0)
    return (2 * np.pi * time) ** 2 * (static**2 / 2 + amplitude**2 * flicker) + np.pi**2 * density * time


def refocused_chi(*, amplitude: Array, density: Array, time: Array, pulses: Array) -> Array:
    """chi after `time` with n refocusing pulses: only 1/f and white noise are left."""
    return (2 * np.pi * amplitude * time) ** 2 * refocusing_weight(pulses) / 2 + np.pi**2 * density * time


def refocused_time(*, chi: Array, amplitude: Array, density: Array, pulses: Array) -> Array:
    """Time at which the refocused chi reaches `chi`; nan where it never does."""
    half_white = np.pi**2 * density / 2
    quadratic = 2 * (np.pi * amplitude) ** 2 * refocusing_weight(pulses)
    below = half_white + np.sqrt(half_white**2 + quadratic * chi)
    return np.where(below > 0, chi / np.where(below > 0, below, 1.0), np.nan)


def time_of_chi(*, chi: Array, static: Array, amplitude: Array, density: Array, lowest: Array) -> Array:
    """Time at which the free chi reaches `chi`; nan where it never does (1/f noise alone saturates beyond the record).

    Newton's rule on ln chi against ln t, which is nearly a straight line; steps are kept within a factor e^2.
    """
    gaussian = np.sqrt(chi) / (2 * np.pi * np.sqrt(static**2 / 2 + 8 * amplitude**2) + 1e-300)
    time = np.minimum(gaussian, chi / (np.pi**2 * density + 1e-300))
    for _ in range(60):
        z = 2 * np.pi * lowest * time
        quadratic = (2 * np.pi * time) ** 2
        integral = flicker_integral(z)
        white = np.pi**2 * density * time
        value = quadratic * (static**2 / 2 + amplitude**2 * integral) + white
        slope = quadratic * (static**2 + amplitude**2 * (2 * integral - _one_minus_cos(z) / z**2)) + white
        step = np.clip(np.log(chi / value) * value / slope, -2.0, 2.0)
        time = time * np.exp(step)
        if not np.any(np.abs(step) > 1e-14):
            break
    reached = free_chi(static=static, amplitude=amplitude, density=density, lowest=lowest, time=time)
    return np.where(np.abs(reached / chi - 1) < 1e-9, time, np.nan)


def flicker_integral(z: Array) -> Array:
    """J(z) = integral from z to infinity of (1 - cos u)/u^3 du for z > 0; chi of free 1/f noise is (2 pi A t)^2 J(2 pi f_l t).

    J = (3/2 - gamma - ln z)/2 + z^2/48 - ... near 0; beyond the series by parts, with the auxiliary functions of the cosine
    integral by Gauss-Laguerre.
    """
    z = np.asarray(z, dtype=float)
    few = not np.any(z > 0.05)
    head = (1.5 - EULER_GAMMA - np.log(z)) / 2 + _series(np.minimum(z, _SERIES_END), _FEW if few else len(_SERIES))
    return (
        np.where(z > _SERIES_END, _far_integral(np.maximum(z, _SERIES_END)), head) if np.any(z > _SERIES_END) else head
    )


def refocusing_weight(pulses: Array) -> Array:
    """c_n of n pulses (n >= 1), 0 pulses give nan: c_1 = ln 2, n c_n -> 7 zeta(3)/pi^2."""
    counts = np.asarray(pulses, dtype=float)
    return np.reshape([_weight(int(n)) if n >= 1 else np.nan for n in counts.ravel()], counts.shape)


@cache
def _weight(n: int) -> float:
    """c_n = sum over i < j of k_i k_j s^2 ln s, s the distance of two of the times 0, (k - 1/2)/n, 1, in closed form.

    The k are the steps of the sign of the accumulated phase (-1, 2, -2, ..., +-1). Beyond 1000 pulses the sum, which
    cancels, is continued by its 1/n approach to the limit.
    """
    if n > 1000:
        limit = 7 * APERY / np.pi**2
        return float((limit - (limit - 1000 * _weight(1000)) * 1000 / n) / n)
    between = (4 * (-1) ** m * (n - m) * _square_log(m / n) for m in range(1, n))
    ends = (4 * (-1) ** k * _square_log((k - 0.5) / n) for k in range(1, n + 1))
    return fsum((*between, *ends))


def _square_log(s: float) -> float:
    return s * s * log(s)


def _series(z: Array, terms: int) -> Array:
    squared = z * z
    result = np.zeros_like(z)
    for factor in reversed(_SERIES[:terms]):
        result = (result + factor) * squared
    return result


def _far_integral(z: Array) -> Array:
    # 1/z - f(z) and g(z), f and g the auxiliary functions of the cosine integral (DLMF 6.7.13, 6.7.14)
    s, w = _LAGUERRE_POINTS, _LAGUERRE_WEIGHTS
    ratio = s / z[..., None]
    rest = (w * ratio**2 / (1 + ratio**2)).sum(axis=-1) / z
    g = (w * ratio / (1 + ratio**2)).sum(axis=-1) / z
    return _one_minus_cos(z) / (2 * z**2) + (rest * np.sin(z) + g * np.cos(z)) / 2


def _one_minus_cos(z: Array) -> Array:
    return 2 * np.sin(z / 2) ** 2
