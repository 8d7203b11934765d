"""Exchange between two spins: error of an exchange gate, and the phase of what exchange is left when it is off."""

from __future__ import annotations

import numpy as np

from planner.declare import law
from planner.kinds import ANGLE, COUNT, FRACTION, FREQUENCY, FREQUENCY_NOISE, NUMBER, TIME
from planner.physics import Array
from planner.physics.dephasing import flicker_rms

_HERMITE_POINTS, _HERMITE_WEIGHTS = np.polynomial.hermite_e.hermegauss(40)
_WEIGHTS = _HERMITE_WEIGHTS / _HERMITE_WEIGHTS.sum()


@law(FREQUENCY, reference="jcgm100", place="5.1.2", noise=FREQUENCY, first=NUMBER, second=NUMBER)
def difference_noise(*, noise: Array, first: Array, second: Array) -> Array:
    """Slow rms of the difference of two qubits' frequencies, from independent noise of either.

    Formula: none; root-sum-square of the noise of the rows `first` and `second`.
    """
    return np.hypot(_of_row(noise, first), _of_row(noise, second))


@law(
    FRACTION,
    reference="pedersen2007",
    place="average fidelity of a unitary in four dimensions",
    exchange=FREQUENCY,
    exchange_noise=FREQUENCY_NOISE,
    gate_time=TIME,
    lowest=FREQUENCY,
    difference=FREQUENCY,
)
def exchange_gate_error(
    *, exchange: Array, exchange_noise: Array, gate_time: Array, lowest: Array, difference: Array
) -> Array:
    """Average infidelity of one exchange gate: 1/f noise of the exchange, and slow noise of the frequency difference.

    A phase p between singlet and triplets costs (3/10)(1 - cos p), averaged over Gaussian p with the rms of free 1/f noise
    over the gate. A frequency difference D turns singlet and unpolarised triplet about a tilted axis: with the overlap t of
    both evolutions in that plane the infidelity is (16 - (2 + t)^2)/20, averaged over Gaussian D (Coish and Loss, PRB 72,
    125337 (2005), for the plane). Both are small and add; noise common to both qubits turns the polarised triplets against each
    other and is not counted here.
    Formula: none; the two averages described above, the second by Gauss-Hermite.
    """
    phase = 2 * np.pi * gate_time * flicker_rms(amplitude=exchange_noise, lowest=lowest, time=gate_time)
    return -0.3 * np.expm1(-(phase**2) / 2) + _tilt_error(exchange, gate_time, difference)


@law(ANGLE, residual=FREQUENCY, wait=TIME)
def idle_exchange_phase(*, residual: Array, wait: Array) -> Array:
    """Phase between singlet and triplet by the exchange that is left when it is off, over the longest wait."""
    return 2 * np.pi * residual * wait


@law(
    FRACTION,
    reference="nielsen2002",
    place="composition of depolarised gates",
    error=FRACTION,
    first=NUMBER,
    second=NUMBER,
    gates=COUNT,
    frequency=FREQUENCY,
)
def exchange_share(*, error: Array, first: Array, second: Array, gates: Array, frequency: Array) -> Array:
    """Share of the sequence error that a qubit's exchange gates take, by its worst pair: (1 - (1 - 4e/3)^n)/2.

    A depolarised pair of average infidelity e (dimension 4, so 3/4 of the depolarised share) leaves either qubit
    depolarised by 4e/3; these compose over n gates like the qubit's own.
    Formula: none; e is the largest error of the pairs that hold the qubit, 0 where it is in none.
    """
    rows = np.arange(frequency.shape[-1])
    holds = (first[..., None, :] == rows[:, None]) | (second[..., None, :] == rows[:, None])
    worst = np.where(holds, error[..., None, :], 0.0).max(axis=-1, initial=0.0)
    kept = np.log1p(-np.minimum(4 * worst / 3, 1 - 1e-16))
    return np.where(gates > 0, -np.expm1(gates * kept) / 2, 0.0) + 0 * rows


@law(FRACTION, reference="nielsen2002", place="composition of depolarised gates", allowed=FRACTION, exchange=FRACTION)
def error_left(*, allowed: Array, exchange: Array) -> Array:
    """Sequence error that the exchange gates leave to the other gates; 0 where they take all of it.

    Formula: max((1 - (1 - 2 * allowed) / (1 - 2 * exchange)) / 2, 0)
    """
    return np.maximum((1 - (1 - 2 * allowed) / (1 - 2 * exchange)) / 2, 0.0)


@law(FRACTION, reference="nielsen2002", place="composition of depolarised gates", single=FRACTION, exchange=FRACTION)
def composed_error(*, single: Array, exchange: Array) -> Array:
    """Error of the sequence from that of its gates and that of its exchange gates."""
    return (1 - (1 - 2 * single) * (1 - 2 * exchange)) / 2


def _of_row(values: Array, row: Array) -> Array:
    """The values at these rows, nan where the row is none (a dead qubit)."""
    known = ~np.isnan(row)
    return np.where(known, values[..., np.where(known, row, 0).astype(int)], np.nan)


def _tilt_error(exchange: Array, time: Array, difference: Array) -> Array:
    detuned = np.expand_dims(difference, -1) * _HERMITE_POINTS
    tilted = np.hypot(exchange[..., None], detuned)
    with np.errstate(invalid="ignore", divide="ignore"):
        straight, turned = np.pi * exchange[..., None] * time[..., None], np.pi * tilted * time[..., None]
        overlap = 2 * (
            np.cos(straight) * np.cos(turned) + exchange[..., None] / tilted * np.sin(straight) * np.sin(turned)
        )
    return ((16 - (2 + overlap) ** 2) / 20 * _WEIGHTS).sum(axis=-1)
