"""Lines, stages and films against black bodies, published attenuations and the criterion that a film's field solves."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants  # type: ignore[import-untyped]

from planner.physics import Array, wiring
from tests.physics import near, row

LADDER = np.array([[100.0, 100.0, 100.0]])  # 20 dB at each of three stages
COLD = row(4.0, 0.1, 0.02)


def bose(frequency: float, temperature: float) -> float:
    return float(1 / np.expm1(constants.h * frequency / (constants.k * temperature)))


def photons(frequency: float, attenuation: Array = LADDER, temperature: Array = COLD, source: float = 300.0) -> float:
    found = wiring.thermal_photons(
        frequency=row(frequency), source_temperature=row(source), attenuation=attenuation, temperature=temperature
    )
    assert found.shape == (1,)
    return float(found[0])


@pytest.mark.parametrize(
    ("frequency", "occupation", "behind"),
    [(5e9, 1249.697214, 3.845169e-3), (6e9, 1041.331036, 2.957264e-3), (14e9, 445.999168, 9.992348e-4)],
)
def test_photons_behind_attenuators(frequency: float, occupation: float, behind: float) -> None:
    assert photons(frequency, np.ones((1, 3))) == near(occupation, rel=1e-9)  # by = regression
    assert photons(frequency) == near(behind, rel=1e-6)  # by = regression
    assert photons(frequency, np.ones((1, 3))) == near(bose(frequency, 300.0), rel=1e-12)  # scipy's constants


def test_sixty_decibels_leave_a_thousandth_of_a_photon() -> None:
    # Krinner et al., EPJ Quantum Technol. 6, 2 (2019): about 60 dB bring 300 K at 6 GHz to 1e-3 (read second hand)
    decibels = np.linspace(55, 65, 4001)
    left = [photons(6e9, np.array([[10 ** (each / 10)]]), row(1e-3)) for each in decibels]
    needed = float(np.interp(-1e-3, -np.array(left), decibels))
    assert needed == pytest.approx(60.0, abs=0.5)
    assert needed == near(60.1759, rel=1e-5)  # by = regression


def attenuators(*decibels: float) -> Array:
    return 10 ** (np.array([decibels]) / 10)


@given(
    split=st.floats(0.1, 29.9), frequency=st.floats(1e8, 5e10), temperature=st.floats(0.01, 50.0),
    others=st.floats(0.0, 30.0),
)  # fmt: skip
def test_splitting_an_attenuator_at_one_temperature_changes_nothing(
    split: float, frequency: float, temperature: float, others: float
) -> None:
    whole = photons(frequency, attenuators(30.0, others), row(temperature, 0.02))
    parts = photons(frequency, attenuators(split, 30.0 - split, others), row(temperature, temperature, 0.02))
    assert parts == near(whole, rel=1e-9)


def test_everything_at_one_temperature_is_a_black_body_of_it() -> None:
    assert photons(8e9, temperature=row(2.0, 2.0, 2.0), source=2.0) == near(bose(8e9, 2.0), rel=1e-12)


def test_effective_temperature_inverts_the_black_body_and_is_classical_when_hot() -> None:
    for temperature in (0.02, 0.4, 300.0):
        found = wiring.effective_temperature(photons=row(bose(6e9, temperature)), frequency=row(6e9))
        assert float(found[0]) == near(temperature, rel=1e-11)
    hot = float(wiring.effective_temperature(photons=row(1e6), frequency=row(6e9))[0])
    assert hot == near((1e6 + 0.5) * constants.h * 6e9 / constants.k, rel=1e-9)  # Johnson limit with the half photon


def test_heat_of_a_drive() -> None:
    # -60 dBm at the device through 20/20/20 dB: 0.99 mW, 9.9 uW, 99 nW (P_out (A - 1), by hand)
    heat = wiring.stage_heat(
        device_power=row(1e-9), duty=row(1.0), count=row(1.0), attenuation=LADDER, cooling_power=row(np.nan, 1, 1)
    )
    np.testing.assert_allclose(heat, [0.99e-3, 9.9e-6, 99e-9], rtol=1e-12)


def test_heat_adds_over_lines_and_no_power_is_lost() -> None:
    attenuation = np.array([[4.0, 25.0], [10.0, 2.0], [np.nan, np.nan]])
    power, duty, count = row(1e-6, 3e-6, np.nan), row(0.5, 1.0, 1.0), row(1.0, 4.0, 30.0)
    heat = wiring.stage_heat(
        device_power=power, duty=duty, count=count, attenuation=attenuation, cooling_power=row(1, 1)
    )
    np.testing.assert_allclose(heat, [0.5e-6 * 25 * 3 + 12e-6 * 2 * 9, 0.5e-6 * 24 + 12e-6 * 1])  # by hand
    entered = 0.5e-6 * 100 + 12e-6 * 20
    assert heat.sum() == near(entered - 0.5e-6 - 12e-6)  # what goes in and does not come out


def test_a_driven_line_without_attenuation_is_unknown() -> None:
    heat = wiring.stage_heat(
        device_power=row(1e-6), duty=row(1), count=row(1), attenuation=np.array([[np.nan]]), cooling_power=row(1)
    )
    assert np.isnan(heat).all()


def test_power_of_the_source_and_its_amplitude() -> None:
    needed = wiring.source_power(device_power=row(1e-9), attenuation=LADDER, cable_loss=row(10.0))
    np.testing.assert_allclose(needed, [1e-2])  # -60 dBm + 60 dB + 10 dB = 10 dBm
    amplitude = wiring.drive_amplitude(available=row(10**1.6 * 1e-3), needed=row(10**1.1 * 1e-3))
    assert float(amplitude[0]) == near(10**0.25)  # 16 dBm for 11 dBm: 5 dB of power, 1.78 in amplitude
    np.testing.assert_array_equal(wiring.unity(needed=needed), [1.0])


def film(elevation: float, uncertainty: float, *, be_normal: bool = False) -> float:
    found = wiring.film_critical_field(
        field=row(0.3), elevation=row(np.radians(elevation)), uncertainty=row(np.radians(uncertainty)),
        in_plane=row(2.0), normal=row(0.1), be_normal=row(float(be_normal)),
    )  # fmt: skip
    return float(found[0])


@pytest.mark.parametrize("elevation", [-90.0, -30.0, -0.5, 0.0, 0.2, 5.0, 45.0, 89.0])
def test_a_films_field_fulfils_the_thin_film_criterion(elevation: float) -> None:
    # Tinkham (1963), angular dependence of a thin film: |B sin|/Bn + (B cos/Bp)^2 = 1
    field, angle = film(elevation, 0.0), np.radians(elevation)
    assert abs(field * np.sin(angle)) / 0.1 + (field * np.cos(angle) / 2.0) ** 2 == near(1.0, rel=1e-12)


def test_a_film_in_its_plane_and_along_its_normal() -> None:
    assert film(0.0, 0.0) == near(2.0)
    assert film(90.0, 0.0) == near(0.1)


def test_the_worst_end_of_the_elevation_counts() -> None:
    assert film(-0.5, 0.15) == near(film(-0.65, 0.0))
    assert film(0.5, 0.15) == near(film(0.65, 0.0))
    assert film(-0.5, 0.15, be_normal=True) == near(film(-0.35, 0.0))
    assert film(0.1, 0.3, be_normal=True) == near(2.0)  # the plane itself lies within the tolerance
    assert film(0.1, 0.3) == near(film(0.4, 0.0))


def test_sides_of_a_parts_bound() -> None:
    sides = {"field": row(0.3), "critical": row(2.0, 0.1), "be_normal": row(0, 1)}
    np.testing.assert_array_equal(wiring.part_allowed(**sides), [2.0, 0.3])
    np.testing.assert_array_equal(wiring.part_expected(**sides), [0.3, 0.1])
    judged = wiring.part_is_judged(superconduct=row(1, 0, 0), be_normal=row(0, 1, 0))
    np.testing.assert_array_equal(judged, [1.0, 1.0, np.nan])


def test_field_along_an_axis_of_any_length_and_sign() -> None:
    found = wiring.field_along(set_vector=np.array([[0.3, 0.0, -0.4]]), axis=np.array([[0.0, 0.0, 7.0]]))
    np.testing.assert_allclose(found, [0.4])


def test_the_lowest_frequency_in_use_ignores_spares() -> None:
    np.testing.assert_array_equal(wiring.lowest_in_use(frequency=row(3, 1, 2), in_use=row(1, 0, 1)), [2.0])
    assert wiring.power_left(cooling_power=row(12e-6), base_load=row(3e-6)) == near([9e-6])


@pytest.mark.parametrize("ratio", [1e-4, 1e-2])
def test_a_hot_source_gives_johnson_noise(ratio: float) -> None:
    # textbook: k T/(h f) photons a mode where h f << k T, less half a photon, and next h f/(12 k T)
    found = photons(ratio * constants.k * 4.0 / constants.h, np.ones((1, 3)), source=4.0)
    assert found == near(1 / ratio - 0.5 + ratio / 12, rel=1e-9)


@pytest.mark.parametrize("ratio", [15.0, 40.0])
def test_a_cold_source_gives_a_boltzmann_factor(ratio: float) -> None:
    # textbook (Wien): exp(-h f/(k T)) photons where h f >> k T
    found = photons(ratio * constants.k * 0.02 / constants.h, np.ones((1, 3)), source=0.02)
    assert found == near(np.exp(-ratio), rel=1e-6)


def pad(decibels: float) -> tuple[float, float]:
    """Series arms and shunt of a matched 50 ohm T pad: Z (k - 1)/(k + 1) and 2 Z k/(k^2 - 1), k its voltage ratio."""
    k = 10 ** (decibels / 20)
    return 50 * (k - 1) / (k + 1), 100 * k / (k**2 - 1)


@pytest.mark.parametrize(("decibels", "series", "shunt"), [(3, 8.55, 141.9), (10, 25.97, 35.14), (20, 40.91, 10.10)])
def test_resistors_of_the_pads_are_those_of_handbooks(decibels: float, series: float, shunt: float) -> None:
    assert pad(decibels) == near((series, shunt), rel=1e-3)  # resistor tables of T attenuators, from memory


def test_matched_pads_in_a_chain_are_warmed_as_the_law_says() -> None:
    # Kirchhoff from the load backwards: 1 V at 50 ohm behind 20, 10 and 3 dB; what each pad takes is its heat
    volts, amperes, taken = 1.0, 1 / 50, []
    for decibels in (3, 10, 20):
        series, shunt = pad(decibels)
        leaving = volts * amperes
        middle = volts + series * amperes
        amperes += middle / shunt
        volts = middle + series * amperes
        assert volts / amperes == near(50.0, rel=1e-12)  # the dc resistance stays that of the line
        taken.append(volts * amperes - leaving)
    heat = wiring.stage_heat(
        device_power=row(1 / 50),
        duty=row(1),
        count=row(1),
        attenuation=attenuators(20, 10, 3),
        cooling_power=row(1, 1, 1),
    )
    np.testing.assert_allclose(heat, taken[::-1], rtol=1e-12)
    needed = wiring.source_power(device_power=row(1 / 50), attenuation=attenuators(20, 10, 3), cable_loss=row(1))
    assert float(needed[0]) == near(volts * amperes, rel=1e-12)
