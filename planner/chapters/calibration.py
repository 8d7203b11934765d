"""How often and how well each qubit's frequency is calibrated."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import Chapter, Compare, Derived, Limit, Lock, Missing, Nature, Per, Typed, given, word
from planner.kinds import COUNT, FRACTION, FREQUENCY, TIME
from planner.physics import addressing, dephasing, gates


@dataclass(frozen=True, slots=True, kw_only=True)
class Calibration(Chapter):
    """Givens of the frequency calibration."""

    interval: Typed = given(
        TIME,
        "time between two calibrations",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="30 min",
        above=0,
        example="20 min",
        sensible="1 min to 10 h",
    )
    wait: Typed = given(
        TIME,
        "Ramsey wait of the calibration; unset: half of T2*",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.FOUND,
        above=0,
        example="4 us",
        sensible="a quarter to all of T2*",
    )
    shots: Typed = given(
        COUNT,
        "shots of one calibration",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="1000",
        least=1,
        most=1e12,
        example="800",
        sensible="100 to 10000",
    )
    contrast: Typed = given(
        FRACTION,
        "contrast of the Ramsey fringe at zero wait",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="0.6",
        above=0,
        most=1,
        example="0.55; measured CD12",
        sensible="0.3 to 0.9",
    )
    shot_time: Typed = given(
        TIME,
        "length of one shot, with initialisation and readout",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="200 us",
        above=0,
        example="120 us",
        sensible="10 us to 5 ms",
    )
    record_length: Typed = given(
        TIME,
        "slowest noise that counts, f_l = 1/record; unset: the interval",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.FOUND,
        above=0,
        example="10 min",
        sensible="1 min to 10 h",
    )
    allowed_time_share: Typed = given(
        FRACTION,
        "share of the time that calibration may take",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="5 %",
        above=0,
        most=1,
        example="5 %",
        sensible="1 to 20 %",
    )


DERIVEDS = (
    Derived(
        "calibration.wait",
        gates.half,
        {"time": "coherence.t2_star"},
        help="Ramsey wait of the calibration: half of T2*",
    ),
    Derived(
        "calibration.record_length",
        gates.same,
        {"time": "calibration.interval"},
        per=Per.PLAN,
        help="slowest noise that counts: one calibration interval",
    ),
    Derived(
        "calibration.lowest",
        dephasing.lowest_frequency,
        {"time": "calibration.record_length"},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "calibration.time_share",
        addressing.time_share,
        {
            "in_use": word("qubit.role", "use"),
            "shots": "calibration.shots",
            "shot_time": "calibration.shot_time",
            "wait": "calibration.wait",
            "interval": "calibration.interval",
        },
        per=Per.PLAN,
        help="share of the time that calibrating every qubit in use takes",
    ),
)

LIMITS = (
    Limit(
        "calibration-time",
        "calibrating every qubit in use takes no more than its share of the time",
        (Compare("calibration.allowed_time_share", "calibration.time_share", FRACTION),),
        per=Per.PLAN,
        quiet=True,
    ),
    Limit(
        "calibration",
        "the calibration's own precision stays within one source's share of the allowed noise",
        (Compare("noise.allowed_share", "noise.calibration", FREQUENCY),),
    ),
)
