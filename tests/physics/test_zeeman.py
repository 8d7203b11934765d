"""Larmor frequency, g-tensor, slopes, quantisation axis and search window."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import pytest
import scipy.constants as codata  # type: ignore[import-untyped]
from scipy.spatial.transform import Rotation  # type: ignore[import-untyped]

from planner.constants import BOHR_MAGNETON_HZ, MICRO_EV
from planner.physics import Array, zeeman

from . import assert_axes_agree, assert_axes_agree_together, near, qutip, row

RANDOM = np.random.default_rng(20)


@dataclass(frozen=True, slots=True, kw_only=True)
class Spin:
    """One qubit in a field, everything that its frequency depends on."""

    g: Array
    g_euler: Array
    field: float
    elevation: float
    azimuth: float
    local_field: Array

    def vectors(self) -> tuple[Array, Array, Array]:
        """Tensor, field at the dot and precession vector, with one row."""
        sent = zeeman.set_vector(field=row(self.field), elevation=row(self.elevation), azimuth=row(self.azimuth))
        dot = zeeman.field_at_dot(set_vector=sent, local_field=self.local_field[None])
        tensor = zeeman.g_tensor(g=self.g[None], g_euler=self.g_euler[None])
        return tensor, dot, zeeman.precession_vector(g_tensor=tensor, field_at_dot=dot)

    def response(self) -> Array:
        tensor, _, precession = self.vectors()
        return zeeman.field_response(g_tensor=tensor, precession_vector=precession)

    def frequency(self) -> float:
        _, dot, precession = self.vectors()
        size = zeeman.field_size(field_at_dot=dot)
        g = zeeman.effective_g(precession_vector=precession, field_size=size)
        return float(zeeman.larmor_frequency(g=g, field=size)[0])


def spin(**changes: Any) -> Spin:
    start: dict[str, Any] = {
        "g": row(0.15, 0.25, 11.5),
        "g_euler": np.radians([30, 2, 10]),
        "field": 0.1,
        "elevation": np.radians(2),
        "azimuth": 0.3,
        "local_field": row(0.002, -0.001, 0.0005),
    }
    return Spin(**(start | changes))


def random_spin() -> Spin:
    return Spin(
        g=RANDOM.uniform(-3, 12, 3),
        g_euler=RANDOM.uniform(-3, 3, 3),
        field=float(RANDOM.uniform(0.01, 1)),
        elevation=float(RANDOM.uniform(-1.5, 1.5)),
        azimuth=float(RANDOM.uniform(-3, 3)),
        local_field=RANDOM.uniform(-0.1, 0.1, 3),
    )


def hamiltonian(one: Spin) -> qutip.Qobj:
    """(muB/2h) sigma.g.B in Hz, its tensor built by scipy's intrinsic ZYZ rotations."""
    axes = Rotation.from_euler("ZYZ", one.g_euler).as_matrix()
    direction = [
        np.cos(one.elevation) * np.cos(one.azimuth),
        np.cos(one.elevation) * np.sin(one.azimuth),
        np.sin(one.elevation),
    ]
    vector = axes @ np.diag(one.g) @ axes.T @ (one.field * np.array(direction) + one.local_field)
    return BOHR_MAGNETON_HZ / 2 * sum(b * sigma for b, sigma in zip(vector, paulis(), strict=True))


def paulis() -> tuple[qutip.Qobj, ...]:
    return qutip.sigmax(), qutip.sigmay(), qutip.sigmaz()


def derivative(change: str, value: float, step: float) -> float:
    """Central difference of the frequency of `spin()` with one of its numbers."""
    return (spin(**{change: value + step}).frequency() - spin(**{change: value - step}).frequency()) / (2 * step)


def component_derivatives(change: str, step: float, **start: Any) -> Array:
    """Central differences with the three components of one of its vectors."""
    one = spin(**start)
    vector = getattr(one, change)
    moved = [
        [replace(one, **{change: vector + sign * step * unit}).frequency() for sign in (1, -1)] for unit in np.eye(3)
    ]
    return np.array([(up - down) / (2 * step) for up, down in moved])


def test_g_two_at_one_tesla_is_28_gigahertz_and_116_micro_electronvolt() -> None:
    # common practice at the bench: 28 GHz/T and 116 ueV/T for g = 2
    frequency = zeeman.larmor_frequency(g=row(2.0), field=row(1.0))
    assert frequency[0] == near(28e9, rel=1e-3)
    assert zeeman.zeeman_energy(frequency=frequency)[0] / MICRO_EV == near(116, rel=3e-3)


