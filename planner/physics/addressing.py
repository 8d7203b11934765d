"""What a drive, an image or the leaking oscillator does to qubits that it is not meant for (square pulses, so upper bounds).

A qubit is compared with the sixteen others in use nearest to the tone on either side; those farther off disturb it less
unless their drives are more than sixteen times stronger.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from planner.declare import law
from planner.kinds import ANGLE, COUNT, FRACTION, FREQUENCY, NUMBER, RATIO, TIME
from planner.physics import Array

NEAREST = 16
REACH_SLACK = 1.0  # Hz, to which tones are compared


@law(NUMBER, in_use=NUMBER)
def partners(*, in_use: Array) -> Array:
    """How many other qubits are in use beside any one of them.

    Formula: none; the number of qubits in use less one.
    """
    return (in_use > 0).sum(axis=-1, keepdims=True) - 1.0


@law(FREQUENCY, rabi_frequency=FREQUENCY, in_use=NUMBER)
def largest_rabi(*, rabi_frequency: Array, in_use: Array) -> Array:
    """The largest Rabi frequency in use.

    Formula: none; the largest of the qubits in use.
    """
    return np.where(in_use > 0, rabi_frequency, -np.inf).max(axis=-1, keepdims=True)


@law(NUMBER, intermediate=FREQUENCY, in_use=NUMBER, half_width=FREQUENCY)
def reaches_all(*, intermediate: Array, in_use: Array, half_width: Array) -> Array:
    """1 where the local oscillator reaches every qubit in use, else 0.

    Formula: none; whether the largest |intermediate| in use is within the half width, to 1 Hz.
    """
    largest = np.where(in_use > 0, np.abs(intermediate), 0.0).max(axis=-1, keepdims=True)
    return (largest <= half_width + REACH_SLACK).astype(float)


@law(FREQUENCY, intermediate=FREQUENCY)
def offset_size(*, intermediate: Array) -> Array:
    """Distance of a qubit from the local oscillator."""
    return np.abs(intermediate)


@law(FREQUENCY, frequency=FREQUENCY, oscillator=FREQUENCY, in_use=NUMBER)
def image_distance(*, frequency: Array, oscillator: Array, in_use: Array) -> Array:
    """Distance of this qubit's image, 2 LO - f, from the nearest other qubit in use; nan where there is none.

    Formula: none; the smallest |2 LO - f - f_j| over the other qubits in use.
    """
    ratio = _worst_ratio(2 * oscillator - frequency, frequency, np.ones_like(frequency), in_use)
    return 1 / np.where(ratio > 0, ratio, np.nan)


@law(
    NUMBER,
    frequency=FREQUENCY,
    rabi_frequency=FREQUENCY,
    largest=FREQUENCY,
    drive_leak=FRACTION,
    in_use=NUMBER,
)
def crosstalk_ratio(
    *, frequency: Array, rabi_frequency: Array, largest: Array, drive_leak: Array, in_use: Array
) -> Array:
    """Worst other drive's amplitude here over its distance: drive_leak times its Rabi frequency over |f - f_j|.

    Formula: none; the largest of drive_leak rabi_frequency_j / |f - f_j| over the other qubits in use.
    """
    return _worst_ratio(frequency, frequency, drive_leak * rabi_frequency, in_use) + 0 * largest


@law(
    NUMBER,
    frequency=FREQUENCY,
    oscillator=FREQUENCY,
    rabi_frequency=FREQUENCY,
    largest=FREQUENCY,
    drive_leak=FRACTION,
    image=RATIO,
    in_use=NUMBER,
)
def image_ratio(
    *,
    frequency: Array,
    oscillator: Array,
    rabi_frequency: Array,
    largest: Array,
    drive_leak: Array,
    image: Array,
    in_use: Array,
) -> Array:
    """Worst other image's amplitude here over its distance: drive_leak times image amplitude times Rabi frequency.

    Formula: none; the largest of drive_leak sqrt(image) rabi_frequency_j / |2 LO - f_j - f| over the other qubits in use.
    """
    strength = drive_leak * np.sqrt(image) * rabi_frequency
    return _worst_ratio(2 * oscillator - frequency, frequency, strength, in_use) + 0 * largest


@law(NUMBER, offset=FREQUENCY, largest=FREQUENCY, leakage=RATIO)
def leakage_ratio(*, offset: Array, largest: Array, leakage: Array) -> Array:
    """Amplitude of the leaking oscillator, leakage times the largest Rabi frequency in use, over its distance."""
    return np.sqrt(leakage) * largest / offset


@law(FRACTION, reference="rabi1937", place="detuned drive, largest flip", ratio=NUMBER)
def flip(*, ratio: Array) -> Array:
    """Largest chance to flip under a drive of amplitude W at distance D, r = W/D: W^2/(W^2 + D^2)."""
    return 1 - 1 / (1 + ratio**2)


@law(ANGLE, reference="rabi1937", place="light shift of a detuned drive", ratio=NUMBER, drive_leak=FRACTION)
def crosstalk_phase(*, ratio: Array, drive_leak: Array) -> Array:
    """Phase during the pi pulse of the worst other qubit: 2 pi (sqrt(D^2 + W^2) - D) t with t half its Rabi period.

    With W = drive_leak f_R and r = W/D this is pi drive_leak (sqrt(1 + 1/r^2) - 1/r).
    """
    return np.pi * drive_leak * ratio / (1 + np.sqrt(1 + ratio**2))


@law(FRACTION, in_use=NUMBER, shots=COUNT, shot_time=TIME, wait=TIME, interval=TIME)
def time_share(*, in_use: Array, shots: Array, shot_time: Array, wait: Array, interval: Array) -> Array:
    """Share of the time that calibrating every qubit in use takes.

    Formula: none; the sum over the qubits in use of shots (shot_time + wait) / interval.
    """
    return (np.where(in_use > 0, shots * (shot_time + wait), 0.0)).sum(axis=-1, keepdims=True) / interval


def _worst_ratio(tone: Array, frequency: Array, strength: Array, in_use: Array) -> Array:
    """Largest strength_j / |tone_i - f_j| over the other qubits j in use, for each qubit i; 0 where there is none."""
    shape = np.broadcast_shapes(tone.shape, frequency.shape, strength.shape)
    tones, frequencies, strengths = (np.broadcast_to(array, shape) for array in (tone, frequency, strength))
    used = np.flatnonzero(np.broadcast_to(in_use, shape[-1:]) > 0)
    result = np.zeros(shape)
    if not used.size:
        return result
    near = np.arange(-min(NEAREST, used.size), min(NEAREST, used.size) + 1)
    done: dict[bytes, Array] = {}  # along an axis of ranges most entries are the plan itself
    for index in np.ndindex(shape[:-1]):
        inputs = (tones[index], frequencies[index], strengths[index])
        key = b"".join(each.tobytes() for each in inputs)
        if key not in done:
            done[key] = _worst_of_row(*inputs, used, near)
        result[index] = done[key]
    return np.where(np.isnan(tones), np.nan, result)


def _worst_of_row(
    tone: Array, frequency: Array, strength: Array, used: NDArray[np.intp], near: NDArray[np.intp]
) -> Array:
    """`_worst_ratio` of one entry of the axes before the rows."""
    order = used[np.argsort(frequency[used])]
    place = np.searchsorted(frequency[order], tone)[:, None] + near
    inside = (place >= 0) & (place < order.size)
    others = order[np.clip(place, 0, order.size - 1)]
    own = others == np.arange(tone.size)[:, None]
    distance = np.abs(tone[:, None] - frequency[others])
    return np.where(inside & ~own, strength[others] / np.maximum(distance, 1e-9), 0.0).max(axis=-1)
