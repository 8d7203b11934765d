"""The reference: how much it may change between calibration and run, and how much it does (Riley, NIST SP 1065)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from planner.declare import law
from planner.kinds import COUNT, DRIFT, FRACTION, FREQUENCY, TIME
from planner.physics import Array

_GAUSS_POINTS, _GAUSS_WEIGHTS = np.polynomial.legendre.leggauss(12)


@law(
    FRACTION,
    reference="riley2008",
    place="eq. of white and flicker FM, table 'power law noise'",
    deviation_1s=FRACTION,
    deviation_100s=FRACTION,
)
def white_fm(*, deviation_1s: Array, deviation_100s: Array) -> Array:
    """w: Allan deviation at 1 s of the white part, from s1^2 = w^2 + F^2 and s100^2 = w^2/100 + F^2."""
    return np.sqrt(np.maximum(0.0, deviation_1s**2 - deviation_100s**2) / 0.99)


@law(
    FRACTION,
    reference="riley2008",
    place="eq. of white and flicker FM, table 'power law noise'",
    deviation_1s=FRACTION,
    deviation_100s=FRACTION,
    white=FRACTION,
)
def flicker_fm(*, deviation_1s: Array, deviation_100s: Array, white: Array) -> Array:
    """F: flicker floor of the Allan deviation, from the same two equations; below 3e-5 of s1 it counts as none.

    Formula: sqrt(deviation_100s**2 - white**2 / 100 if deviation_100s**2 - white**2 / 100 >= 1e-9 * deviation_1s**2
    else 0)
    """
    squared = np.maximum(0.0, deviation_100s**2 - white**2 / 100)
    return np.sqrt(np.where(squared < 1e-9 * deviation_1s**2, 0.0, squared))


@law(FRACTION, reference="riley2008", place="white FM slope", deviation_1s=FRACTION)
def tenth(*, deviation_1s: Array) -> Array:
    """Allan deviation at 100 s of a reference that shows white FM only: that at 1 s over 10."""
    return deviation_1s / 10


@law(TIME, sequence_time=TIME, longest_wait=TIME, shot_time=TIME)
def run_time(*, sequence_time: Array, longest_wait: Array, shot_time: Array) -> Array:
    """Length of the run that the clock must survive: the sequence, else the longest wait, else a shot.

    Formula: known(sequence_time, longest_wait, shot_time)
    """
    waited = np.where(np.isnan(longest_wait), shot_time, longest_wait)
    return np.where(np.isnan(sequence_time), waited, sequence_time)


@law(TIME, shots=COUNT, shot_time=TIME)
def averaging_time(*, shots: Array, shot_time: Array) -> Array:
    """Time over which a calibration averages the clock."""
    return shots * shot_time


@law(
    FRACTION,
    reference="riley2008",
    place="variance of two averages, generalised covariance of flicker FM",
    white=FRACTION,
    flicker=FRACTION,
    aging=DRIFT,
    run=TIME,
    gap=TIME,
    averaging=TIME,
)
def clock_change(*, white: Array, flicker: Array, aging: Array, run: Array, gap: Array, averaging: Array) -> Array:
    """Expected fractional change of the reference between a calibration and a run `gap` later.

    White FM of the calibration's average, flicker FM of both averages, and ageing, which adds coherently. White FM of the
    run itself is what `required_stability` judges.

    Formula: none; sqrt(w^2/averaging + F^2 V) + aging (run/2 + gap + averaging/2), V the variance of the difference
    of two means of flicker FM, by Gauss over the shorter one.
    """
    random = np.sqrt(white**2 / averaging + flicker**2 * flicker_variance(run=run, gap=gap, averaging=averaging))
    return random + aging * (run / 2 + gap + averaging / 2)


@law(FRACTION, source_share=FRACTION, allowed_noise=FREQUENCY, frequency=FREQUENCY)
def required_accuracy(*, source_share: Array, allowed_noise: Array, frequency: Array) -> Array:
    """Largest fractional change of a tone between calibration and run that keeps its share of the allowed noise.

    A constant offset y turns f into f/(1 + y) in the calibration and in every later phase alike, and so cancels exactly.
    """
    return source_share * allowed_noise / frequency


@law(
    FRACTION,
    reference="ball2016",
    place="phase of a two-sample variance",
    source_share=FRACTION,
    frequency=FREQUENCY,
    sequence_time=TIME,
    allowed_sequence_error=FRACTION,
)
def required_stability(
    *, source_share: Array, frequency: Array, sequence_time: Array, allowed_sequence_error: Array
) -> Array:
    """Allan deviation at the sequence's length at which the clock takes its share of the phase that the sequence allows.

    Formula: source_share * sqrt(-2 * log(1 - 3 * allowed_sequence_error)) / (2 * pi * frequency * sequence_time *
    sqrt(2))
    """
    phase = np.sqrt(-2 * np.log1p(-3 * allowed_sequence_error))
    return source_share * phase / (2 * np.pi * frequency * sequence_time * np.sqrt(2))


@law(
    FRACTION,
    reference="riley2008",
    place="white FM slope and flicker floor",
    white=FRACTION,
    flicker=FRACTION,
    sequence_time=TIME,
)
def stability(*, white: Array, flicker: Array, sequence_time: Array) -> Array:
    """Expected Allan deviation at the sequence's length, sqrt(w^2/T + F^2); below 0.1 s only an upper bound."""
    return np.sqrt(white**2 / sequence_time + flicker**2)


def below_allan_range(*, sequence_time: Array) -> NDArray[np.bool_]:
    """Where white FM is extrapolated below 0.1 s, which overstates a quartz clock (white and flicker PM rule there)."""
    return np.asarray(sequence_time < 0.1)


def flicker_variance(*, run: Array, gap: Array, averaging: Array) -> Array:
    """Var(mean over the run - mean over the calibration) of flicker FM with Allan deviation 1.

    With K(s) = s^2 ln|s| / (4 ln 2) the double difference is the mean of 2 ln s + 3 over both intervals, so
    Var = (3 + 2 <ln(gap + a + b)> - ln run - ln averaging) / (2 ln 2). The mean over the longer interval is in closed form;
    over the shorter one by Gauss, with s ln s in closed form too where the gap is so short that it is not smooth.
    """
    run, gap, averaging = np.broadcast_arrays(run, gap, averaging)
    short, long = np.minimum(run, averaging), np.maximum(run, averaging)
    starts = gap[..., None] + short[..., None] * (1 + _GAUSS_POINTS) / 2
    smooth = (_mean_log(starts, long[..., None]) * _GAUSS_WEIGHTS / 2).sum(axis=-1)
    ends = starts + long[..., None]
    upper = (ends * np.log(ends) * _GAUSS_WEIGHTS / 2).sum(axis=-1)
    lower = (_primitive(gap + short) - _primitive(gap)) / short
    mean = np.where(short < 0.1 * gap, smooth, (upper - lower) / long - 1)
    return (3 + 2 * mean - np.log(run) - np.log(averaging)) / (2 * np.log(2))


def _mean_log(start: Array, length: Array) -> Array:
    """Mean of ln over [start, start + length]."""
    ratio = length / start
    small = ratio < 1e-3
    safe = np.where(small, 1.0, ratio)
    closed = ((1 + safe) * np.log1p(safe) - safe) / safe
    series = ratio / 2 - ratio**2 / 6 + ratio**3 / 12 - ratio**4 / 20
    return np.log(start) + np.where(small, series, closed)


def _primitive(s: Array) -> Array:
    """Integral of s ln s."""
    return s**2 * (np.log(np.where(s > 0, s, 1.0)) / 2 - 0.25)
