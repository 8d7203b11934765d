"""Loss of phase: filter-function integrals, closed forms, decay times."""

from __future__ import annotations

from math import log, pi

import numpy as np
import pytest
from scipy.integrate import quad  # type: ignore[import-untyped]
from scipy.special import sici, zeta  # type: ignore[import-untyped]

from planner.physics import Array, dephasing

from . import assert_axes_agree, near, qutip, row

NEVER = row(np.nan)
NONE = row(0.0)


def toggled(z: Array, pulses: int) -> Array:
    """|F|: |1 + (-1)^(n+1) e^iz + 2 sum (-1)^k e^(iz(k - 1/2)/n)|^2, from the sign that each pulse turns over."""
    k = np.arange(1, pulses + 1)
    steps = 2 * (-1.0) ** k * np.exp(1j * np.multiply.outer(z, (k - 0.5) / max(pulses, 1)))
    total: Array = np.abs(1 + (-1) ** (pulses + 1) * np.exp(1j * z) + steps.sum(axis=-1)) ** 2
    return total


def filtered(pulses: int, power: int) -> float:
    """Integral of F(z)/z^power over all z > 0: F has the period 4 pi n, so all periods are summed by Hurwitz's zeta."""
    period = 4 * pi * pulses
    return float(
        quad(
            lambda z: toggled(np.asarray(z), pulses) * zeta(power, z / period) / period**power,
            1e-6,
            period,
            limit=4000,
            epsrel=1e-9,
        )[0]
    )


def sine_integral(z: Array) -> Array:
    """J(z) by parts: (1 - cos z)/(2 z^2) + (sin z / z - Ci z)/2."""
    integral: Array = np.sin(z / 2) ** 2 / z**2 + (np.sin(z) / z - sici(z)[1]) / 2
    return integral


def flicker_chi(*, amplitude: float, lowest: float, time: float) -> float:
    """chi by the filter-function integral itself, from the lowest frequency on."""
    start = 2 * pi * lowest * time
    head = quad(lambda s: 2 * (np.sin(np.exp(s) / 2) * np.exp(-s)) ** 2, log(start), 0, epsrel=1e-11, limit=500)[0]
    return float((2 * pi * amplitude * time) ** 2 * (head + sine_integral(np.asarray(1.0))))


def chi(**parts: float) -> float:
    start = {"static": 0.0, "amplitude": 0.0, "density": 0.0, "lowest": 1e-3, "time": 20e-6}
    return float(dephasing.free_chi(**{name: row(value) for name, value in (start | parts).items()})[0])


@pytest.mark.parametrize("pulses", [1, 2, 3, 4, 5, 8, 16, 32, 64])
def test_refocusing_weights_are_filter_function_integrals(pulses: int) -> None:
    weight = dephasing.refocusing_weight(row(pulses))[0]
    assert weight == near(filtered(pulses, power=3), rel=1e-7)


def test_refocusing_weights_in_closed_form() -> None:
    # C13: c_1 = ln 2 (Ithier et al., Phys. Rev. B 72, 134519 (2005), from memory); n c_n -> 7 zeta(3)/pi^2
    weights = dephasing.refocusing_weight(row(1, 64, 1000, 1e6))
    limit = 7 * zeta(3) / pi**2
    assert weights[0] == near(log(2), rel=1e-12)
    assert 64 * weights[1] == near(limit, rel=3e-3)
    assert 1000 * weights[2] == near(limit, rel=3e-4)
    assert 1e6 * weights[3] == near(limit, rel=1e-6)
    assert np.isnan(dephasing.refocusing_weight(row(0)))[0]


@pytest.mark.parametrize(
    ("pulses", "weight"),
    [  # by = regression
        (2, 0.39243611),
        (4, 0.20440050),
        (8, 0.10436393),
        (16, 0.05273198),
        (32, 0.02650411),
        (64, 0.01328662),
    ],
)
def test_refocusing_weights_of_the_table(pulses: int, weight: float) -> None:
    assert dephasing.refocusing_weight(row(pulses))[0] == near(weight, abs=6e-9)


