"""The reference: its noise model, its change since calibration and what the sequence asks of it."""

from __future__ import annotations

from decimal import Decimal, localcontext

import numpy as np
import pytest
from scipy.integrate import quad, simpson  # type: ignore[import-untyped]

from planner.physics import clock

from . import assert_axes_agree, near, row

TWO_LN2 = 2 * np.log(2)


def flicker(run: float, gap: float, averaging: float) -> float:
    return float(clock.flicker_variance(run=row(run), gap=row(gap), averaging=row(averaging))[0])


def exact_flicker(run: float, gap: float, averaging: float) -> float:
    """Sum of c_i c_j K(t_i - t_j), K(s) = (h/2) s^2 ln|s| with h = 1/(2 ln 2), to 80 digits."""
    with localcontext() as context:
        context.prec = 80
        t, g, a = Decimal(run), Decimal(gap), Decimal(averaging)
        times, weights = (-g - a, -g, Decimal(0), t), (1 / a, -1 / a, -1 / t, 1 / t)
        total = sum(
            (
                wi * wj * square_log(ti - tj)
                for ti, wi in zip(times, weights, strict=True)
                for tj, wj in zip(times, weights, strict=True)
            ),
            Decimal(0),
        )
        return float(total / (4 * Decimal(2).ln()))


def square_log(s: Decimal) -> Decimal:
    return s * s * abs(s).ln() if s else Decimal(0)


def test_the_sine_integral_behind_flicker_fm() -> None:
    # C13: integral of sin^4 x / x^3 = ln 2 (Ithier et al., Phys. Rev. B 72, 134519 (2005), from memory)
    head = quad(lambda x: np.sin(x) ** 4 / x**3, 0, 200, limit=1000)[0]
    assert head + 3 / 8 / (2 * 200**2) == near(np.log(2), abs=1e-6)


def test_unit_of_flicker_is_an_allan_deviation_of_one() -> None:
    # Riley, NIST SP 1065 (2008): flicker FM, sigma_y^2 = 2 ln2 h_-1; here by the two-sample transfer function
    frequency = np.geomspace(1e-6, 1e4, 2_000_001)
    transfer = 2 * np.sin(np.pi * frequency) ** 4 / (np.pi * frequency) ** 2
    assert simpson(transfer, x=np.log(frequency)) == near(TWO_LN2, rel=1e-5)


def test_two_adjacent_averages_of_one_length_are_the_two_sample_variance() -> None:
    # <(y2 - y1)^2> = 2 sigma_y^2, the definition of the Allan variance, whatever the length
    for length in (1e-6, 1.0, 3600.0):
        assert flicker(length, 0.0, length) == near(2.0, rel=1e-12)
        assert flicker(length, 1e-12 * length, length) == near(2.0, rel=1e-9)


def test_flicker_of_the_worked_row() -> None:
    assert flicker(1, 5, 10) * TWO_LN2 == near(5.317817363, rel=1e-9)  # by = regression, unit h_-1


def test_flicker_agrees_with_the_spectral_integral() -> None:
    # Var = integral of S_y |H|^2, S_y = h/f, h = 1/(2 ln 2), H the difference of the two averages' Fourier transforms
    run, gap, averaging = 1.0, 5.0, 10.0
    frequency = np.geomspace(1e-7, 1e3, 2_000_001)
    means = [
        np.sinc(frequency * length) * np.exp(2j * np.pi * frequency * middle)
        for length, middle in ((run, run / 2), (averaging, -gap - averaging / 2))
    ]
    integral = simpson(np.abs(means[0] - means[1]) ** 2, x=np.log(frequency)) / TWO_LN2
    assert flicker(run, gap, averaging) == near(integral, rel=1e-5)