def test_the_free_electron_has_the_codata_gyromagnetic_ratio() -> None:
    # C2: CODATA 2022 'electron gyromag. ratio in MHz/T', 28 024.951 3861(87)
    printed = codata.physical_constants["electron gyromag. ratio in MHz/T"][0] * 1e6
    assert zeeman.larmor_frequency(g=row(2.00231930436092), field=row(1.0))[0] == near(printed, rel=1e-9)
    assert printed == near(28.0249513861e9, rel=1e-12)


def test_published_resonances_lie_where_a_micromagnet_adds_about_a_tenth_of_a_tesla() -> None:
    # C15: Takeda et al., Nat. Nanotechnol. 16, 965 (2021): 17.78915, 18.2245, 18.7477 GHz, 435.4 and 523.2 MHz apart,
    # magnet at 0.5275 T; the total fields for g = 2 are computed from these.
    resonances = row(17.78915e9, 18.2245e9, 18.7477e9)
    spacing = zeeman.spacing(frequency=resonances, in_use=np.ones(3))
    assert spacing == near([435.4e6, 435.4e6, 523.2e6], abs=0.1e6)
    totals = row(0.635497, 0.651050, 0.669740)
    assert zeeman.larmor_frequency(g=row(2.0), field=totals) == near(resonances, rel=1e-5)
    assert np.all((totals - 0.5275 > 0.1) & (totals - 0.5275 < 0.15))


@pytest.mark.parametrize(
    ("g", "field", "gigahertz", "micro_ev"),
    [  # by = regression
        (2.0, 1.0, 27.9924898, 115.767636),
        (1.9985, 0.5, 13.9857477, 57.8404051),
        (-0.44, 6.0, 36.9500866, 152.813279),
        (11.5, 0.02, 3.21913633, 13.3132781),
    ],
)
def test_scalar_rows(g: float, field: float, gigahertz: float, micro_ev: float) -> None:
    frequency = zeeman.larmor_frequency(g=row(g), field=row(field))
    assert frequency[0] == near(gigahertz * 1e9, rel=1e-8)
    assert zeeman.zeeman_energy(frequency=frequency)[0] == near(micro_ev * MICRO_EV, rel=1e-8)


@pytest.mark.parametrize(
    ("elevation", "azimuth", "megahertz", "per_degree"),
    [  # by = regression; polar tilt = -elevation
        (0, 0, 559.516683, -244.0492),
        (2, 0, 1083.32365, -270.9636),
        (0, 120, 346.513367, -0.0235549),
        (45, 20, 11766.6619, -191.6374),
    ],
)
def test_tensor_rows(elevation: float, azimuth: float, megahertz: float, per_degree: float) -> None:
    one = spin(elevation=np.radians(elevation), azimuth=np.radians(azimuth), local_field=np.zeros(3))
    angles = {"elevation": row(one.elevation), "azimuth": row(one.azimuth)}
    slope = zeeman.elevation_slope(field_response=one.response(), field=row(one.field), **angles)[0]
    assert one.frequency() == near(megahertz * 1e6, rel=1e-8)
    assert -slope * np.pi / 180 == near(per_degree * 1e6, rel=3e-6)


@pytest.mark.parametrize("one", [random_spin() for _ in range(20)])
def test_frequency_is_the_splitting_of_the_hamiltonian(one: Spin) -> None:
    low, high = hamiltonian(one).eigenenergies()
    assert one.frequency() == near(high - low, rel=1e-10)


@pytest.mark.parametrize("one", [random_spin() for _ in range(20)])
def test_axis_share_is_the_spin_of_the_eigenstate_along_the_heavy_axis(one: Spin) -> None:
    _, states = hamiltonian(one).eigenstates()
    spins = np.array([qutip.expect(sigma, states[1]) for sigma in paulis()])
    heavy = Rotation.from_euler("ZYZ", one.g_euler).as_matrix()[:, np.argmax(np.abs(one.g))]
    assert share(one) == near(abs(spins @ heavy), abs=1e-9)


@pytest.mark.parametrize(("polar_degrees", "expected"), [(88.0, 0.895134), (89.5, 0.448497), (90.0, 0.0)])  # regression
def test_a_hole_stays_on_its_heavy_axis_until_close_to_the_plane(polar_degrees: float, expected: float) -> None:
    one = spin(
        g=row(0.2, 0.2, 11.5), g_euler=np.zeros(3), elevation=np.radians(90 - polar_degrees), local_field=np.zeros(3)
    )
    assert share(one) == near(expected, abs=1e-6)


