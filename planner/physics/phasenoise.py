"""Phase noise of the source: what its stated points add up to over a time (single-sideband level in dBc/Hz).

Between the stated offsets the level is a straight line in decibels against the logarithm of the offset; outside them it
counts as nothing, so stating a wider range is the user's way to make it complete.
"""

from __future__ import annotations

import numpy as np

from planner.declare import law
from planner.kinds import ANGLE, FRACTION, FREQUENCY, PHASE_LEVEL, TIME
from planner.physics import Array

_POINTS_A_DECADE = 500


@law(
    ANGLE,
    reference="riley2008",
    place="S_phi = 2 L, scaled with the square of the carrier",
    offset=FREQUENCY,
    level=PHASE_LEVEL,
    carrier=FREQUENCY,
    frequency=FREQUENCY,
    time=TIME,
)
def source_phase(*, offset: Array, level: Array, carrier: Array, frequency: Array, time: Array) -> Array:
    """Rms phase that the source gathers over a time: the root of the integral of 2 L (f/f_carrier)^2 4 sin^2(pi f t) df.

    Formula: none; L linear in small steps of ln f, the integral of each step in closed form (so any time is exact).
    """
    if np.ptp(offset) == 0:
        return np.full(np.broadcast_shapes(frequency.shape, time.shape), np.nan)
    order = np.argsort(offset)
    scaled = (level / carrier**2)[order]
    first, last = np.log(offset[order][0]), np.log(offset[order][-1])
    count = max(2, int(_POINTS_A_DECADE * (last - first) / np.log(10)) + 2)
    grid = np.exp(np.linspace(first, last, count))
    density = 4 * np.exp(np.interp(np.log(grid), np.log(offset[order]), np.log(scaled)))
    times, place = np.unique(time, return_inverse=True)  # the gathered phase depends on the time alone, mostly one
    gathered = np.sqrt(np.maximum(_one_minus_cosine(grid, density, 2 * np.pi * times[:, None]), 0.0))
    return frequency * gathered[place].reshape(time.shape)


@law(
    ANGLE,
    reference="ball2016",
    place="phase that a sequence error allows",
    source_share=FRACTION,
    allowed_sequence_error=FRACTION,
)
def allowed_source_phase(*, source_share: Array, allowed_sequence_error: Array) -> Array:
    """Phase over the sequence that one technical source may take: its share of sqrt(-2 ln(1 - 3 E))."""
    return source_share * np.sqrt(-2 * np.log1p(-3 * allowed_sequence_error))


def _one_minus_cosine(grid: Array, density: Array, rate: Array) -> Array:
    """Integral of density (1 - cos(rate f)) over the grid, density linear between its points, exact in the cosine."""
    step = np.diff(grid)
    slope = np.diff(density) / step
    whole = (density[:-1] + density[1:]) / 2 * step
    middle, half = (grid[:-1] + grid[1:]) / 2, rate * step / 2
    mean = (density[:-1] + density[1:]) / 2
    # integral of (m + s u) cos(rate (c + u)) over |u| <= step/2
    even = step * np.sinc(half / np.pi)
    odd = np.where(half < 1e-2, half**3 / 3 * (1 - half**2 / 10), np.sin(half) - half * np.cos(half)) * 2 / rate**2
    small = rate * grid[1:] < 1e-3  # 1 - cos loses its digits: its own series there
    cosine = mean * np.cos(rate * middle) * even - slope * np.sin(rate * middle) * odd
    series = (rate * middle) ** 2 / 2 * whole
    return np.where(small, series, whole - cosine).sum(axis=-1)
