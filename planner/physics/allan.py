"""Allan deviation of measured frequencies, for logs of a reference or a qubit. No result of a plan needs it."""

from __future__ import annotations

import numpy as np

from planner.physics import Array


def overlapping_deviation(*, frequency: Array, factor: int) -> float:
    """Overlapping Allan deviation of evenly spaced fractional frequencies at `factor` times their spacing.

    Every mean of `factor` neighbours is compared with the mean that follows it at once; the deviation is the root of half
    the mean square of these differences. The overall mean is taken off first, which changes nothing but the rounding.
    Source: W. J. Riley, NIST SP 1065 (2008), overlapping Allan variance.

    Raises ValueError for a factor below 1 and for fewer than two means.
    """
    if factor < 1 or len(frequency) < 2 * factor:
        raise ValueError(f"{len(frequency)} frequencies have no two neighbouring means of {factor}")
    phase = np.concatenate(([0.0], np.cumsum(frequency - np.mean(frequency))))
    differences = (phase[2 * factor :] - 2 * phase[factor:-factor] + phase[: -2 * factor]) / factor
    return float(np.sqrt(np.mean(differences**2) / 2))