@pytest.mark.parametrize("pulses", [1500, 4000])
def test_many_pulses_continue_the_sum(pulses: int) -> None:
    m, k = (np.arange(1, end, dtype=np.longdouble) for end in (pulses, pulses + 1))
    between = 4 * (-1) ** m * (pulses - m) * (m / pulses) ** 2 * np.log(m / pulses)
    ends = 4 * (-1) ** k * ((k - 0.5) / pulses) ** 2 * np.log((k - 0.5) / pulses)
    assert dephasing.refocusing_weight(row(pulses))[0] == near(float(between.sum() + ends.sum()), rel=1e-5)


@pytest.mark.parametrize("pulses", [1, 2, 5])
def test_no_sequence_touches_white_noise(pulses: int) -> None:
    # chi = (1/2) (2 pi)^2 S t/(2 pi) x integral of F/z^2, which is pi for every sequence
    assert filtered(pulses, power=2) == near(pi, rel=1e-7)
    refocused = dephasing.refocused_chi(amplitude=NONE, density=row(1e4), time=row(5e-6), pulses=row(pulses))
    assert refocused[0] == near(pi**2 * 1e4 * 5e-6, rel=1e-12)
    assert chi(density=1e4, time=5e-6) == near(pi**2 * 1e4 * 5e-6, rel=1e-12)


def test_white_noise_is_pure_dephasing() -> None:
    # qutip: collapse operator sqrt(pi^2 S / 2) sigma_z, coherence of an equal superposition after 5, 10, 20 us
    density, times = 1e4, [0.0, 5e-6, 10e-6, 20e-6]
    collapse = np.sqrt(pi**2 * density / 2) * qutip.sigmaz()
    plus = (qutip.basis(2, 0) + qutip.basis(2, 1)).unit()
    solved = qutip.mesolve(
        0 * qutip.sigmaz(), plus, times, [collapse], e_ops=[qutip.sigmax()], options={"atol": 1e-10, "rtol": 1e-9}
    )
    assert solved.expect[0] == near([np.exp(-chi(density=density, time=t)) for t in times], rel=1e-6)


@pytest.mark.parametrize("z", np.geomspace(1e-9, 1e4, 40))
def test_flicker_integral_by_the_cosine_integral(z: float) -> None:
    assert dephasing.flicker_integral(row(z))[0] == near(sine_integral(np.asarray(z)), rel=1e-10)


@pytest.mark.parametrize("z", [0.01, 0.5, 3.0, 11.9, 12.1, 50.0, 1e3])
def test_flicker_integral_by_quadrature(z: float) -> None:
    end = 2 * pi * np.ceil(z + 200)  # beyond it 1/u^3 is plain and the cosine leaves 3/end^4
    head = quad(lambda u: 2 * np.sin(u / 2) ** 2 / u**3, z, end, limit=4000, epsabs=0, epsrel=1e-9)[0]
    assert dephasing.flicker_integral(row(z))[0] == near(head + 0.5 / end**2 - 3 / end**4, rel=1e-8)


def test_flicker_integral_does_not_depend_on_its_neighbours() -> None:
    z = np.geomspace(1e-9, 1e4, 300)
    assert dephasing.flicker_integral(z) == near([dephasing.flicker_integral(row(one))[0] for one in z], rel=1e-12)


@pytest.mark.parametrize(
    ("amplitude", "lowest", "time"), [(3e3, 1e-3, 20e-6), (4e3, 1 / 1800, 1.5e-6), (10.0, 1e-3, 1.0)]
)
def test_free_flicker_noise_is_its_filter_function_integral(amplitude: float, lowest: float, time: float) -> None:
    expected = flicker_chi(amplitude=amplitude, lowest=lowest, time=time)
    assert chi(amplitude=amplitude, lowest=lowest, time=time) == near(expected, rel=1e-8)


def test_free_flicker_noise_of_the_worked_row() -> None:
    assert chi(amplitude=3e3) == near(1.194711408, rel=1e-9)  # by = regression


def test_free_flicker_noise_far_below_one_over_the_time() -> None:
    # closed form for f_l t << 1 (Ithier et al. 2005, from memory): (2 pi A t)^2/2 (ln(1/(2 pi f_l t)) + 3/2 - gamma)
    closed = (2 * pi * 3e3 * 20e-6) ** 2 / 2 * (np.log(1 / (2 * pi * 1e-3 * 20e-6)) + 1.5 - np.euler_gamma)
    assert chi(amplitude=3e3) == near(closed, rel=1e-9)


