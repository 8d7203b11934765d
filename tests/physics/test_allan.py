"""Allan deviation against the tables of NIST SP 1065, a reference library and its own definition."""

from __future__ import annotations

import warnings

import numpy as np
import pytest

from planner.physics import Array, allan
from tests.physics import near, row

with warnings.catch_warnings():  # deprecations inside the library's own imports
    warnings.simplefilter("ignore")
    import allantools  # type: ignore[import-untyped]

# C9. SP 1065 Table 30, data of NBS Monograph 140
NBS = row(892, 809, 823, 798, 671, 644, 883, 903, 677)


def thousand() -> Array:
    """C5. SP 1065 section 12.4: n <- 16807 n mod 2147483647 from 1234567890, which is the first datum."""
    numbers = [1234567890]
    while len(numbers) < 1000:
        numbers.append(16807 * numbers[-1] % 2147483647)
    return np.array(numbers) / 2147483647


def test_the_thousand_points_are_those_of_the_handbook() -> None:
    assert [round(value * 2147483647) for value in thousand()[1:4]] == [395529916, 1209410747, 633705974]
    assert thousand().mean() == near(0.4897745, rel=1e-6)


@pytest.mark.parametrize(("factor", "deviation"), [(1, 2.922319e-1), (10, 9.159953e-2), (100, 3.241343e-2)])
def test_thousand_points_of_the_handbook(factor: int, deviation: float) -> None:
    # C6 and C7. SP 1065 Table 31, row of the overlapping Allan deviation; at 1 it is the plain one
    assert allan.overlapping_deviation(frequency=thousand(), factor=factor) == near(deviation, rel=5e-7)


@pytest.mark.parametrize(("factor", "deviation"), [(1, 91.22945), (2, 85.95287)])
def test_nine_points_of_the_handbook(factor: int, deviation: float) -> None:
    assert allan.overlapping_deviation(frequency=NBS, factor=factor) == near(deviation, rel=1e-6)


@pytest.mark.parametrize(("factor", "deviation"), [(1, 2.922319e-1), (10, 9.965736e-2), (100, 3.897804e-2)])
def test_means_without_overlap_give_the_plain_deviation(factor: int, deviation: float) -> None:
    # C6. SP 1065 Table 31, row of the Allan deviation: the same formula on the means themselves
    means = thousand().reshape(-1, factor).mean(axis=1)
    assert allan.overlapping_deviation(frequency=means, factor=1) == near(deviation, rel=5e-7)


@pytest.mark.parametrize("factor", [1, 3, 17, 499])
def test_agrees_with_allantools(factor: int) -> None:
    _, deviations, _, _ = allantools.oadev(thousand(), rate=1.0, data_type="freq", taus=[factor])
    assert allan.overlapping_deviation(frequency=thousand(), factor=factor) == near(deviations[0], rel=1e-9)


def test_a_large_constant_offset_costs_no_digits() -> None:
    small = 1e-12 * thousand()
    alone = allan.overlapping_deviation(frequency=small, factor=10)
    assert allan.overlapping_deviation(frequency=small + 2.0**-20, factor=10) == near(alone, rel=1e-4)


def test_a_ramp_shows_its_slope_over_the_root_of_two() -> None:
    # SP 1065: linear drift D has sigma = D tau/sqrt(2)
    found = allan.overlapping_deviation(frequency=3e-15 * np.arange(1000.0), factor=20)
    assert found == near(3e-15 * 20 / np.sqrt(2), rel=1e-9)


@pytest.mark.parametrize("factor", [0, -1, 5])
def test_too_few_points_are_refused(factor: int) -> None:
    with pytest.raises(ValueError, match="9 frequencies"):
        allan.overlapping_deviation(frequency=NBS, factor=factor)
