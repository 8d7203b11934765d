"""Lines and stages: attenuation, power, photons, heat; and thin films in a field.

Attenuations hold one power ratio a stage, warm to cold, on the axis behind the lines.
"""

from __future__ import annotations

import numpy as np

from planner.constants import BOLTZMANN, PLANCK
from planner.declare import law
from planner.kinds import ANGLE, COUNT, FIELD, FRACTION, FREQUENCY, NUMBER, POWER, RATIO, TEMPERATURE
from planner.physics import Array


@law(FREQUENCY, frequency=FREQUENCY, in_use=NUMBER)
def lowest_in_use(*, frequency: Array, in_use: Array) -> Array:
    """The lowest frequency in use.

    Formula: none; the smallest frequency of the qubits in use.
    """
    return np.where(in_use > 0, frequency, np.inf).min(axis=-1, keepdims=True)


@law(POWER, device_power=POWER, attenuation=RATIO, cable_loss=RATIO)
def source_power(*, device_power: Array, attenuation: Array, cable_loss: Array) -> Array:
    """Power that the source must deliver: the device's times cable loss and all attenuators.

    Formula: none; device_power cable_loss times the product of the attenuations.
    """
    return device_power * cable_loss * attenuation.prod(axis=-1)


@law(NUMBER, available=POWER, needed=POWER)
def drive_amplitude(*, available: Array, needed: Array) -> Array:
    """Amplitude that the source can give over the amplitude that is needed."""
    return np.sqrt(available / needed)


@law(NUMBER, needed=POWER)
def unity(*, needed: Array) -> Array:
    """The amplitude that is wanted, as the unit of its own comparison."""
    return needed / needed


@law(
    NUMBER,
    reference="krinner2019",
    place="thermal photons behind attenuators",
    frequency=FREQUENCY,
    source_temperature=TEMPERATURE,
    attenuation=RATIO,
    temperature=TEMPERATURE,
)
def thermal_photons(*, frequency: Array, source_temperature: Array, attenuation: Array, temperature: Array) -> Array:
    """Photons at the end of the line: at each stage n/A + (1 - 1/A) n_BE(T). Cables before the first stage are as warm as
    the source and change nothing.

    Formula: none; n = n / A + (1 - 1 / A) / expm1(h f / (k T)) at each stage in turn, begun at the source's temperature.
    """
    photons = _bose(frequency, source_temperature)
    for stage in range(attenuation.shape[-1]):
        kept = 1 / attenuation[..., stage]
        photons = photons * kept + (1 - kept) * _bose(frequency, temperature[..., stage, None])
    return photons


@law(
    TEMPERATURE, reference="boltzmann", place="Bose-Einstein occupation, inverted", photons=NUMBER, frequency=FREQUENCY
)
def effective_temperature(*, photons: Array, frequency: Array) -> Array:
    """Temperature of a black body with as many photons."""
    return PLANCK * frequency / (BOLTZMANN * np.log1p(1 / photons))


@law(
    POWER,
    reference="krinner2019",
    place="active load of attenuators",
    device_power=POWER,
    duty=FRACTION,
    count=COUNT,
    attenuation=RATIO,
    cooling_power=POWER,
)
def stage_heat(*, device_power: Array, duty: Array, count: Array, attenuation: Array, cooling_power: Array) -> Array:
    """Heat of the drive at each stage: what passes on times (A - 1), over all lines; a line without device power adds none.

    Formula: none; sum over lines of device_power duty count times the attenuations of later stages times (A - 1).
    """
    later = np.cumprod(attenuation[..., ::-1], axis=-1)[..., ::-1] / attenuation
    mean = np.where(np.isnan(device_power), 0.0, device_power * duty * count)
    heat = np.where(mean[..., None] > 0, mean[..., None] * later * (attenuation - 1), 0.0)
    return heat.sum(axis=-2) + 0 * np.where(np.isnan(cooling_power), 0.0, cooling_power)


@law(POWER, cooling_power=POWER, base_load=POWER)
def power_left(*, cooling_power: Array, base_load: Array) -> Array:
    """Cooling power that the base load leaves."""
    return cooling_power - base_load


@law(
    FIELD,
    reference="tinkham1963",
    place="angular dependence of a thin film's critical field",
    field=FIELD,
    elevation=ANGLE,
    uncertainty=ANGLE,
    in_plane=FIELD,
    normal=FIELD,
    be_normal=NUMBER,
)
def film_critical_field(
    *, field: Array, elevation: Array, uncertainty: Array, in_plane: Array, normal: Array, be_normal: Array
) -> Array:
    """Critical field of a film in the direction of the set field: |B sin|/Bn + (B cos/Bp)^2 = 1, solved for B.

    The worst of both ends of the elevation's tolerance and, where it lies between, of the plane itself: the smallest field
    for a part that must superconduct, the largest for one that must be normal.
    Formula: none; the root of a B + b B^2 = 1 with a = |sin|/Bn and b = (cos/Bp)^2 at each elevation.
    """
    low, high = elevation - uncertainty, elevation + uncertainty
    crossing = np.where((low < 0) & (high > 0), 0.0, low)
    fields = np.stack([_film(angle, in_plane, normal) for angle in np.broadcast_arrays(low, high, crossing)])
    return np.where(be_normal > 0, fields.max(axis=0), fields.min(axis=0)) + 0 * field


@law(FIELD, field=FIELD, critical=FIELD, be_normal=NUMBER)
def part_allowed(*, field: Array, critical: Array, be_normal: Array) -> Array:
    """The larger side of a part's bound: the critical field, or for a part that must be normal the set field."""
    return np.where(be_normal > 0, field, critical)


@law(FIELD, field=FIELD, critical=FIELD, be_normal=NUMBER)
def part_expected(*, field: Array, critical: Array, be_normal: Array) -> Array:
    """The smaller side of a part's bound: the set field, or for a part that must be normal the critical field."""
    return np.where(be_normal > 0, critical, field)


@law(NUMBER, superconduct=NUMBER, be_normal=NUMBER)
def part_is_judged(*, superconduct: Array, be_normal: Array) -> Array:
    """1 for a part that must stay something, nan for one that may be either."""
    return np.where(superconduct + be_normal > 0, 1.0, np.nan)


@law(FIELD, set_vector=FIELD, axis=NUMBER)
def field_along(*, set_vector: Array, axis: Array) -> Array:
    """Size of the set field's component along an axis.

    Formula: none; |B . axis| over the length of the axis.
    """
    return np.abs((set_vector * axis).sum(axis=-1)) / np.sqrt((axis**2).sum(axis=-1))


def _film(elevation: Array, in_plane: Array, normal: Array) -> Array:
    linear, square = np.abs(np.sin(elevation)) / normal, (np.cos(elevation) / in_plane) ** 2
    return 2 / (linear + np.sqrt(linear**2 + 4 * square))


def _bose(frequency: Array, temperature: Array) -> Array:
    return 1 / np.expm1(PLANCK * frequency / (BOLTZMANN * temperature))
