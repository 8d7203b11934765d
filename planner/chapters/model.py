"""Numbers of the noise model that the material brings and a plan may know better."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import Chapter, Lock, Missing, Nature, Typed, given
from planner.kinds import CHARGE_NOISE, COUNT, DISPLACEMENT, FRACTION, RELATIVE_NOISE


@dataclass(frozen=True, slots=True, kw_only=True)
class Model(Chapter):
    """Givens of the noise model; absent ones are the material's."""

    spinful_fraction: Typed = given(
        FRACTION,
        "share of spin-carrying nuclei in the well",
        Nature.CHOICE,
        locks=Lock.WAFER,
        missing=Missing.MATERIAL,
        least=0,
        most=1,
        example="800 ppm",
        sensible="50 ppm to 8 %",
    )
    nuclei: Typed = given(
        COUNT,
        "atoms under the wave function (participation number, atom-normalised)",
        Nature.FACT,
        missing=Missing.MATERIAL,
        above=0,
        example="4e5; estimate",
        sensible="1e4 to 4e6",
    )
    barrier_germanium: Typed = given(
        FRACTION,
        "share of germanium in the barrier",
        Nature.FACT,
        missing=Missing.MATERIAL,
        least=0,
        most=1,
        example="0.3",
        sensible="0.2 to 0.4",
    )
    barrier_share: Typed = given(
        FRACTION,
        "share of the wave function in the barrier",
        Nature.FACT,
        missing=Missing.MATERIAL,
        least=0,
        most=1,
        example="0.02",
        sensible="0.005 to 0.03",
    )
    barrier_nuclei: Typed = given(
        COUNT,
        "atoms of the barrier under the wave function",
        Nature.FACT,
        missing=Missing.MATERIAL,
        above=0,
        example="1e5; estimate",
        sensible="3e4 to 3e5",
    )
    barrier_spinful: Typed = given(
        FRACTION,
        "73Ge share of the barrier's germanium",
        Nature.CHOICE,
        locks=Lock.WAFER,
        missing=Missing.MATERIAL,
        least=0,
        most=1,
        example="7.75 %",
        sensible="0.05 to 7.75 %",
    )
    charge_noise: Typed = given(
        CHARGE_NOISE,
        "amplitude of 1/f charge noise at 1 Hz",
        Nature.FACT,
        missing=Missing.MATERIAL,
        least=0,
        example="0.8 ueV/rtHz",
        sensible="0.2 to 10 ueV/rtHz",
    )
    displacement: Typed = given(
        DISPLACEMENT,
        "shift of the dot per change of its energy",
        Nature.FACT,
        missing=Missing.MATERIAL,
        least=0,
        example="1e-3 nm/ueV",
        sensible="3e-4 to 3e-3 nm/ueV",
    )
    relative_noise: Typed = given(
        RELATIVE_NOISE,
        "1/f amplitude at 1 Hz as a share of the qubit's own frequency",
        Nature.FACT,
        missing=Missing.MATERIAL,
        least=0,
        example="8 ppm/rtHz",
        sensible="3 to 20 ppm/rtHz",
    )


DERIVEDS = ()
LIMITS = ()
