"""Constants against CODATA 2022 as scipy ships it, and as printed by NIST."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.constants as codata  # type: ignore[import-untyped]
from scipy.special import zeta  # type: ignore[import-untyped]

from planner import constants

from . import near


def value(name: str) -> float:
    return float(codata.physical_constants[name][0])


@pytest.mark.parametrize(
    ("ours", "name"),
    [
        (constants.PLANCK, "Planck constant"),
        (constants.BOLTZMANN, "Boltzmann constant"),
        (constants.ELEMENTARY_CHARGE, "elementary charge"),
        (constants.BOHR_MAGNETON, "Bohr magneton"),
        (constants.MICRO_EV * 1e6, "electron volt"),
    ],
)
def test_scipy_ships_the_same_codata_values(ours: float, name: str) -> None:
    assert ours == near(value(name), rel=1e-15)


def test_bohr_magneton_in_hertz_is_the_printed_one() -> None:
    # C1: CODATA 2022 (NIST SP 961) prints 1.399 624 491 71(44)e10 Hz/T
    assert near(13.9962449171e9, rel=5e-10) == constants.BOHR_MAGNETON_HZ


def test_temperature_equivalents_are_the_printed_ones() -> None:
    # C3: CODATA 2022 prints k/h = 2.083 661 912...e10 Hz/K (exact) and muB/k = 0.671 713 814 72(21) K/T
    assert near(20.836619123e9, rel=1e-9) == constants.BOLTZMANN / constants.PLANCK
    assert near(0.67171381472, rel=1e-9) == constants.BOHR_MAGNETON / constants.BOLTZMANN


def test_one_micro_electronvolt_is_242_megahertz() -> None:
    # scipy: 'electron volt-hertz relationship'
    assert near(1e-6 * value("electron volt-hertz relationship"), rel=1e-14) == constants.MICRO_EV / constants.PLANCK


def test_mathematical_constants() -> None:
    assert near(float(np.euler_gamma), rel=1e-15) == constants.EULER_GAMMA
    assert near(float(zeta(3)), rel=1e-15) == constants.APERY
