"""Coils against least squares of numpy, an orthogonal triad, and the plain formula of a magnet without coils."""

from __future__ import annotations

import numpy as np
import pytest

from planner.physics import Array, coils
from tests.physics import near, row

TRIAD = np.array([[0.8, 0.6, 0.0], [-0.6, 0.8, 0.0], [0.0, 0.0, 1.0]])
SKEW = np.array([[0.99961, 0.0, 0.02792], [0.1, -0.99, 0.0], [-0.05, 0.02, 0.99]])
FOUR = np.vstack([SKEW, [0.6, 0.0, 0.8]])
FIELD = np.array([[0.30, -0.12, 0.04]])
RESPONSE = np.array([[2.8e10, 1e9, -3e9], [-5e8, 2.7e10, 4e9]])  # (muB/h) u.g of two qubits, Hz/T


def unit(directions: Array) -> Array:
    return coils.unit_direction(direction=directions)


def fields(directions: Array, off: Array, field: Array = FIELD) -> Array:
    return coils.coil_fields(set_vector=field, direction=directions, is_off=off)


def test_a_direction_is_scaled_to_length_one() -> None:
    np.testing.assert_allclose(unit(np.array([[3.0, 0.0, 4.0]])), [[0.6, 0.0, 0.8]], rtol=1e-15)


@pytest.mark.parametrize("directions", [TRIAD, unit(SKEW), unit(FOUR)], ids=["triad", "skew", "four"])
def test_fields_are_the_least_squares_solution(directions: Array) -> None:
    expected, *_ = np.linalg.lstsq(directions.T, FIELD[0], rcond=None)  # of shortest length where there are four
    np.testing.assert_allclose(fields(directions, np.zeros(len(directions))), expected, rtol=1e-12, atol=1e-15)


def test_an_orthogonal_triad_takes_projections() -> None:
    np.testing.assert_allclose(fields(TRIAD, row(0, 0, 0)), [0.168, -0.276, 0.04], rtol=1e-13)  # by hand: B . d


def test_a_coil_that_is_off_gives_nothing_and_the_others_make_the_field() -> None:
    found = fields(unit(FOUR), row(0, 0, 1, 0))
    expected, *_ = np.linalg.lstsq(unit(FOUR)[[0, 1, 3]].T, FIELD[0], rcond=None)
    assert found[2] == 0
    np.testing.assert_allclose(found[[0, 1, 3]], expected, rtol=1e-12)


@pytest.mark.parametrize(("third", "met"), [(0.9e-3, True), (1.1e-3, False)])
def test_a_field_is_missed_from_one_part_in_a_thousand(third: float, met: bool) -> None:
    field = np.array([[0.6, 0.8, third]]) / np.sqrt(1 + third**2)
    assert bool(np.isfinite(fields(np.eye(3), row(0, 0, 1), field)).all()) is met


def test_current_and_size() -> None:
    current = coils.coil_current(field=row(0.35, -0.0084), field_per_current=row(0.070, 0.015))
    np.testing.assert_allclose(current, [5.0, -0.56])  # the worked scenario: 5.0 A at 0.35 T, x -0.56 A
    np.testing.assert_allclose(coils.field_magnitude(field=row(-0.2, 0.1)), [0.2, 0.1])


def test_drift_and_noise_follow_the_coils_own_mode_or_else_the_magnets() -> None:
    mode = {"is_persistent": row(1, 0, 0), "is_unset": row(0, 1, 0)}
    for magnet, expected in [(0.0, [1.0, 9.0, 9.0]), (1.0, [1.0, 1.0, 9.0])]:
        drift = coils.coil_drift(driven=row(9), persistent=row(1), magnet_is_persistent=row(magnet), **mode)
        np.testing.assert_allclose(drift, expected)
        noise = coils.coil_noise(
            driven=np.array([[9.0] * 3]), persistent=np.array([[1.0] * 3]), magnet_is_persistent=row(magnet),
            direction=TRIAD, **mode,
        )  # fmt: skip
        np.testing.assert_allclose(noise, expected)
    np.testing.assert_allclose(coils.settle_of_coil(slope=row(5), is_off=row(0, 1)), [5.0, 0.0])


def drifted(directions: Array, coil_field: Array, rate: Array) -> Array:
    along = RESPONSE @ FIELD[0] / np.linalg.norm(FIELD)
    return coils.drifted(
        field_response=RESPONSE, field_slope=along, field=row(float(np.linalg.norm(FIELD))), rate=row(3e-9),
        interval=row(1200.0), direction=directions, coil_field=coil_field, coil_rate=rate,
    )  # fmt: skip


