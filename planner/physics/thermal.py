"""Temperature against the Zeeman energy, and the valley."""

from __future__ import annotations

import numpy as np

from planner.constants import BOLTZMANN, PLANCK
from planner.declare import law
from planner.kinds import ENERGY, FRACTION, FREQUENCY, NUMBER, TEMPERATURE, TIME
from planner.physics import Array


@law(
    NUMBER, reference="codata2022", place="Planck and Boltzmann constants", frequency=FREQUENCY, temperature=TEMPERATURE
)
def thermal_ratio(*, frequency: Array, temperature: Array) -> Array:
    """x = h f / (k T) with the electron temperature."""
    return PLANCK * frequency / (BOLTZMANN * temperature)


@law(FRACTION, reference="boltzmann", place="two-level population", ratio=NUMBER)
def excited_share(*, ratio: Array) -> Array:
    """Population of the upper level in equilibrium, 1/(1 + e^x).

    Formula: 1 / (1 + exp(ratio))
    """
    return _fermi(ratio)


@law(FRACTION, reference="elzerman2004", place="thermal tail of the reservoir", ratio=NUMBER)
def tunnelling_error(*, ratio: Array) -> Array:
    """Error of energy-selective readout with the reservoir level midway, 1/(1 + e^(x/2)).

    Formula: 1 / (1 + exp(ratio / 2))
    """
    return _fermi(ratio / 2)


@law(FRACTION, reference="boltzmann", place="relaxation at half of the readout", readout_time=TIME, t1=TIME)
def relaxation_during_readout(*, readout_time: Array, t1: Array) -> Array:
    """Chance that the spin relaxes before it is read, t / (2 T1)."""
    return readout_time / (2 * t1)


@law(ENERGY, reference="job-practice", place="blockade window", temperature=TEMPERATURE)
def blockade_need(*, temperature: Array) -> Array:
    """Window that parity readout wants: five times k T of the electrons (common practice)."""
    return 5 * BOLTZMANN * temperature


@law(
    ENERGY,
    reference="yang2013",
    place="relaxation hot spot at equal splittings",
    energy=ENERGY,
    valley_splitting=ENERGY,
)
def valley_distance(*, energy: Array, valley_splitting: Array) -> Array:
    """Distance of Zeeman energy and valley splitting."""
    return np.abs(energy - valley_splitting)


@law(ENERGY, valley_splitting=ENERGY, in_use=NUMBER)
def smallest_in_use(*, valley_splitting: Array, in_use: Array) -> Array:
    """The smallest value among the qubits in use.

    Formula: none; the smallest of the qubits in use.
    """
    return np.where(in_use > 0, valley_splitting, np.inf).min(axis=-1, keepdims=True)


def _fermi(x: Array) -> Array:
    return np.exp(-np.logaddexp(0, x))  # 1/(1 + e^x) without overflow and with all digits of small shares