def test_the_slowest_noise_that_counts_has_one_period_a_record() -> None:
    assert dephasing.lowest_frequency(time=row(1800.0))[0] == near(1 / 1800)


def test_static_noise_decays_as_a_gaussian() -> None:
    assert chi(static=100e3, time=2e-6) == near((2 * pi * 100e3 * 2e-6) ** 2 / 2)
    assert chi(static=dephasing.rms_of_t2_star(row(3e-6))[0], time=3e-6) == near(1.0)
    assert chi(static=1e5, amplitude=1e3, density=1e3, time=0.0) == 0.0


def test_echo_of_the_worked_row() -> None:
    assert dephasing.t2_echo(amplitude=row(3e3), density=NONE)[0] == near(90.115842e-6, rel=1e-8)  # by = regression
    echo = dephasing.t2_echo(amplitude=row(3e3), density=row(1e3))
    assert dephasing.refocused_chi(amplitude=row(3e3), density=row(1e3), time=echo, pulses=row(1)) == near(1.0)
    assert dephasing.t2_echo(amplitude=NONE, density=row(1e-3))[0] == near(1e3 / pi**2, rel=1e-12)  # very quiet
    assert np.isnan(dephasing.t2_echo(amplitude=NONE, density=NONE))[0]


def t2_star(*, static: float = 0.0, amplitude: float = 0.0, density: float = 0.0, lowest: float = 1e-3) -> float:
    parts = static / np.sqrt([2, 3, 6])  # three shares of one variance
    return float(
        dephasing.t2_star(
            nuclear=row(parts[0]),
            barrier=row(parts[1]),
            magnet=row(parts[2]),
            amplitude=row(amplitude),
            density=row(density),
            lowest=row(lowest),
            measured=NEVER,
        )[0]
    )


def test_t2_star_of_flicker_noise_of_the_worked_row() -> None:
    assert t2_star(amplitude=3e3) == near(18.248102e-6, rel=1e-7)  # by = regression


def test_t2_star_of_a_gaussian_times_an_exponential() -> None:
    gaussian, exponential = 10e-6, 30e-6  # 1/e time T_g (sqrt(1 + (T_g/2T_e)^2) - T_g/2T_e)
    found = t2_star(static=float(dephasing.rms_of_t2_star(row(gaussian))[0]), density=1 / (pi**2 * exponential))
    half = gaussian / (2 * exponential)
    assert found == near(gaussian * (np.sqrt(1 + half**2) - half), rel=1e-10)
    assert found == near(8.471271e-6, rel=1e-6)  # by = regression


@pytest.mark.parametrize("density", [0.0, 1.0, 1e6])
@pytest.mark.parametrize("amplitude", [0.0, 10.0, 4e3, 1e6])
@pytest.mark.parametrize("static", [0.0, 1.0, 25e3, 40e6])
@pytest.mark.parametrize("lowest", [1e-5, 1.0])
def test_t2_star_inverts_the_free_decay(static: float, amplitude: float, density: float, lowest: float) -> None:
    if static == amplitude == density == 0:
        return  # see test_without_noise_there_is_no_t2_star
    time = t2_star(static=static, amplitude=amplitude, density=density, lowest=lowest)
    outside = (2 * pi * time) ** 2 * (
        static**2 / 2 + amplitude**2 * float(sine_integral(np.asarray(2 * pi * lowest * time)))
    )
    assert outside + pi**2 * density * time == near(1.0, rel=1e-8)


def test_without_noise_there_is_no_t2_star() -> None:
    with np.errstate(over="ignore", invalid="ignore"):  # as the evaluation of a plan does
        assert np.isnan(t2_star())


def test_flicker_noise_slower_than_the_record_never_reaches_one() -> None:
    # beyond the record chi saturates at (A/f_l)^2/2
    assert np.isnan(t2_star(amplitude=0.5e-3))


