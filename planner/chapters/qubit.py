"""One row per qubit: g-factor or tensor, local field, noise and measured times."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

from planner.declare import Chapter, Form, Lock, Missing, Nature, Typed, Word, given
from planner.kinds import (
    ANGLE,
    ENERGY,
    FIELD,
    FREQUENCY,
    FREQUENCY_NOISE,
    GRADIENT,
    NUMBER,
    RELATIVE_NOISE,
    TIME,
    WHITE_NOISE,
)

ROLE = {
    "use": "takes part in the circuit and is judged",
    "spare": "results are shown, nothing is judged",
    "dead": "left out",
}
# Far above any g-factor reported for a quantum dot; a larger number is a slip of the pen.
LARGEST_G = 100.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Qubit(Chapter):
    """Givens of one qubit, or of all that do not state their own."""

    name: Word = given(
        Form.TEXT, "name of the qubit: its identity in the plan", Nature.FACT, missing=Missing.REQUIRED, example="Q1"
    )
    role: Word = given(
        Form.CHOICE,
        "whether the qubit is used",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="use",
        options=ROLE,
        example="spare",
    )
    g: Typed = given(
        NUMBER,
        "g-factor, or three principal values of the g-tensor",
        Nature.FACT,
        missing=Missing.REQUIRED,
        sizes=(1, 3),
        nonzero=True,
        least=-LARGEST_G,
        most=LARGEST_G,
        example="2.00",
        sensible="0.05 to 15",
    )
    g_euler: Typed = given(
        ANGLE,
        "ZYZ angles that turn the principal axes from the chip frame",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="0, 0, 0 deg",
        sizes=(3,),
        least=-4 * pi,
        most=4 * pi,
        example="20, 1.5, 0 deg",
    )
    local_field: Typed = given(
        FIELD,
        "field at the dot beside the magnet's, chip frame c1, c2, c3",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="0, 0, 0 mT",
        sizes=(3,),
        least=-5,
        most=5,
        example="146, 0, 8 mT; measured CD12",
        sensible="0 to 250 mT",
    )
    gradient: Typed = given(
        GRADIENT,
        "gradient along the motion, of the field component that dephases",
        Nature.FACT,
        missing=Missing.OFF,
        least=0,
        example="0.1 mT/nm",
        sensible="0.01 to 0.3 mT/nm",
    )
    rabi_frequency: Typed = given(
        FREQUENCY,
        "Rabi frequency, full cycles per second",
        Nature.CHOICE,
        locks=Lock.OPEN,
        above=0,
        example="2 MHz",
        sensible="0.5 to 50 MHz",
    )
    valley_splitting: Typed = given(
        ENERGY, "valley splitting", Nature.FACT, above=0, example="142 ueV; measured CD12", sensible="10 to 500 ueV"
    )
    frequency_noise: Typed = given(
        FREQUENCY_NOISE,
        "1/f amplitude of the qubit's frequency at 1 Hz",
        Nature.FACT,
        missing=Missing.OFF,
        least=0,
        example="4.0 kHz/rtHz",
        sensible="1 to 20 kHz/rtHz",
    )
    relative_noise: Typed = given(
        RELATIVE_NOISE,
        "1/f amplitude at 1 Hz as a share of the qubit's frequency",
        Nature.FACT,
        missing=Missing.OFF,
        least=0,
        example="8 ppm/rtHz",
        sensible="3 to 20 ppm/rtHz",
    )
    white_noise: Typed = given(
        WHITE_NOISE,
        "white noise of the qubit's frequency, one-sided",
        Nature.FACT,
        missing=Missing.OFF,
        least=0,
        example="100 Hz^2/Hz",
        sensible="1 to 1e4 Hz^2/Hz",
    )
    nuclear_noise: Typed = given(
        FREQUENCY,
        "slow rms of the nuclei instead of the bath model; holes: along the heavy axis",
        Nature.FACT,
        missing=Missing.OFF,
        least=0,
        example="11 kHz; measured CD12",
        sensible="1 kHz to 20 MHz",
    )
    tracked_noise: Typed = given(
        FREQUENCY,
        "what real-time tracking leaves of the nuclear noise",
        Nature.FACT,
        missing=Missing.OFF,
        least=0,
        example="1.8 MHz",
        sensible="10 kHz to 2 MHz",
    )
    t1: Typed = given(
        TIME,
        "relaxation time",
        Nature.FACT,
        missing=Missing.OFF,
        above=0,
        example="80 ms; measured CD12",
        sensible="0.1 ms to 10 s",
    )
    t2_star: Typed = given(
        TIME,
        "measured 1/e time of exp(-(t/T2*)^2); replaces the modelled noise it contains",
        Nature.FACT,
        missing=Missing.OFF,
        above=0,
        example="8.1 ± 0.6 us; measured CD12",
        sensible="10 ns to 200 us",
    )
    note: Word = given(
        Form.TEXT, "anything else about this qubit", Nature.FACT, missing=Missing.OFF, example="noisy gate"
    )


DERIVEDS = ()
LIMITS = ()
