"""Zeeman splitting with a scalar or tensor g, its slopes, and how far off the line may be found."""

from __future__ import annotations

import numpy as np

from planner.constants import BOHR_MAGNETON_HZ, PLANCK
from planner.declare import law
from planner.kinds import (
    ANGLE,
    ENERGY,
    FIELD,
    FREQUENCY,
    FREQUENCY_PER_ANGLE,
    FREQUENCY_PER_FIELD,
    NUMBER,
)
from planner.physics import Array


@law(FIELD, field=FIELD, elevation=ANGLE, azimuth=ANGLE)
def set_vector(*, field: Array, elevation: Array, azimuth: Array) -> Array:
    """The set field as a vector in the chip frame (c1, c2, c3).

    Formula: field * vector(cos(elevation) * cos(azimuth), cos(elevation) * sin(azimuth), sin(elevation))
    """
    return field[..., None] * _direction(elevation, azimuth)


@law(FIELD, set_vector=FIELD, local_field=FIELD)
def field_at_dot(*, set_vector: Array, local_field: Array) -> Array:
    """The field that the spin sees: set field plus local field (micromagnet), as vectors."""
    return set_vector + local_field


@law(FIELD, field_at_dot=FIELD)
def field_size(*, field_at_dot: Array) -> Array:
    """Size of the field at the dot.

    Formula: norm(field_at_dot)
    """
    return _norm(field_at_dot)


@law(NUMBER, reference="crippa2018", place="symmetric g-matrix", g=NUMBER, g_euler=ANGLE)
def g_tensor(*, g: Array, g_euler: Array) -> Array:
    """The symmetric g-tensor R diag(g) R^T, R = Rz(a) Ry(b) Rz(c) with the ZYZ angles a, b, c (active rotations).

    Formula: none; R diag(g) R^T, the rotation R multiplied out from its three angles.
    """
    axes = principal_axes(g_euler)
    return (axes * g[..., None, :]) @ np.swapaxes(axes, -1, -2)


@law(FIELD, reference="crippa2018", place="g-matrix times field", g_tensor=NUMBER, field_at_dot=FIELD)
def precession_vector(*, g_tensor: Array, field_at_dot: Array) -> Array:
    """v = g B: along the quantisation axis (not along B), with the size g_eff B; nan where the spin does not precess.

    Formula: g_tensor @ field_at_dot
    """
    vector = _apply(g_tensor, field_at_dot)
    return np.where(_norm(vector)[..., None] > 0, vector, np.nan)


@law(NUMBER, reference="crippa2018", place="effective g", precession_vector=FIELD, field_size=FIELD)
def effective_g(*, precession_vector: Array, field_size: Array) -> Array:
    """g_eff = |g b| along the direction b of the field.

    Formula: norm(precession_vector) / field_size
    """
    return _norm(precession_vector) / field_size


@law(FREQUENCY, reference="codata2022", place="Bohr magneton in Hz/T", g=NUMBER, field=FIELD)
def larmor_frequency(*, g: Array, field: Array) -> Array:
    """f = |g| muB B / h."""
    return np.abs(g) * BOHR_MAGNETON_HZ * field


@law(ENERGY, reference="codata2022", place="Planck constant", frequency=FREQUENCY)
def zeeman_energy(*, frequency: Array) -> Array:
    """E_Z = h f."""
    return PLANCK * frequency


@law(
    FREQUENCY_PER_FIELD, reference="crippa2018", place="longitudinal response", g_tensor=NUMBER, precession_vector=FIELD
)
def field_response(*, g_tensor: Array, precession_vector: Array) -> Array:
    """(muB/h) u.g, u = v/|v|: the change of frequency per field added along c1, c2, c3.

    Formula: BOHR_MAGNETON_HZ * (precession_vector @ g_tensor) / norm(precession_vector)
    """
    axis = precession_vector / _norm(precession_vector)[..., None]
    return BOHR_MAGNETON_HZ * _apply(np.swapaxes(g_tensor, -1, -2), axis)


@law(FREQUENCY_PER_FIELD, field_response=FREQUENCY_PER_FIELD, elevation=ANGLE, azimuth=ANGLE)
def field_slope(*, field_response: Array, elevation: Array, azimuth: Array) -> Array:
    """df/dB of the set field's size; local fields stay.

    Formula: field_response @ vector(cos(elevation) * cos(azimuth), cos(elevation) * sin(azimuth), sin(elevation))
    """
    return _dot(field_response, _direction(elevation, azimuth))