def test_a_measured_t2_star_stands_for_what_it_contains() -> None:
    measured = row(np.nan, 8e-6)
    static = dephasing.static_noise(
        nuclear=row(3.0),
        barrier=row(4.0),
        magnet=row(12.0),
        measured_t2_star=measured,
        drift=row(1.0),
        calibration=row(2.0),
        clock=row(3.0),
        loose=row(4.0),
    )
    assert static == near(np.sqrt([13**2 + 30, (1 / (np.sqrt(2) * pi * 8e-6)) ** 2 + 30]))
    np.testing.assert_array_equal(dephasing.free_flicker(amplitude=row(5.0), measured_t2_star=measured), [5.0, 0.0])
    np.testing.assert_array_equal(dephasing.free_white(density=row(5.0), measured_t2_star=measured), [5.0, 0.0])


def test_equivalent_rms_dephases_as_much() -> None:
    noise = {"amplitude": row(3e3), "density": row(1e3), "lowest": row(1e-3), "time": row(20e-6)}
    total = dephasing.total_noise(static=row(5e3), **noise)[0]
    assert (2 * pi * total * 20e-6) ** 2 / 2 == near(chi(static=5e3, amplitude=3e3, density=1e3), rel=1e-12)


def phase(pulses: float) -> float:
    return float(
        dephasing.wait_phase(total=row(12e3), amplitude=row(3e3), density=row(1e3), wait=row(2e-6), pulses=row(pulses))[
            0
        ]
    )


def test_phase_over_the_wait_is_all_noise_or_what_refocusing_leaves() -> None:
    assert phase(0) == near(2 * pi * 2e-6 * 12e3)
    left = (2 * pi * 3e3 * 2e-6) ** 2 * log(2) / 2 + pi**2 * 1e3 * 2e-6
    assert phase(1) == near(np.sqrt(2 * left), rel=1e-12)


def test_unexplained_noise_and_the_model_make_the_measured_t2_star() -> None:
    model = {"amplitude": row(2e3), "density": row(1e3), "lowest": row(1e-3)}
    rest = dephasing.unexplained_noise(
        measured=row(8e-6), nuclear=row(3e3), barrier=row(4e3), magnet=row(1e3), **model
    )[0]
    together = np.sqrt(rest**2 + 3e3**2 + 4e3**2 + 1e3**2)
    assert chi(static=float(together), amplitude=2e3, density=1e3, time=8e-6) == near(1.0, rel=1e-12)
    nothing_left = dephasing.unexplained_noise(
        measured=row(80e-6), nuclear=row(3e4), barrier=NONE, magnet=NONE, **model
    )
    assert nothing_left[0] == 0.0


def test_axes_of_studies() -> None:
    some, unsure = row(1e3, 2e3, 5e3), row(1e-6, np.nan, 5e-6)
    noise = {"amplitude": some, "density": some, "lowest": row(1e-3)}
    bath = {"nuclear": some, "barrier": some, "magnet": some}
    assert_axes_agree(dephasing.lowest_frequency, time=some)
    assert_axes_agree(dephasing.flicker_rms, amplitude=some, lowest=row(1e-3), time=some)
    assert_axes_agree(dephasing.white_rms, density=some, time=some)
    assert_axes_agree(
        dephasing.static_noise, **bath, measured_t2_star=unsure, drift=some, calibration=some, clock=some, loose=some
    )
    assert_axes_agree(dephasing.free_flicker, amplitude=some, measured_t2_star=unsure)
    assert_axes_agree(dephasing.free_white, density=some, measured_t2_star=unsure)
    assert_axes_agree(dephasing.total_noise, static=some, **noise, time=some / 1e9)
    assert_axes_agree(dephasing.t2_star, **bath, **noise, measured=unsure)
    assert_axes_agree(dephasing.t2_echo, amplitude=some, density=some)
    assert_axes_agree(
        dephasing.wait_phase, total=some, amplitude=some, density=some, wait=row(1e-6), pulses=row(0, 1, 4)
    )
    assert_axes_agree(dephasing.unexplained_noise, measured=unsure, **bath, **noise)
    assert_axes_agree(dephasing.free_chi, static=some, **noise, time=row(0.0, 1e-6, 1e-3))
    assert_axes_agree(dephasing.refocused_time, chi=row(1.0), amplitude=some, density=some, pulses=row(1, 2, 3))