@pytest.mark.parametrize("noise", ["white", "flicker"])
def test_the_change_of_the_clock_is_its_spectral_integral(noise: str) -> None:
    """Two of the five noise types of SP 1065: the program has white FM and flicker FM; white PM, flicker PM and random walk
    FM have no given, ageing stands for what is slower. White FM counts in the calibration's mean alone (see the law).
    """
    run, gap, averaging = 1.0, 5.0, 10.0
    frequency = np.geomspace(1e-7, 1e4, 2_000_001)
    calibration = np.sinc(frequency * averaging) * np.exp(-2j * np.pi * frequency * (gap + averaging / 2))
    later = np.sinc(frequency * run) * np.exp(1j * np.pi * frequency * run)
    if noise == "white":  # S_y = h0 = 2 sigma^2(1 s)
        integral = simpson(2 * np.abs(calibration) ** 2 * frequency, x=np.log(frequency))
    else:  # S_y = h_-1/f with sigma^2 = 2 ln2 h_-1
        integral = simpson(np.abs(later - calibration) ** 2, x=np.log(frequency)) / TWO_LN2
    assert change(**{noise: 1.0}) ** 2 == near(integral, rel=1e-4)


@pytest.mark.parametrize("averaging", [1e-4, 0.2, 10.0, 1e5])
@pytest.mark.parametrize("gap", [5.0, 1800.0])
@pytest.mark.parametrize("ratio", [1e-9, 1e-6, 1e-3, 0.05, 0.0999, 0.1001, 1.0, 100.0])
def test_flicker_keeps_its_digits_where_the_plain_sum_cancels(ratio: float, gap: float, averaging: float) -> None:
    assert flicker(ratio * gap, gap, averaging) == near(exact_flicker(ratio * gap, gap, averaging), rel=1e-10)


@pytest.mark.parametrize("gap_of_run", [0.0, 1e-3, 1.0, 9.0])
@pytest.mark.parametrize("run", [1e-9, 1e-6, 1e-3, 1.0, 1e3])
def test_flicker_with_hardly_a_gap(run: float, gap_of_run: float) -> None:
    gap = gap_of_run * run
    assert flicker(run, gap, 1.0) == near(exact_flicker(run, gap, 1.0), rel=1e-11)


@pytest.mark.parametrize(("white", "floor"), [(3e-11, 0.0), (3e-11, 2e-12), (1e-12, 1e-12), (0.0, 5e-13)])
def test_white_and_flicker_are_found_from_their_allan_deviations(white: float, floor: float) -> None:
    # variances of independent noises add; white FM falls as 1/tau (Riley, NIST SP 1065)
    one, hundred = row(np.hypot(white, floor)), row(np.hypot(white / 10, floor))
    found = clock.white_fm(deviation_1s=one, deviation_100s=hundred)
    assert found[0] == near(white, rel=1e-6, abs=1e-19)
    assert clock.flicker_fm(deviation_1s=one, deviation_100s=hundred, white=found)[0] == near(
        floor, rel=1e-6, abs=1e-19
    )


def test_a_clock_of_one_number_is_white() -> None:
    one = row(1e-11, 3e-13)
    hundred = clock.tenth(deviation_1s=one)
    white = clock.white_fm(deviation_1s=one, deviation_100s=hundred)
    assert white == near(one, rel=1e-12)
    np.testing.assert_array_equal(clock.flicker_fm(deviation_1s=one, deviation_100s=hundred, white=white), 0.0)


def change(**parts: float) -> float:
    start = {"white": 0.0, "flicker": 0.0, "aging": 0.0, "run": 1.0, "gap": 5.0, "averaging": 10.0}
    return float(clock.clock_change(**{name: row(value) for name, value in (start | parts).items()})[0])


def test_white_fm_of_calibration_and_run_together_is_the_worked_row() -> None:
    white = np.sqrt(0.5)  # unit h0: sigma_y^2(1 s) = h0/2
    run = clock.stability(white=row(white), flicker=row(0.0), sequence_time=row(1.0))[0]
    assert change(white=white) ** 2 + run**2 == near(0.55, rel=1e-12)  # by = regression: (h0/2)(1/T + 1/tau_c)


def test_white_fm_falls_as_the_root_of_the_time() -> None:
    assert clock.stability(white=row(1e-11), flicker=row(0.0), sequence_time=row(100.0))[0] == near(1e-12)


def test_flicker_is_the_floor_of_the_stability() -> None:
    # Riley, NIST SP 1065: flicker FM shows the same Allan deviation at every averaging time
    assert clock.stability(white=row(0.0), flicker=row(1e-12), sequence_time=row(1e-3))[0] == near(1e-12)