@law(FREQUENCY_PER_ANGLE, field_response=FREQUENCY_PER_FIELD, field=FIELD, elevation=ANGLE, azimuth=ANGLE)
def elevation_slope(*, field_response: Array, field: Array, elevation: Array, azimuth: Array) -> Array:
    """df/d(elevation) of the set field; local fields stay.

    Formula: field * field_response @ vector(-sin(elevation) * cos(azimuth), -sin(elevation) * sin(azimuth),
    cos(elevation))
    """
    tangent = _stack(-np.sin(elevation) * np.cos(azimuth), -np.sin(elevation) * np.sin(azimuth), np.cos(elevation))
    return field * _dot(field_response, tangent)


@law(FREQUENCY_PER_ANGLE, field_response=FREQUENCY_PER_FIELD, field=FIELD, elevation=ANGLE, azimuth=ANGLE)
def azimuth_slope(*, field_response: Array, field: Array, elevation: Array, azimuth: Array) -> Array:
    """df/d(azimuth) of the set field; local fields stay.

    Formula: field * field_response @ vector(-cos(elevation) * sin(azimuth), cos(elevation) * cos(azimuth), 0)
    """
    tangent = _stack(-np.cos(elevation) * np.sin(azimuth), np.cos(elevation) * np.cos(azimuth), 0 * elevation)
    return field * _dot(field_response, tangent)


@law(NUMBER, g=NUMBER, g_euler=ANGLE, precession_vector=FIELD, is_hole=NUMBER)
def heavy_axis_share(*, g: Array, g_euler: Array, precession_vector: Array, is_hole: Array) -> Array:
    """Share (0 to 1) of the quantisation axis along the principal axis of the largest |g|.

    With three equal values that axis is c3 for an electron. For a hole whose largest value is not the only one of its size
    the axis is not known and the result is nan.

    Formula: none; |u.h|, u the unit vector along g B and h the principal axis of the largest |g|, turned by
    g_euler.
    """
    axes = np.swapaxes(principal_axes(g_euler), -1, -2)
    heaviest = np.eye(3)[np.argmax(np.abs(g), axis=-1)]
    heavy = (heaviest[..., None] * axes).sum(axis=-2)
    scalar = np.ptp(np.abs(g), axis=-1) == 0
    heavy = np.where(scalar[..., None], np.array([0.0, 0.0, 1.0]), heavy)
    share = np.abs(_dot(precession_vector, heavy)) / _norm(precession_vector)
    shared = (np.abs(g) == np.abs(g).max(axis=-1, keepdims=True)).sum(axis=-1) > 1
    return np.where(shared & (is_hole > 0), np.nan, np.minimum(share, 1.0))


@law(FREQUENCY, frequency=FREQUENCY, in_use=NUMBER)
def spacing(*, frequency: Array, in_use: Array) -> Array:
    """Distance to the nearest other qubit in use; nan where there is none.

    Formula: none; the smallest |f - f_j| over the other qubits in use, by sorting.
    """
    order = np.argsort(np.where(in_use > 0, frequency, np.inf), axis=-1)
    used = np.where(in_use > 0, frequency, np.inf)
    ranked = np.take_along_axis(np.broadcast_to(used, order.shape), order, axis=-1)
    return _nearest_other(np.broadcast_to(frequency, order.shape), ranked, in_use)


@law(FREQUENCY, reference="jcgm100", place="5.1.2", field_response=FREQUENCY_PER_FIELD, uncertainty=FIELD)
def vector_uncertainty(*, field_response: Array, uncertainty: Array) -> Array:
    """Uncertainty of f from independent uncertainties of the components of a field.

    Formula: norm(field_response * uncertainty)
    """
    return _norm(field_response * uncertainty)


@law(
    FREQUENCY,
    reference="jcgm100",
    place="5.1.2",
    g=NUMBER,
    g_uncertainty=NUMBER,
    g_euler=ANGLE,
    euler_uncertainty=ANGLE,
    field_at_dot=FIELD,
    precession_vector=FIELD,
)
def tensor_uncertainty(
    *,
    g: Array,
    g_uncertainty: Array,
    g_euler: Array,
    euler_uncertainty: Array,
    field_at_dot: Array,
    precession_vector: Array,
) -> Array:
    """Uncertainty of f from those of the principal values and of the ZYZ angles, to first order.

    Formula: none; derivatives of |g B| by every principal value and angle, times their uncertainties,
    root-sum-square.
    """
    axes = principal_axes(g_euler)
    unit = precession_vector / _norm(precession_vector)[..., None]
    along_unit = _apply(np.swapaxes(axes, -1, -2), unit)
    along_field = _apply(np.swapaxes(axes, -1, -2), field_at_dot)
    # a scalar g is one number: its three equal values move together
    terms = along_unit * along_field * g_uncertainty
    same = np.ptp(g, axis=-1) == 0
    values = np.where(same, np.abs(terms.sum(axis=-1)), _norm(terms))
    # turning the tensor about an axis w changes f by w . (g u x B): v x u vanishes since v lies along u
    turned = np.cross(_apply(g_tensor(g=g, g_euler=g_euler), unit), field_at_dot)
    angles = _norm(_apply(np.swapaxes(_rotation_axes(g_euler), -1, -2), turned) * euler_uncertainty)
    return BOHR_MAGNETON_HZ * np.hypot(values, angles)


