"""Coils: the field of each that makes the set field, its drift and noise at the qubits, and its smallest step.

Coils stand on the last axis (before the three components of a direction); a law that gives one number a qubit sums over them.
"""

from __future__ import annotations

import numpy as np

from planner.declare import law
from planner.kinds import CURRENT, DRIFT, FIELD, FIELD_PER_CURRENT, FREQUENCY, FREQUENCY_PER_FIELD, NUMBER, TIME
from planner.physics import Array

HOUR = 3600.0
MISSED = 1e-3  # share of the set field by which the coils may miss it


@law(NUMBER, direction=NUMBER)
def unit_direction(*, direction: Array) -> Array:
    """Direction of a coil's field with length 1."""
    return direction / np.sqrt((direction**2).sum(axis=-1, keepdims=True))


@law(FIELD, set_vector=FIELD, direction=NUMBER, is_off=NUMBER)
def coil_fields(*, set_vector: Array, direction: Array, is_off: Array) -> Array:
    """Fields of the coils that are not off whose sum is the set field, by least squares; nan where they miss it by 1e-3.

    Formula: none; least squares by the pseudo-inverse of the matrix of directions.
    """
    running = direction * (1 - is_off)[..., None]
    if not running.size or np.isnan(running).any():
        return np.full(running.shape[:-1], np.nan)
    fields = (set_vector @ np.linalg.pinv(running))[..., 0, :]
    missed = _size(fields[..., None, :] @ running - set_vector)[..., 0]
    met = missed <= MISSED * _size(set_vector)[..., 0]
    return np.where(met[..., None], fields, np.nan)


@law(CURRENT, field=FIELD, field_per_current=FIELD_PER_CURRENT)
def coil_current(*, field: Array, field_per_current: Array) -> Array:
    """Current of a coil, with its sign."""
    return field / field_per_current


@law(FIELD, field=FIELD)
def field_magnitude(*, field: Array) -> Array:
    """Size of a coil's field."""
    return np.abs(field)


@law(DRIFT, driven=DRIFT, persistent=DRIFT, is_persistent=NUMBER, is_unset=NUMBER, magnet_is_persistent=NUMBER)
def coil_drift(
    *, driven: Array, persistent: Array, is_persistent: Array, is_unset: Array, magnet_is_persistent: Array
) -> Array:
    """Drift of the coil's own mode, else of the magnet's."""
    return np.where(is_persistent + is_unset * magnet_is_persistent > 0, persistent, driven)


@law(
    FIELD,
    reference="jcgm100",
    place="5.1.2",
    driven=FIELD,
    persistent=FIELD,
    is_persistent=NUMBER,
    is_unset=NUMBER,
    magnet_is_persistent=NUMBER,
    direction=NUMBER,
)
def coil_noise(
    *,
    driven: Array,
    persistent: Array,
    is_persistent: Array,
    is_unset: Array,
    magnet_is_persistent: Array,
    direction: Array,
) -> Array:
    """Noise of a coil along its direction: the norm over components of d_k noise_k of its mode.

    Formula: none; the size of the vector of d_k noise_k, noise of the coil's own mode, else of the magnet's.
    """
    persists = is_persistent + is_unset * magnet_is_persistent > 0
    return _size(direction * np.where(persists[..., None], persistent, driven))


@law(DRIFT, slope=DRIFT, is_off=NUMBER)
def settle_of_coil(*, slope: Array, is_off: Array) -> Array:
    """Slope of a coil one hour after a ramp; none for one that is off."""
    return slope * (1 - is_off)