def share(one: Spin, is_hole: float = 1.0) -> float:
    _, _, precession = one.vectors()
    return float(
        zeeman.heavy_axis_share(
            g=one.g[None], g_euler=one.g_euler[None], precession_vector=precession, is_hole=row(is_hole)
        )[0]
    )


def test_a_scalar_g_has_the_chip_normal_as_axis_for_an_electron_and_none_for_a_hole() -> None:
    one = spin(g=row(2, 2, 2), elevation=np.radians(30), local_field=np.zeros(3))
    assert share(one, is_hole=0.0) == near(0.5)
    assert np.isnan(share(one, is_hole=1.0))


def test_a_spin_that_sees_no_field_or_has_no_g_along_it_does_not_precess() -> None:
    cancelled = spin(elevation=0.0, azimuth=0.0, local_field=row(-0.1, 0, 0))
    flat = spin(g=row(0, 0, 11.5), g_euler=np.zeros(3), elevation=0.0, local_field=np.zeros(3))
    for one in (cancelled, flat):
        assert np.isnan(one.vectors()[2]).all()


def test_slopes_are_the_derivatives_of_the_frequency_with_local_fields_left_alone() -> None:
    one = spin()
    angles = {"elevation": row(one.elevation), "azimuth": row(one.azimuth)}
    response = one.response()
    assert zeeman.field_slope(field_response=response, **angles)[0] == near(
        derivative("field", one.field, 1e-6), rel=1e-6
    )
    turned = {"field_response": response, "field": row(one.field), **angles}
    assert zeeman.elevation_slope(**turned)[0] == near(derivative("elevation", one.elevation, 1e-6), rel=1e-6)
    assert zeeman.azimuth_slope(**turned)[0] == near(derivative("azimuth", one.azimuth, 1e-6), rel=1e-6)
    assert response[0] == near(component_derivatives("local_field", 1e-7), rel=1e-6)


def tensor_window(one: Spin, g_uncertainty: Array, euler_uncertainty: Array) -> float:
    _, dot, precession = one.vectors()
    return float(
        zeeman.tensor_uncertainty(
            g=one.g[None],
            g_uncertainty=g_uncertainty[None],
            g_euler=one.g_euler[None],
            euler_uncertainty=euler_uncertainty[None],
            field_at_dot=dot,
            precession_vector=precession,
        )[0]
    )


def test_uncertain_principal_values_move_the_line_as_their_derivatives_say() -> None:
    tolerance = row(0.01, 0.02, 0.3)
    expected = np.linalg.norm(component_derivatives("g", 1e-6) * tolerance)
    assert tensor_window(spin(), tolerance, np.zeros(3)) == near(expected, rel=1e-6)


@pytest.mark.parametrize("g_euler", [np.radians([30, 2, 10]), np.radians([200, 70, -40]), np.zeros(3)])
def test_uncertain_euler_angles_move_the_line_as_their_derivatives_say(g_euler: Array) -> None:
    tolerance = np.radians([1.0, 0.5, 2.0])
    expected = np.linalg.norm(component_derivatives("g_euler", 1e-6, g_euler=g_euler) * tolerance)
    assert tensor_window(spin(g_euler=g_euler), np.zeros(3), tolerance) == near(expected, rel=1e-6)


def test_principal_values_and_angles_are_independent() -> None:
    values, angles = row(0.01, 0.02, 0.3), np.radians([1.0, 0.5, 2.0])
    apart = tensor_window(spin(), values, np.zeros(3)), tensor_window(spin(), np.zeros(3), angles)
    assert tensor_window(spin(), values, angles) == near(np.hypot(*apart), rel=1e-12)


def test_a_scalar_g_is_one_number_not_three_independent_ones() -> None:
    one = spin(g=row(2, 2, 2))
    expected = one.frequency() / 2 * 0.01  # f = g muB B/h, so df = f dg/g, whatever the direction of the field
    assert tensor_window(one, row(0.01, 0.01, 0.01), np.radians([5.0, 5.0, 5.0])) == near(expected, rel=1e-9)


def test_field_components_are_independent() -> None:
    response, uncertainty = spin().response(), row(2e-3, 5e-4, 1e-4)
    expected = np.linalg.norm(component_derivatives("local_field", 1e-7) * uncertainty)
    assert zeeman.vector_uncertainty(field_response=response, uncertainty=uncertainty)[0] == near(expected, rel=1e-6)


