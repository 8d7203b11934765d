"""The source's tones: where the local oscillator goes, the band, and which tone a loose instrument contributes."""

from __future__ import annotations

import numpy as np

from planner.declare import law
from planner.kinds import FREQUENCY, NUMBER
from planner.physics import Array

MHZ = 1e6
CLEARANCE = 10 * MHZ  # distance that the tone and all images keep from every qubit in use


@law(FREQUENCY, frequency=FREQUENCY, low=FREQUENCY, high=FREQUENCY)
def band_distance(*, frequency: Array, low: Array, high: Array) -> Array:
    """Distance to the nearer edge of the source's band, negative outside."""
    return np.minimum(frequency - low, high - frequency)


@law(FREQUENCY, guard=FREQUENCY, search_window=FREQUENCY)
def band_need(*, guard: Array, search_window: Array) -> Array:
    """Distance wanted from the band's edges: guard plus the window in which the line is searched."""
    return guard + search_window


@law(FREQUENCY, frequency=FREQUENCY, in_use=NUMBER, half_width=FREQUENCY)
def local_oscillator(*, frequency: Array, in_use: Array, half_width: Array) -> Array:
    """The tone on whole MHz within reach of every qubit in use, nearest to the middle of the outermost two, that keeps
    itself and all images at least 10 MHz from every qubit in use.

    If none does, the one that keeps them farthest; the lower of equals. If no tone reaches all, the middle.

    Formula: none; a search over the tones on whole MHz.
    """
    shape = np.broadcast_shapes(frequency.shape[:-1], half_width.shape[:-1])
    result = np.empty((*shape, 1))
    rows = np.broadcast_to(frequency, (*shape, frequency.shape[-1]))
    widths = np.broadcast_to(half_width, (*shape, 1))
    for index in np.ndindex(shape):
        result[index] = _best_tone(rows[index][in_use > 0], float(widths[index][0]))
    return result


@law(FREQUENCY, oscillator=FREQUENCY)
def local_tone(*, oscillator: Array) -> Array:
    """The local oscillator as it is used."""
    return oscillator


@law(FREQUENCY, frequency=FREQUENCY, oscillator=FREQUENCY)
def intermediate_frequency(*, frequency: Array, oscillator: Array) -> Array:
    """Offset of a qubit from the local oscillator."""
    return frequency - oscillator


@law(FREQUENCY, frequency=FREQUENCY, oscillator=FREQUENCY, carrier_is_loose=NUMBER)
def loose_tone(*, frequency: Array, oscillator: Array, carrier_is_loose: Array) -> Array:
    """The tone that an unlocked instrument contributes: the carrier, or the baseband tone beside it."""
    return np.where(carrier_is_loose > 0, oscillator, np.abs(frequency - oscillator))


def _best_tone(frequency: Array, half_width: float) -> float:
    lowest, highest = frequency.min(), frequency.max()
    middle = (lowest + highest) / 2
    if not np.isfinite(middle):
        return float("nan")
    first, last = max(1.0, np.ceil((highest - half_width - 1) / MHZ)), np.floor((lowest + half_width + 1) / MHZ)
    if last < first:
        return float(middle)
    tones = np.arange(first, last + 1) * MHZ
    tones = tones[np.lexsort((tones, np.round(np.abs(tones - middle))))]
    ranked = np.sort(frequency)
    for few in (tones[:32], tones):  # nearly always one of the first will do
        clear = np.round(_clearance(few, ranked))
        met = np.flatnonzero(clear >= CLEARANCE)
        if met.size:
            return float(few[met[0]])
    return float(tones[np.lexsort((tones, -clear))[0]])


def _clearance(tones: Array, ranked: Array) -> Array:
    """Smallest distance of each tone, and of all its images 2 LO - f_i, from any of the frequencies (in rising order)."""
    around = np.concatenate(([-np.inf], ranked, [np.inf]))
    points = np.concatenate((tones[:, None], 2 * tones[:, None] - ranked), axis=-1)
    place = np.searchsorted(ranked, points)
    return np.minimum(points - around[place], around[place + 1] - points).min(axis=-1)