@law(
    FREQUENCY,
    reference="jcgm100",
    place="5.1.2",
    remanence=FREQUENCY,
    local=FREQUENCY,
    tensor=FREQUENCY,
    field_slope=FREQUENCY_PER_FIELD,
    field_uncertainty=FIELD,
    elevation_slope=FREQUENCY_PER_ANGLE,
    elevation_uncertainty=ANGLE,
    azimuth_slope=FREQUENCY_PER_ANGLE,
    azimuth_uncertainty=ANGLE,
)
def search_window(
    *,
    remanence: Array,
    local: Array,
    tensor: Array,
    field_slope: Array,
    field_uncertainty: Array,
    elevation_slope: Array,
    elevation_uncertainty: Array,
    azimuth_slope: Array,
    azimuth_uncertainty: Array,
) -> Array:
    """Standard uncertainty of where the line will be found: the root-sum-square of all contributions."""
    return np.sqrt(
        remanence**2
        + local**2
        + tensor**2
        + (field_slope * field_uncertainty) ** 2
        + (elevation_slope * elevation_uncertainty) ** 2
        + (azimuth_slope * azimuth_uncertainty) ** 2
    )


def principal_axes(g_euler: Array) -> Array:
    """R = Rz(a) Ry(b) Rz(c) as a (..., 3, 3) array; its columns are the principal axes in the chip frame."""
    a, b, c = g_euler[..., 0], g_euler[..., 1], g_euler[..., 2]
    ca, sa, cb, sb, cc, sc = np.cos(a), np.sin(a), np.cos(b), np.sin(b), np.cos(c), np.sin(c)
    rows = (
        _stack(ca * cb * cc - sa * sc, -ca * cb * sc - sa * cc, ca * sb),
        _stack(sa * cb * cc + ca * sc, -sa * cb * sc + ca * cc, sa * sb),
        _stack(-sb * cc, sb * sc, cb),
    )
    return np.stack(rows, axis=-2)


def _rotation_axes(g_euler: Array) -> Array:
    """The axes about which a, b and c turn the tensor, as columns: z, Rz(a) y, R z."""
    a, b = g_euler[..., 0], g_euler[..., 1]
    zero, one = 0 * a, 0 * a + 1
    return np.stack(
        (
            _stack(zero, zero, one),
            _stack(-np.sin(a), np.cos(a), zero),
            _stack(np.cos(a) * np.sin(b), np.sin(a) * np.sin(b), np.cos(b)),
        ),
        axis=-1,
    )


def _nearest_other(frequency: Array, ranked: Array, in_use: Array) -> Array:
    """Distance of each frequency to the nearest entry of `ranked` (sorted, inf last) that is not itself."""
    shape = frequency.shape
    result = np.full(shape, np.nan)
    used = np.broadcast_to(in_use > 0, shape)
    for index in np.ndindex(shape[:-1]):
        row, line = frequency[index], ranked[index]
        place = np.searchsorted(line, row)
        padded = np.concatenate(([-np.inf, -np.inf], line, [np.inf, np.inf]))
        # one of the neighbours of a qubit in use is itself: count it once and look one further on either side
        near = np.abs(padded[place[:, None] + np.arange(4)] - row[:, None])
        near.sort(axis=-1)
        result[index] = np.where(used[index], near[:, 1], near[:, 0])
    return np.where(np.isfinite(result), result, np.nan)


def _direction(elevation: Array, azimuth: Array) -> Array:
    return _stack(np.cos(elevation) * np.cos(azimuth), np.cos(elevation) * np.sin(azimuth), np.sin(elevation))


def _stack(*components: Array) -> Array:
    return np.stack(np.broadcast_arrays(*components), axis=-1)


def _apply(matrix: Array, vector: Array) -> Array:
    return (matrix @ vector[..., None])[..., 0]


def _dot(left: Array, right: Array) -> Array:
    return np.asarray((left * right).sum(axis=-1))


def _norm(vector: Array) -> Array:
    return np.sqrt(_dot(vector, vector))
