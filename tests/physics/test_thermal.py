"""Thermal populations, readout tails, blockade and the valley."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.constants as codata  # type: ignore[import-untyped]
from scipy.special import expit  # type: ignore[import-untyped]

from planner.constants import BOLTZMANN, MICRO_EV, PLANCK
from planner.physics import thermal, zeeman

from . import assert_axes_agree, assert_axes_agree_together, near, row


@pytest.mark.parametrize(
    ("frequency", "temperature", "ratio"),
    [  # by = regression
        (1e9, 50e-3, 0.959848615),
        (18e9, 100e-3, 8.638637532),
    ],
)
def test_ratio(frequency: float, temperature: float, ratio: float) -> None:
    found = thermal.thermal_ratio(frequency=row(frequency), temperature=row(temperature))[0]
    assert found == near(ratio, rel=1e-9)
    # scipy: 'hertz-kelvin relationship' is h/k
    assert found == near(frequency * codata.physical_constants["hertz-kelvin relationship"][0] / temperature, rel=1e-12)


def test_polarisation_and_tail_of_the_worked_rows() -> None:  # by = regression
    assert 1 - 2 * thermal.excited_share(ratio=row(0.959848615))[0] == near(0.446182988, rel=1e-8)
    assert thermal.tunnelling_error(ratio=row(8.638637532))[0] == near(0.0131341453, rel=1e-8)


@pytest.mark.parametrize("ratio", [0.0, 1e-6, 0.3, 1.0, 5.0, 10.0])
def test_populations_are_the_logistic_function(ratio: float) -> None:
    assert thermal.excited_share(ratio=row(ratio))[0] == near(expit(-ratio), rel=1e-10)
    assert thermal.tunnelling_error(ratio=row(ratio))[0] == near(expit(-ratio / 2), rel=1e-10)


@pytest.mark.parametrize("ratio", [30.0, 48.0])  # 20 GHz at 32 and 20 mK
def test_small_populations_keep_their_digits(ratio: float) -> None:
    assert thermal.excited_share(ratio=row(ratio))[0] == near(expit(-ratio), rel=1e-10)


def test_a_ratio_of_ten_reads_with_seven_per_mille_of_error() -> None:
    # common practice: h f of ten k T for readout below one per cent
    assert thermal.tunnelling_error(ratio=row(10.0))[0] == near(0.007, rel=0.05)


def test_the_share_is_that_of_a_boltzmann_factor() -> None:
    ratio = row(2.3)
    share = thermal.excited_share(ratio=ratio)
    assert share / (1 - share) == near(np.exp(-ratio), rel=1e-12)


def test_relaxation_before_the_middle_of_the_readout_to_first_order() -> None:
    found = thermal.relaxation_during_readout(readout_time=row(10e-6), t1=row(80e-3))[0]
    assert found == near(1 - np.exp(-10e-6 / 2 / 80e-3), rel=1e-4)


def test_blockade_wants_five_k_t() -> None:
    # 100 mK is 8.617 ueV (CODATA 2022: k = 8.617 333 262e-5 eV/K)
    assert thermal.blockade_need(temperature=row(0.1))[0] / MICRO_EV == near(5 * 8.617333262, rel=1e-9)


@pytest.mark.parametrize(("valley_micro_ev", "tesla"), [(100.0, 0.8637993), (250.0, 2.1594982)])  # by = regression
def test_valley_distance_vanishes_at_the_hot_spot(valley_micro_ev: float, tesla: float) -> None:
    energy = zeeman.zeeman_energy(frequency=zeeman.larmor_frequency(g=row(2.0), field=row(tesla)))
    distance = thermal.valley_distance(energy=energy, valley_splitting=row(valley_micro_ev * MICRO_EV))
    assert distance[0] / MICRO_EV == near(0.0, abs=1e-4)


def test_published_kink_of_the_relaxation_rate() -> None:
    # second hand: 170 ueV of valley splitting, kink of the relaxation rate seen at 1.49 T with g = 2
    energy = zeeman.zeeman_energy(frequency=zeeman.larmor_frequency(g=row(2.0), field=row(1.49)))
    assert thermal.valley_distance(energy=energy, valley_splitting=row(170 * MICRO_EV))[0] < 0.02 * 170 * MICRO_EV


def test_the_smallest_counts_only_qubits_in_use() -> None:
    found = thermal.smallest_in_use(valley_splitting=row(3.0, 1.0, 2.0), in_use=row(1, 0, 1))
    np.testing.assert_array_equal(found, [2.0])
    assert np.isnan(thermal.smallest_in_use(valley_splitting=row(3.0, np.nan), in_use=row(1, 1)))[0]


def test_axes_of_studies() -> None:
    some = row(1.0, 2.0, 4.0)
    assert_axes_agree(thermal.thermal_ratio, frequency=some * 1e9, temperature=row(0.1))
    assert_axes_agree(thermal.excited_share, ratio=some)
    assert_axes_agree(thermal.tunnelling_error, ratio=some)
    assert_axes_agree(thermal.relaxation_during_readout, readout_time=row(1e-5), t1=some)
    assert_axes_agree(thermal.blockade_need, temperature=row(0.1))
    assert_axes_agree(thermal.valley_distance, energy=some * PLANCK, valley_splitting=row(BOLTZMANN))
    assert_axes_agree_together(thermal.smallest_in_use, valley_splitting=some, in_use=row(1, 1, 0))
