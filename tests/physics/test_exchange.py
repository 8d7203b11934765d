"""Exchange gates against a qutip simulation of two spins.

H/h = J S1.S2 + D/2 (sigma_z1 - sigma_z2)/2: exchange splits singlet and triplets by J, and a difference D of the two
frequencies couples singlet and unpolarised triplet by D/2. Fidelities are qutip's average over all states of both qubits.
"""

from __future__ import annotations

import itertools
from typing import Any

import numpy as np
import pytest
from scipy import integrate  # type: ignore[import-untyped]

from planner.physics import Array, exchange
from tests.physics import near, qutip, row

J, TIME = 5e6, 100e-9  # half a period: a swap


def _pauli(make: Any) -> tuple[Any, Any]:
    return qutip.tensor(make(), qutip.qeye(2)), qutip.tensor(qutip.qeye(2), make())


PRODUCTS = sum((left * right for left, right in map(_pauli, (qutip.sigmax, qutip.sigmay, qutip.sigmaz))), 0) / 4
HALF_DIFFERENCE = (_pauli(qutip.sigmaz)[0] - _pauli(qutip.sigmaz)[1]) / 4


def propagator(strength: float, difference: float, time: float) -> Any:
    """Evolution of both spins, strengths in Hz."""
    return (-2j * np.pi * time * (strength * PRODUCTS + difference * HALF_DIFFERENCE)).expm()


def infidelity(strength: float, difference: float, time: float, ideal: Any) -> float:
    return 1 - float(qutip.average_gate_fidelity(propagator(strength, difference, time), ideal))


def gaussian(sigma: float, count: int = 35) -> tuple[Array, Array]:
    """Equidistant points of a normal distribution out to seven deviations (the plain sum converges fast)."""
    values = np.linspace(-7, 7, count)
    weights = np.exp(-(values**2) / 2)
    return sigma * values, weights / weights.sum()


def tilted(strength: float, sigma: float, time: float) -> float:
    """Simulated infidelity, averaged over Gaussian differences of the frequencies."""
    ideal = propagator(strength, 0.0, time)
    values, weights = gaussian(sigma)
    return float(sum(w * infidelity(strength, d, time, ideal) for d, w in zip(values, weights, strict=True)))


def error(noise: float, difference: float, *, strength: float = J, time: float = TIME, lowest: float = 1e-3) -> float:
    return float(
        exchange.exchange_gate_error(
            exchange=row(strength), exchange_noise=row(noise), gate_time=row(time), lowest=row(lowest),
            difference=row(difference),
        )[0]
    )  # fmt: skip


def phase_rms(noise: float, time: float, lowest: float) -> float:
    """2 pi t times the rms of 1/f noise seen through a wait: integral of A^2/f sinc^2(f t) from the lowest frequency."""

    def density(log_f: float) -> float:
        return float(np.sinc(np.exp(log_f) * time) ** 2)

    turns = [np.log(lowest), *np.log(np.arange(1, 400) / time)]
    pieces = (integrate.quad(density, a, b, epsrel=1e-10)[0] for a, b in itertools.pairwise(turns))
    return 2 * np.pi * time * noise * float(np.sqrt(sum(pieces)))


@pytest.mark.parametrize(("sigma", "time"), [(50e3, 100e-9), (2e6, 50e-9), (1e6, 1e-6)])
def test_noise_of_the_frequency_difference(sigma: float, time: float) -> None:
    assert error(0.0, sigma, time=time) == near(tilted(J, sigma, time), rel=1e-7)


def test_a_single_frequency_difference_squared_for_small_ones() -> None:
    # swap, small D: the tilt D/J rotates the axis; both terms of second order, simulated for one D at a time
    one = infidelity(J, 1e4, TIME, propagator(J, 0.0, TIME))
    assert error(0.0, 1e4) == near(one, rel=1e-3)  # the average of D^2 is sigma^2


