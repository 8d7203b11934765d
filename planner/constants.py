"""Physical constants in SI, CODATA 2022 (NIST SP 961, May 2024; the same values as scipy.constants 1.17).

Exact constants of the SI (h, e, k) carry no uncertainty; the others are quoted to their last CODATA digit.
"""

from __future__ import annotations

from typing import Final

PLANCK: Final = 6.62607015e-34  # J s, exact (SI 2019)
BOLTZMANN: Final = 1.380649e-23  # J/K, exact (SI 2019)
ELEMENTARY_CHARGE: Final = 1.602176634e-19  # C, exact (SI 2019)
BOHR_MAGNETON: Final = 9.2740100657e-24  # J/T, CODATA 2022
BOHR_MAGNETON_HZ: Final = BOHR_MAGNETON / PLANCK  # Hz/T; CODATA 2022 prints 1.39962449171(44)e10
MICRO_EV: Final = 1e-6 * ELEMENTARY_CHARGE  # J
EULER_GAMMA: Final = 0.5772156649015329  # Euler-Mascheroni constant, OEIS A001620
APERY: Final = 1.2020569031595942  # zeta(3), OEIS A002117
