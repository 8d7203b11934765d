"""Frequency noise of magnet, calibration, clock and charge."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from scipy.optimize import minimize_scalar  # type: ignore[import-untyped]

from planner.constants import BOHR_MAGNETON_HZ, MICRO_EV, PLANCK
from planner.physics import coils, noise
from planner.physics.dephasing import rms_of_t2_star

from . import assert_axes_agree, near, row

PPM_PER_HOUR = 1e-6 / 3600
NONE = row(np.nan)


def drift(**changes: float) -> float:
    start = {
        "field_slope": 28e9,
        "field": 0.5,
        "drift": 0.1 * PPM_PER_HOUR,
        "settle_slope": 12 * PPM_PER_HOUR,
        "since_ramp": np.nan,
        "interval": 1800.0,
    }
    given = {name: row(value) for name, value in (start | changes).items()}
    moves = {
        "field_response": np.full((1, 3), np.nan), "field_slope": given["field_slope"], "field": given["field"],
        "interval": given["interval"], "direction": np.zeros((0, 3)), "coil_field": np.zeros(0), "coil_rate": np.zeros(0),
    }  # fmt: skip
    own, settling = (coils.drifted(**moves, rate=given[rate]) for rate in ("drift", "settle_slope"))
    return float(coils.drift_after_ramp(own=own, settling=settling, since_ramp=given["since_ramp"])[0])


def test_drift_of_a_tenth_ppm_per_hour_for_half_an_hour_at_14_gigahertz_is_700_hertz() -> None:
    assert drift() == near(700.0, rel=1e-12)  # 14 GHz x 0.1e-6/h x 0.5 h
    assert drift(field_slope=-28e9) == near(700.0, rel=1e-12)


@pytest.mark.parametrize(("hours", "slope"), [(24.0, 0.5), (2.0, 6.0), (1.0, 12.0), (0.25, 12.0)])
def test_settling_falls_as_one_over_the_hours_since_the_ramp(hours: float, slope: float) -> None:
    settled = drift(since_ramp=hours * 3600.0) - drift()
    assert settled == near(14e9 * slope * PPM_PER_HOUR * 1800.0, rel=1e-9)


def calibration(**changes: float) -> float:
    start = {"contrast": 0.8, "wait": 10e-6, "t2_star": 1.0, "shots": 1000.0}
    return float(noise.calibration_noise(**{name: row(value) for name, value in (start | changes).items()})[0])


def test_calibration_of_the_worked_row() -> None:
    assert calibration() == near(629.115151, rel=1e-8)  # by = regression; its Monte Carlo gave 628.0 Hz


def test_calibration_reaches_the_bound_of_fisher_information() -> None:
    # Cramer-Rao: variance >= 1/(N I), I = p'^2 / (p (1 - p)) of one binary shot, by finite differences at mid fringe
    contrast, wait, shots = 0.55 * np.exp(-0.25), 4e-6, 800

    def probability(detuning: float) -> float:
        return float(0.5 * (1 + contrast * np.sin(2 * np.pi * detuning * wait)))

    slope = (probability(1.0) - probability(-1.0)) / 2
    bound = np.sqrt(0.25 / slope**2 / shots)
    assert calibration(contrast=0.55, wait=wait, t2_star=8e-6, shots=shots) == near(bound, rel=1e-8)


def test_the_best_wait_is_half_of_t2_star_at_a_given_time_and_more_at_given_shots() -> None:
    # without dead time the shots go as 1/wait: wait x V^2 peaks at T2*/2; at fixed shots wait x V at T2*/sqrt2
    t2_star = 10e-6
    for shots, expected in ((lambda wait: 1e-2 / wait, 0.5), (lambda _: 1000.0, np.sqrt(0.5))):
        best = minimize_scalar(
            lambda wait, of=shots: calibration(wait=wait, t2_star=t2_star, shots=of(wait)),
            bounds=(0.1 * t2_star, 1.5 * t2_star),
            method="bounded",
            options={"xatol": 1e-12},
        )
        assert best.x / t2_star == near(expected, rel=1e-5)


def test_a_fringe_below_one_per_cent_tells_nothing() -> None:
    limit = np.sqrt(np.log(0.8 / 0.01))  # contrast exp(-(tau/T2*)^2) = 0.01
    assert np.isfinite(calibration(wait=10e-6, t2_star=10e-6 / (0.999 * limit)))
    assert np.isnan(calibration(wait=10e-6, t2_star=10e-6 / (1.001 * limit)))


def test_a_tone_shifts_by_the_change_of_its_clock() -> None:
    assert noise.scaled_tone(frequency=row(14e9), change=row(1e-12))[0] == near(0.014)
    np.testing.assert_allclose(noise.loose_noise(tone=row(15e9, np.nan), drift=row(2e-7)), [3000.0, 0.0])


def test_field_noise_is_not_more_than_a_measured_t2_star_leaves_room_for() -> None:
    seen = noise.field_noise_seen(field_noise=row(28e3, 28e3, 28e3), measured_t2_star=row(np.nan, 20e-6, 1e-6))
    np.testing.assert_allclose(seen, [28e3, 1 / (np.sqrt(2) * np.pi * 20e-6), 28e3])


@pytest.mark.parametrize(
    ("nanotesla", "microseconds"), [(1, 8040.695), (5, 1608.139), (50, 160.813904)]
)  # by = regression
def test_static_field_noise_and_its_t2_star(nanotesla: float, microseconds: float) -> None:
    frequency = 2 * BOHR_MAGNETON_HZ * nanotesla * 1e-9
    assert rms_of_t2_star(row(microseconds * 1e-6))[0] == near(frequency, rel=1e-6)


def charge(**changes: Any) -> float:
    start = {
        "typed": np.nan,
        "own_relative": np.nan,
        "frequency": 14e9,
        "gradient": np.nan,
        "g": 2.0,
        "displacement": 1e-3 * 1e-9 / MICRO_EV,
        "charge_noise": 0.9 * MICRO_EV,
        "material_relative": np.nan,
        "is_hole": 0.0,
    }
    local = changes.pop("local_field", (0.0, 0.0, 0.0))
    values = {name: row(value) for name, value in (start | changes).items()}
    return float(noise.charge_amplitude(**values, local_field=np.array([local]))[0])


GRADIENT = 0.1e-3 / 1e-9  # 0.1 mT/nm


def test_charge_noise_through_a_gradient() -> None:
    assert charge(gradient=GRADIENT) == near(2519.324085, rel=1e-8)  # by = regression
    # plain arithmetic: 0.9 ueV/rtHz x 1e-3 nm/ueV = 0.9 pm/rtHz, x 0.1 mT/nm = 90 nT/rtHz, x 28 Hz/nT
    assert charge(gradient=GRADIENT) == near(90 * 28, rel=1e-3)


def test_the_first_stated_charge_noise_counts() -> None:
    everything = {"typed": 4e3, "own_relative": 1e-6, "gradient": GRADIENT, "material_relative": 8e-6, "is_hole": 1.0}
    expected = [4e3, 14e3, charge(gradient=GRADIENT), 112e3]
    for silent, size in zip(
        ((), ("typed",), ("typed", "own_relative"), ("typed", "own_relative", "gradient")), expected, strict=True
    ):
        assert charge(**everything | dict.fromkeys(silent, np.nan)) == near(size)


def test_without_any_statement_only_an_electron_without_a_local_field_is_quiet() -> None:
    assert charge() == 0.0
    assert np.isnan(charge(is_hole=1.0))
    assert np.isnan(charge(local_field=(0.1, 0.0, 0.0)))


def test_refocusing_needs_a_statement_of_fast_noise() -> None:
    names = ("typed", "own_relative", "material_relative", "gradient", "white")
    assert np.isnan(noise.refocused_amplitude(amplitude=row(0.0), **dict.fromkeys(names, NONE)))[0]
    for name in names:
        stated = {**dict.fromkeys(names, NONE), name: row(1.0)}
        assert noise.refocused_amplitude(amplitude=row(5.0), **stated)[0] == 5.0


def test_white_noise_that_nobody_typed_is_none() -> None:
    np.testing.assert_array_equal(noise.or_zero(density=row(np.nan, 100.0)), [0.0, 100.0])


def test_one_source_takes_its_share() -> None:
    assert noise.allowed_share(source_share=row(0.3), allowed_noise=row(20e3))[0] == near(6e3)


def test_published_anchor_of_energy_noise_and_t2_star() -> None:
    # Nowak and Cywinski, Appl. Phys. Lett. 122, 242001 (2023), second hand: 1 neV rms goes with a T2* of 1 us
    frequency = 1e-3 * MICRO_EV / PLANCK
    assert rms_of_t2_star(row(1e-6))[0] == near(frequency, rel=0.1)
    assert rms_of_t2_star(row(0.930852e-6))[0] == near(frequency, rel=1e-5)  # by = regression


def test_axes_of_studies() -> None:
    some, unsure = row(1.0, 2.0, 5.0), row(1.0, np.nan, 5.0)
    assert_axes_agree(coils.drift_after_ramp, own=some, settling=-some, since_ramp=row(5000.0))
    assert_axes_agree(noise.calibration_noise, contrast=row(0.3), wait=some, t2_star=some, shots=row(1000))
    assert_axes_agree(noise.scaled_tone, frequency=some, change=some)
    assert_axes_agree(noise.loose_noise, tone=unsure, drift=row(1e-7))
    assert_axes_agree(noise.field_noise_seen, field_noise=some, measured_t2_star=unsure)
    assert_axes_agree(
        noise.charge_amplitude,
        typed=unsure,
        own_relative=row(np.nan, np.nan, 1),
        frequency=some,
        gradient=row(np.nan, 3, 1),
        g=some,
        displacement=row(1.0),
        charge_noise=row(1.0),
        material_relative=row(np.nan),
        is_hole=row(0.0),
        local_field=np.eye(3),
    )
    assert_axes_agree(noise.allowed_share, source_share=row(0.1), allowed_noise=some)
    assert_axes_agree(
        noise.refocused_amplitude,
        amplitude=some,
        typed=unsure,
        own_relative=row(np.nan),
        material_relative=row(np.nan),
        gradient=unsure,
        white=row(np.nan, np.nan, 3),
    )
    assert_axes_agree(noise.or_zero, density=unsure)