def test_noise_of_the_exchange() -> None:
    # amplitudes from hardly any phase to about a radian; the phase by quadrature, the gate by simulation
    for amplitude in (2e3, 50e3, 400e3):
        rms = phase_rms(amplitude, TIME, 1e-3)
        ideal = propagator(J, 0.0, TIME)
        phases, weights = gaussian(rms, 17)
        simulated = sum(
            w * infidelity(J + p / (2 * np.pi * TIME), 0.0, TIME, ideal) for p, w in zip(phases, weights, strict=True)
        )
        assert error(amplitude, 0.0) == near(float(simulated), rel=1e-5)


def test_both_add_while_they_are_small() -> None:
    amplitude, sigma = 20e3, 150e3
    ideal = propagator(J, 0.0, TIME)
    phases, outer = gaussian(phase_rms(amplitude, TIME, 1e-3), 11)
    values, inner = gaussian(sigma, 11)
    both = sum(
        w * v * infidelity(J + p / (2 * np.pi * TIME), d, TIME, ideal)
        for p, w in zip(phases, outer, strict=True)
        for d, v in zip(values, inner, strict=True)
    )
    assert error(amplitude, sigma) == near(error(amplitude, 0.0) + error(0.0, sigma), rel=1e-12)
    assert error(amplitude, sigma) == near(float(both), rel=0.01)


def test_a_quiet_pair_errs_nothing() -> None:
    assert error(0.0, 0.0) == pytest.approx(0.0, abs=1e-15)


def test_difference_noise_is_that_of_the_pairs_two_qubits() -> None:
    found = exchange.difference_noise(noise=row(3, 4, 12), first=row(0, 1, np.nan), second=row(1, 2, 0))
    np.testing.assert_allclose(found, [5.0, np.sqrt(160.0), np.nan])  # by hand


def test_phase_of_residual_exchange() -> None:
    # the simulated phase between singlet and triplet after the wait
    turned = propagator(10e3, 0.0, 4e-6)
    singlet = qutip.singlet_state()
    triplet = qutip.basis([2, 2], [0, 0])
    amplitudes = [complex(state.dag() * turned * state) for state in (singlet, triplet)]
    simulated = float(np.angle(amplitudes[0] / amplitudes[1]))
    assert float(exchange.idle_exchange_phase(residual=row(10e3), wait=row(4e-6))[0]) == near(simulated, rel=1e-9)


def test_share_of_the_sequence_is_that_of_the_worst_pair_of_each_qubit() -> None:
    share = exchange.exchange_share(
        error=row(1e-3, 4e-3), first=row(0, 1), second=row(1, 2), gates=row(10), frequency=row(1, 1, 1, 1)
    )
    # Nielsen 2002: a depolarising channel of strength p costs p (d - 1)/d on average, 3p/4 for a pair, p/2 for one qubit
    expected = [(1 - (1 - 4 * e / 3) ** 10) / 2 for e in (1e-3, 4e-3, 4e-3, 0.0)]
    np.testing.assert_allclose(share, expected, rtol=1e-12)


def test_no_exchange_gates_no_share_and_an_unknown_pair_only_hurts_its_own_qubits() -> None:
    pairs = {"first": row(0), "second": row(1), "frequency": row(1, 1, 1)}
    np.testing.assert_array_equal(exchange.exchange_share(error=row(np.nan), gates=row(0), **pairs), [0, 0, 0])
    found = exchange.exchange_share(error=row(np.nan), gates=row(5), **pairs)
    np.testing.assert_array_equal(np.isnan(found), [True, True, False])


def test_errors_compose_and_what_is_left_undoes_it() -> None:
    both = exchange.composed_error(single=row(0.02), exchange=row(0.05))
    assert float(both[0]) == near((1 - 0.96 * 0.90) / 2)  # polarisations multiply
    left = exchange.error_left(allowed=both, exchange=row(0.05))
    assert float(left[0]) == near(0.02)
    np.testing.assert_array_equal(exchange.error_left(allowed=row(0.02), exchange=row(0.05)), [0.0])