def test_search_window_is_the_root_sum_square_of_its_six_terms() -> None:
    window = zeeman.search_window(
        remanence=row(1.0),
        local=row(2.0),
        tensor=row(3.0),
        field_slope=row(-2.0),
        field_uncertainty=row(2.0),
        elevation_slope=row(-10.0),
        elevation_uncertainty=row(0.5),
        azimuth_slope=row(3.0),
        azimuth_uncertainty=row(2.0),
    )
    assert window[0] == near(np.sqrt(1 + 4 + 9 + 16 + 25 + 36))


@pytest.mark.parametrize("in_use", [(1, 1, 1, 1, 1), (1, 0, 1, 1, 0), (0, 0, 1, 0, 0), (0, 0, 0, 0, 0)])
@pytest.mark.parametrize("frequency", [(5.0, 1.0, 9.0, 2.0, 7.0), (3.0, 3.0, 1.0, 3.0, 8.0)])
def test_spacing_is_the_distance_to_the_nearest_other_qubit_in_use(
    frequency: tuple[float, ...], in_use: tuple[int, ...]
) -> None:
    expected = [
        min((abs(f - other) for k, other in enumerate(frequency) if k != i and in_use[k]), default=np.nan)
        for i, f in enumerate(frequency)
    ]
    np.testing.assert_array_equal(zeeman.spacing(frequency=row(*frequency), in_use=row(*in_use)), expected)


def test_axes_of_studies() -> None:
    field, elevation, azimuth = row(0.1, 0.2, 0.3, 0.4), row(0.1, -0.2, 0.0, 0.4), row(0.3, 0.5, -0.7, 1.0)
    g, euler = RANDOM.uniform(0.1, 3, (4, 3)), RANDOM.uniform(-1, 1, (4, 3))
    tensor, vector = zeeman.g_tensor(g=g, g_euler=euler), RANDOM.uniform(0.1, 1, (4, 3))
    angles = {"elevation": elevation, "azimuth": azimuth}
    assert_axes_agree(zeeman.set_vector, field=field, **angles)
    assert_axes_agree(zeeman.field_at_dot, set_vector=vector[:1], local_field=vector)
    assert_axes_agree(zeeman.field_size, field_at_dot=vector)
    assert_axes_agree(zeeman.g_tensor, g=g, g_euler=euler)
    assert_axes_agree(zeeman.precession_vector, g_tensor=tensor, field_at_dot=vector)
    assert_axes_agree(zeeman.effective_g, precession_vector=vector, field_size=field)
    assert_axes_agree(zeeman.larmor_frequency, g=elevation, field=field)
    assert_axes_agree(zeeman.zeeman_energy, frequency=field)
    assert_axes_agree(zeeman.field_response, g_tensor=tensor, precession_vector=vector)
    assert_axes_agree(zeeman.field_slope, field_response=vector, **angles)
    assert_axes_agree(zeeman.elevation_slope, field_response=vector, field=field[:1], **angles)
    assert_axes_agree(zeeman.azimuth_slope, field_response=vector, field=field[:1], **angles)


def test_axes_of_studies_of_the_heavy_axis() -> None:
    g, euler, vector = RANDOM.uniform(0.1, 3, (4, 3)), RANDOM.uniform(-1, 1, (4, 3)), RANDOM.uniform(0.1, 1, (4, 3))
    assert_axes_agree(zeeman.heavy_axis_share, g=g, g_euler=euler, precession_vector=vector, is_hole=np.ones(1))


def test_axes_of_studies_of_spacing_and_window() -> None:
    g, euler, vector = RANDOM.uniform(0.1, 3, (4, 3)), RANDOM.uniform(-1, 1, (4, 3)), RANDOM.uniform(0.1, 1, (4, 3))
    some, in_use = row(4, 1, 7, 2), row(1, 1, 0, 1)
    assert_axes_agree_together(zeeman.spacing, frequency=some, in_use=in_use)
    assert_axes_agree(zeeman.vector_uncertainty, field_response=vector, uncertainty=vector[:1])
    assert_axes_agree(
        zeeman.tensor_uncertainty,
        g=g,
        g_uncertainty=g / 10,
        g_euler=euler,
        euler_uncertainty=euler / 10,
        field_at_dot=vector,
        precession_vector=vector,
    )
    assert_axes_agree(
        zeeman.search_window,
        remanence=some,
        local=some,
        tensor=some,
        field_slope=some,
        field_uncertainty=some[:1],
        elevation_slope=some,
        elevation_uncertainty=some[:1],
        azimuth_slope=some,
        azimuth_uncertainty=some[:1],
    )