def test_one_ideal_coil_along_the_field_drifts_as_the_plain_formula() -> None:
    size = np.linalg.norm(FIELD)
    plain = RESPONSE @ FIELD[0] * 3e-9 * 1200
    np.testing.assert_allclose(drifted(FIELD / size, row(float(size)), row(3e-9)), plain, rtol=1e-13)
    np.testing.assert_allclose(drifted(np.zeros((0, 3)), row(), row()), plain, rtol=1e-13)
    np.testing.assert_allclose(drifted(np.eye(3), row(np.nan, 0, 0), row(1, 1, 1)), plain, rtol=1e-13)


def test_coils_that_drift_alike_drift_as_the_whole_whatever_their_directions() -> None:
    plain = RESPONSE @ FIELD[0] * 3e-9 * 1200
    for directions in (TRIAD, unit(SKEW), unit(FOUR)):
        off = np.zeros(len(directions))
        np.testing.assert_allclose(drifted(directions, fields(directions, off), off + 3e-9), plain, rtol=1e-11)


def test_a_drift_is_the_difference_of_frequencies_before_and_after() -> None:
    rates, found = row(4e-9, -2e-9, 1e-9), fields(unit(SKEW), row(0, 0, 0))
    after = (found * (1 + rates * 1200)) @ unit(SKEW)
    np.testing.assert_allclose(drifted(unit(SKEW), found, rates), RESPONSE @ (after - FIELD[0]), rtol=1e-6)


@pytest.mark.parametrize(("own", "settling"), [(10.0, 400.0), (-10.0, 400.0), (10.0, -400.0), (0.0, 400.0)])
def test_settling_time_inverts_the_drift_after_a_ramp(own: float, settling: float) -> None:
    time = coils.settling_time(own=row(own), settling=row(settling), allowed=row(40.0))
    drift = coils.drift_after_ramp(own=row(own), settling=row(settling), since_ramp=time)
    assert float(drift[0]) == near(40.0, rel=1e-12)
    later = coils.drift_after_ramp(own=row(own), settling=row(settling), since_ramp=1.001 * time)
    assert float(later[0]) < 40.0


def test_no_wait_helps_a_mode_that_drifts_too_much_and_none_is_needed_by_one_that_is_met_at_once() -> None:
    time = coils.settling_time(own=row(50, 5, 40), settling=row(1, 20, 10), allowed=row(40))
    np.testing.assert_array_equal(time, [np.nan, 0.0, np.nan])  # exactly at the allowance, settling never ends


def test_settling_falls_as_one_over_time_from_one_hour_on() -> None:
    drift = coils.drift_after_ramp(own=row(1), settling=row(12), since_ramp=row(60, 3600, 4 * 3600, np.nan))
    np.testing.assert_allclose(drift, [13.0, 13.0, 4.0, 1.0])  # plain arithmetic


def test_noise_of_coils_is_theirs_along_their_directions() -> None:
    noise = row(1e-6, 2e-6, 3e-6)
    common = {"field_response": RESPONSE, "noise": np.array([[1e-6, 2e-6, 3e-6]])}
    triad = coils.magnet_noise(direction=np.eye(3), is_off=row(0, 0, 0), coil_noise=noise, **common)
    plain = np.sqrt(((RESPONSE * noise) ** 2).sum(axis=1))  # three coils along the axes are the components
    np.testing.assert_allclose(triad, plain, rtol=1e-14)
    single = coils.magnet_noise(direction=np.eye(3), is_off=row(0, 1, 1), coil_noise=noise, **common)
    np.testing.assert_allclose(single, np.abs(RESPONSE[:, 0]) * 1e-6, rtol=1e-14)
    none = coils.magnet_noise(direction=np.zeros((0, 3)), is_off=row(), coil_noise=row(), **common)
    np.testing.assert_allclose(none, plain, rtol=1e-14)


def test_half_a_step_is_that_of_the_coarsest_running_coil() -> None:
    found = coils.half_step(
        field_response=np.array([[2.8e10, 0.0, 0.0]]), direction=TRIAD, is_off=row(0, 0, 1),
        step=row(1e-4, 3e-4, 1.0), field_per_current=row(0.07, 0.07, 1.0),
    )  # fmt: skip
    assert found == near([2.8e10 * 0.6 * 3e-4 * 0.07 / 2])  # by hand: 0.8 x 1e-4 against 0.6 x 3e-4
    unknown = coils.half_step(
        field_response=RESPONSE, direction=TRIAD, is_off=row(0, 0, 0), step=row(*[np.nan] * 3), field_per_current=row(1)
    )
    assert np.isnan(unknown).all()
