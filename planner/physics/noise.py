"""Frequency noise from magnet, calibration, reference and charge, each as a static rms or an amplitude at 1 Hz."""

from __future__ import annotations

import numpy as np

from planner.constants import BOHR_MAGNETON_HZ
from planner.declare import law
from planner.kinds import (
    CHARGE_NOISE,
    COUNT,
    DISPLACEMENT,
    FIELD,
    FRACTION,
    FREQUENCY,
    FREQUENCY_NOISE,
    GRADIENT,
    NUMBER,
    RELATIVE_NOISE,
    TIME,
    WHITE_NOISE,
)
from planner.physics import Array


@law(
    FREQUENCY,
    reference="itano1993",
    place="projection noise at mid fringe",
    contrast=FRACTION,
    wait=TIME,
    t2_star=TIME,
    shots=COUNT,
)
def calibration_noise(*, contrast: Array, wait: Array, t2_star: Array, shots: Array) -> Array:
    """Precision 1/(2 pi V tau sqrt N) of a Ramsey calibration, V = contrast exp(-(tau/T2*)^2); nan where V is below 0.01.

    Formula: nan if contrast * exp(-((wait / t2_star)**2)) < 0.01 else 1 / (2 * pi * contrast * exp(-((wait /
    t2_star)**2)) * wait * sqrt(shots))
    """
    visible = contrast * np.exp(-((wait / t2_star) ** 2))
    return np.where(visible < 0.01, np.nan, 1 / (2 * np.pi * visible * wait * np.sqrt(shots)))


@law(FREQUENCY, frequency=FREQUENCY, change=FRACTION)
def scaled_tone(*, frequency: Array, change: Array) -> Array:
    """Shift of a tone by a fractional change of its clock."""
    return np.abs(frequency) * change


@law(FREQUENCY, tone=FREQUENCY, drift=FRACTION)
def loose_noise(*, tone: Array, drift: Array) -> Array:
    """Shift of the tone of an unlocked instrument by its clock's change; 0 where everything is locked."""
    return np.where(np.isnan(tone), 0.0, tone * drift)


@law(FREQUENCY, reference="jcgm100", place="5.1.2", field_noise=FREQUENCY, measured_t2_star=TIME)
def field_noise_seen(*, field_noise: Array, measured_t2_star: Array) -> Array:
    """Field noise, but not more than a measured T2* leaves room for, 1/(sqrt2 pi T2*).

    Formula: field_noise if unknown(measured_t2_star) else min(field_noise, 1 / (sqrt(2) * pi * measured_t2_star))
    """
    return np.fmin(field_noise, 1 / (np.sqrt(2) * np.pi * measured_t2_star))


@law(
    FREQUENCY_NOISE,
    reference="struck2020",
    place="charge noise through a field gradient",
    typed=FREQUENCY_NOISE,
    own_relative=RELATIVE_NOISE,
    frequency=FREQUENCY,
    gradient=GRADIENT,
    g=NUMBER,
    displacement=DISPLACEMENT,
    charge_noise=CHARGE_NOISE,
    material_relative=RELATIVE_NOISE,
    is_hole=NUMBER,
    local_field=FIELD,
)
def charge_amplitude(
    *,
    typed: Array,
    own_relative: Array,
    frequency: Array,
    gradient: Array,
    g: Array,
    displacement: Array,
    charge_noise: Array,
    material_relative: Array,
    is_hole: Array,
    local_field: Array,
) -> Array:
    """1/f amplitude at 1 Hz: the first of typed, relative to the qubit's frequency, through a gradient, the material's.

    An electron without a local field and none of these has none; with a local field and none of these it is unknown (nan).

    Formula: known(typed, own_relative * frequency, g * BOHR_MAGNETON_HZ * gradient * displacement * charge_noise,
    material_relative * frequency, nan if is_hole > 0 or norm(local_field) > 0 else 0)
    """
    through_gradient = g * BOHR_MAGNETON_HZ * gradient * displacement * charge_noise
    nothing_typed = np.where((is_hole > 0) | (_size(local_field) > 0), np.nan, 0.0)
    amplitude = np.where(np.isnan(material_relative), nothing_typed, material_relative * frequency)
    for better in (through_gradient, own_relative * frequency, typed):
        amplitude = np.where(np.isnan(better), amplitude, better)
    return np.asarray(amplitude)


@law(FREQUENCY, source_share=FRACTION, allowed_noise=FREQUENCY)
def allowed_share(*, source_share: Array, allowed_noise: Array) -> Array:
    """Part of the allowed noise that any one technical source may take."""
    return source_share * allowed_noise


@law(
    FREQUENCY_NOISE,
    amplitude=FREQUENCY_NOISE,
    typed=FREQUENCY_NOISE,
    own_relative=RELATIVE_NOISE,
    material_relative=RELATIVE_NOISE,
    gradient=GRADIENT,
    white=WHITE_NOISE,
)
def refocused_amplitude(
    *, amplitude: Array, typed: Array, own_relative: Array, material_relative: Array, gradient: Array, white: Array
) -> Array:
    """1/f amplitude that refocusing meets; unknown (nan) where nothing says what noise is left beside the static one.

    Formula: nan if unknown(typed) and unknown(own_relative) and unknown(material_relative) and unknown(gradient)
    and unknown(white) else amplitude
    """
    stated = (typed, own_relative, material_relative, gradient, white)
    silent = np.all(np.isnan(np.stack(np.broadcast_arrays(*stated))), axis=0)
    return np.where(silent, np.nan, amplitude)


@law(WHITE_NOISE, density=WHITE_NOISE)
def or_zero(*, density: Array) -> Array:
    """White noise of the frequency, none where it is not typed."""
    return np.where(np.isnan(density), 0.0, density)


def _size(vector: Array) -> Array:
    return np.sqrt((vector**2).sum(axis=-1))