@law(
    FREQUENCY,
    field_response=FREQUENCY_PER_FIELD,
    field_slope=FREQUENCY_PER_FIELD,
    field=FIELD,
    rate=DRIFT,
    interval=TIME,
    direction=NUMBER,
    coil_field=FIELD,
    coil_rate=DRIFT,
)
def drifted(
    *,
    field_response: Array,
    field_slope: Array,
    field: Array,
    rate: Array,
    interval: Array,
    direction: Array,
    coil_field: Array,
    coil_rate: Array,
) -> Array:
    """Signed frequency change over one interval when every coil's field changes at its rate.

    Without coils, or without their fields, the set field as a whole changes at the magnet's rate.
    Formula: none; (muB/h) times the sum over coils of (u.g.d) field rate interval.
    """
    whole = field_slope * field * rate * interval
    if not coil_field.shape[-1]:
        return whole
    by_coil = (_along(field_response, direction) * (coil_field * coil_rate)[..., None, :]).sum(axis=-1) * interval
    return np.where(np.isnan(coil_field).any(axis=-1, keepdims=True), whole, by_coil)


@law(FREQUENCY, own=FREQUENCY, settling=FREQUENCY, since_ramp=TIME)
def drift_after_ramp(*, own: Array, settling: Array, since_ramp: Array) -> Array:
    """Size of the drift over one interval: of the mode, and of settling, which falls as 1/t from one hour on.

    Formula: abs(own + settling / max(since_ramp / 3600, 1))
    """
    hours = np.maximum(np.where(np.isnan(since_ramp), np.inf, since_ramp / HOUR), 1.0)
    return np.abs(own + settling / hours)


@law(TIME, own=FREQUENCY, settling=FREQUENCY, allowed=FREQUENCY)
def settling_time(*, own: Array, settling: Array, allowed: Array) -> Array:
    """Time after a ramp at which the drift is within what is allowed; 0 where it is one hour after, nan where it never is.

    Formula: none; the largest 1/t with |own + settling / t| within the allowed drift, t in hours.
    """
    room = np.where(own * settling >= 0, allowed - np.abs(own), allowed + np.abs(own))
    hours = np.abs(settling) / np.where(room > 0, room, np.nan)
    time = np.where(hours <= 1, 0.0, hours * HOUR)
    return np.where(np.abs(own) > allowed, np.nan, time)


@law(
    FREQUENCY,
    reference="jcgm100",
    place="5.1.2",
    field_response=FREQUENCY_PER_FIELD,
    noise=FIELD,
    direction=NUMBER,
    is_off=NUMBER,
    coil_noise=FIELD,
)
def magnet_noise(*, field_response: Array, noise: Array, direction: Array, is_off: Array, coil_noise: Array) -> Array:
    """Slow rms from the magnet's field noise: root-sum-square over running coils, else over the components.

    Formula: none; (muB/h) root-sum-square over coils of (u.g.d) n; without running coils the norm of (muB/h) (u.g)_k noise_k.
    """
    plain = _size(field_response * noise)
    if not np.any(is_off < 1):
        return plain
    by_coil = _size(_along(field_response, direction) * (coil_noise * (1 - is_off))[..., None, :])
    return np.where(np.isnan(by_coil), plain, by_coil)


@law(
    FREQUENCY,
    field_response=FREQUENCY_PER_FIELD,
    direction=NUMBER,
    is_off=NUMBER,
    step=CURRENT,
    field_per_current=FIELD_PER_CURRENT,
)
def half_step(
    *, field_response: Array, direction: Array, is_off: Array, step: Array, field_per_current: Array
) -> Array:
    """Half of the frequency step that the coarsest running coil makes; nan where no coil has a step.

    Formula: none; the largest over coils of |(muB/h) u.g.d| step field_per_current / 2.
    """
    field = np.where(is_off > 0, np.nan, np.abs(step * field_per_current))
    shifts = np.abs(_along(field_response, direction)) * field[..., None, :] / 2
    largest = np.where(np.isnan(shifts), 0.0, shifts).max(axis=-1, initial=0.0)
    return np.where(largest > 0, largest, np.nan)


def _along(field_response: Array, direction: Array) -> Array:
    """Response of every qubit (rows) along every coil (columns)."""
    return field_response @ np.swapaxes(direction, -1, -2)


def _size(vector: Array) -> Array:
    return np.sqrt((vector**2).sum(axis=-1))