def test_ageing_is_the_difference_of_the_two_means_of_a_ramp() -> None:
    run, calibration = np.linspace(0, 1, 1001).mean(), np.linspace(-15, -5, 1001).mean()
    assert change(aging=2e-15) == near(2e-15 * (run - calibration), rel=1e-12)


def test_flicker_and_white_add_in_quadrature_and_ageing_on_top() -> None:
    parts = {"white": 3e-12, "flicker": 1e-12, "aging": 1e-15}
    alone = {name: change(**{name: value}) for name, value in parts.items()}
    assert change(**parts) == near(np.hypot(alone["white"], alone["flicker"]) + alone["aging"], rel=1e-12)


@pytest.mark.parametrize(
    ("error", "frequency", "time", "expected"),
    [  # by = regression
        (1e-4, 14e9, 250e-6, 7.876718e-10),
        (1e-4, 14e9, 1e-3, 1.969179e-10),
        (1e-3, 28e9, 10e-3, 3.115651e-11),
    ],
)
def test_required_stability(error: float, frequency: float, time: float, expected: float) -> None:
    required = clock.required_stability(
        source_share=row(1.0), frequency=row(frequency), sequence_time=row(time), allowed_sequence_error=row(error)
    )
    assert required[0] == near(expected, rel=1e-6)


def test_required_stability_gives_back_the_error_that_it_was_made_from() -> None:
    # phase 2 pi f T sqrt2 sigma_y between adjacent averages of length T, error (1 - exp(-phase^2/2))/3
    required = clock.required_stability(
        source_share=row(1.0), frequency=row(14e9), sequence_time=row(1e-3), allowed_sequence_error=row(0.1)
    )[0]
    phase = 2 * np.pi * 14e9 * 1e-3 * np.sqrt(2) * required
    assert (1 - np.exp(-(phase**2) / 2)) / 3 == near(0.1, rel=1e-12)


def test_required_accuracy_shifts_the_qubit_by_its_share_of_the_allowed_noise() -> None:
    required = clock.required_accuracy(source_share=row(0.3), allowed_noise=row(20e3), frequency=row(15e9))
    assert required[0] * 15e9 == near(0.3 * 20e3)


def test_the_run_is_the_sequence_else_the_wait_else_a_shot() -> None:
    runs = clock.run_time(sequence_time=row(3, np.nan, np.nan), longest_wait=row(2, 2, np.nan), shot_time=row(1))
    np.testing.assert_array_equal(runs, [3, 2, 1])


def test_allan_deviations_are_extrapolated_below_a_tenth_of_a_second() -> None:
    np.testing.assert_array_equal(clock.below_allan_range(sequence_time=row(0.09, 0.1, 1)), [True, False, False])


def test_axes_of_studies() -> None:
    one, hundred, time = row(1e-11, 2e-11, 1e-12), row(5e-12, 2e-12, 1e-12), row(1e-3, 0.1, 7.0)
    assert_axes_agree(clock.white_fm, deviation_1s=one, deviation_100s=hundred)
    assert_axes_agree(clock.flicker_fm, deviation_1s=one, deviation_100s=hundred, white=one)
    assert_axes_agree(clock.tenth, deviation_1s=one)
    assert_axes_agree(clock.run_time, sequence_time=row(np.nan, 2, 3), longest_wait=row(1, np.nan, 2), shot_time=row(1))
    assert_axes_agree(clock.averaging_time, shots=row(1000), shot_time=time)
    assert_axes_agree(
        clock.clock_change,
        white=one[:1],
        flicker=hundred[:1],
        aging=row(1e-15),
        run=time,
        gap=row(1800),
        averaging=row(0.2),
    )
    assert_axes_agree(clock.required_accuracy, source_share=row(0.3), allowed_noise=time, frequency=time)
    assert_axes_agree(
        clock.required_stability,
        source_share=row(0.3),
        frequency=time,
        sequence_time=time,
        allowed_sequence_error=row(0.1),
    )
    assert_axes_agree(clock.stability, white=one[:1], flicker=one[:1], sequence_time=time)
    assert_axes_agree(clock.flicker_variance, run=time, gap=row(5), averaging=time)
