"""Phase noise of the source against adaptive quadrature of the same integral, and its closed limits."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy import integrate  # type: ignore[import-untyped]

from planner.physics import phasenoise
from tests.physics import near, row

DECIBELS = {100.0: -72.0, 1e3: -92.0, 1e4: -105.0, 1e5: -112.0, 1e6: -125.0, 1e7: -140.0}  # an invented datasheet
EXACT = {"epsrel": 1e-9, "epsabs": 0.0, "limit": 500}


def phase(
    points: dict[float, float], times: list[float], *, frequency: float = 10e9, carrier: float = 10e9
) -> list[float]:
    found = phasenoise.source_phase(
        offset=row(*points), level=10 ** (row(*points.values()) / 10), carrier=row(*[carrier] * len(points)),
        frequency=row(*[frequency] * len(times)), time=row(*times),
    )  # fmt: skip
    return [float(value) for value in found]


def by_quadrature(points: dict[float, float], time: float) -> float:
    """Root of the integral of 2 L 4 sin^2(pi f t), L straight in decibels against log f; each piece by quadrature."""
    offsets, levels = np.log10(list(points)), list(points.values())

    def level(f: float) -> float:
        return float(10 ** (np.interp(np.log10(f), offsets, levels) / 10))

    total = 0.0
    for low, high in zip(list(points)[:-1], list(points)[1:], strict=True):
        steps = np.geomspace(low, high, 7)
        for start, end in itertools.pairwise(steps):
            if end * time < 1:
                part = integrate.quad(lambda f: 8 * level(f) * np.sin(np.pi * f * time) ** 2, start, end, **EXACT)[0]
            else:  # 8 L sin^2 = 4 L - 4 L cos(2 pi f t), the second with the weight that quadpack integrates exactly
                part = 4 * integrate.quad(level, start, end, **EXACT)[0]
                part -= 4 * integrate.quad(level, start, end, weight="cos", wvar=2 * np.pi * time, **EXACT)[0]
            total += part
    return float(np.sqrt(total))


def test_a_flat_floor_over_a_wide_band() -> None:
    # -120 dBc/Hz over 10 MHz for 1 us, many periods: variance 4 L B = 4.0e-5 rad^2
    (found,) = phase({1.0: -120.0, 1e7: -120.0}, [1e-6])
    assert found**2 == near(4.0e-5, rel=1e-3)
    (exact,) = phase({1.0: -120.0, 1e7: -120.0}, [1.00025e-6])  # sin(2 pi B t) is not zero here: its closed form
    bt = 2 * np.pi * 1e7 * 1.00025e-6
    assert exact**2 == near(4e-12 * 1e7 * (1 - np.sin(bt) / bt), rel=1e-5)


@pytest.mark.parametrize("time", [1e-9, 2e-8, 4e-7, 3e-6, 5e-5, 1e-3, 2e-2])
def test_sloped_levels_for_many_times(time: float) -> None:
    assert phase(DECIBELS, [time])[0] == near(by_quadrature(DECIBELS, time), rel=1e-3)


@pytest.mark.parametrize("slope", [-30.0, -20.0, -10.0, 10.0])
def test_a_straight_slope_in_decibels(slope: float) -> None:
    points = {1e3: -90.0, 1e6: -90.0 + 3 * slope}
    for time in (1e-8, 1e-5, 1e-3):
        assert phase(points, [time])[0] == near(by_quadrature(points, time), rel=1.5e-3)


def test_very_short_times_are_quadratic_in_the_time() -> None:
    # 4 sin^2 -> (2 pi f t)^2: flat floor from f1 to f2 gives 2 L (2 pi t)^2 (f2^3 - f1^3)/3
    for time in (1e-15, 1e-12):
        (found,) = phase({1e3: -120.0, 1e6: -120.0}, [time])
        assert found == near(np.sqrt(2e-12 * (2 * np.pi * time) ** 2 * (1e18 - 1e9) / 3), rel=1e-3)


def test_the_phase_scales_with_the_frequency_over_the_carrier() -> None:
    (at_carrier,) = phase(DECIBELS, [1e-6])
    assert phase(DECIBELS, [1e-6], frequency=16e9)[0] == near(1.6 * at_carrier, rel=1e-12)
    # multiplying 10 MHz to 14 GHz raises the level by 20 log10(1400) = 62.92256 dB
    raised = {offset: level + 62.92256 for offset, level in DECIBELS.items()}
    low = phase(DECIBELS, [1e-6], frequency=14e9, carrier=10e6)[0]
    assert low == near(phase(raised, [1e-6], frequency=14e9, carrier=14e9)[0], rel=1e-6)


def test_points_may_stand_in_any_order_and_at_carriers_of_their_own() -> None:
    backwards = dict(reversed(DECIBELS.items()))
    assert phase(backwards, [1e-6]) == near(phase(DECIBELS, [1e-6]), rel=1e-12)
    mixed = phasenoise.source_phase(
        offset=row(1e3, 1e6), level=row(1e-12, 4e-12), carrier=row(5e9, 10e9), frequency=row(10e9), time=row(1e-6)
    )  # the same floor, stated at half the carrier a quarter as high
    assert mixed == near(phase({1e3: 10 * np.log10(4e-12), 1e6: 10 * np.log10(4e-12)}, [1e-6]), rel=1e-9)


def test_each_qubit_has_its_own_frequency_and_time() -> None:
    both = phasenoise.source_phase(
        offset=row(*DECIBELS), level=10 ** (row(*DECIBELS.values()) / 10), carrier=row(*[10e9] * 6),
        frequency=row(10e9, 20e9), time=row(1e-6, 1e-4),
    )  # fmt: skip
    assert list(both) == near([phase(DECIBELS, [1e-6])[0], 2 * phase(DECIBELS, [1e-4])[0]], rel=1e-12)


def test_allowed_phase_gives_its_sequence_error_back() -> None:
    # average infidelity of a Gaussian phase: (1 - exp(-phi^2/2))/3
    allowed = float(phasenoise.allowed_source_phase(source_share=row(1.0), allowed_sequence_error=row(0.1))[0])
    assert -np.expm1(-(allowed**2) / 2) / 3 == near(0.1)
    share = phasenoise.allowed_source_phase(source_share=row(0.3), allowed_sequence_error=row(0.1))
    assert float(share[0]) == near(0.3 * allowed)
